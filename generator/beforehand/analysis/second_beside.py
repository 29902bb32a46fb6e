"""What a test takes beside the outcome, a second time: row by row from plain lists, by a path of its own."""

from collections.abc import Callable
from typing import Any

import numpy as np

from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
from beforehand.spec.model import Hypothesis

ColumnOf = Callable[[str], list[Any]]


def complete_rows(hypothesis: Hypothesis, outcome: list[Any], column: ColumnOf, rows: list[int]) -> list[int]:
    """Keep the rows in which nothing is missing that the test takes."""
    takes = STATISTICAL_TESTS[hypothesis.test].takes
    names = [name for word, one in _written(hypothesis).items() if word in takes for name in one]
    needed = [outcome, *map(column, names)]
    return [row for row in rows if all(values[row] is not None for values in needed)]


def taken_beside(hypothesis: Hypothesis, column: ColumnOf, sides: list[list[int]]) -> dict[str, Any]:
    """Give what the test takes, for the complete rows of each side."""
    takes = STATISTICAL_TESTS[hypothesis.test].takes
    given = {word: names for word, names in _written(hypothesis).items() if names and word in takes}
    return {word: tuple(_of(word, names, column, side) for side in sides) for word, names in given.items()}


def _written(hypothesis: Hypothesis) -> dict[str, list[str]]:
    return {
        "exposure": [hypothesis.exposure] if hypothesis.exposure else [],
        "covariates": list(hypothesis.covariates or []),
        "strata": list(hypothesis.strata or []),
        "time": [hypothesis.time.column] if hypothesis.time else [],
    }


def _of(word: str, names: list[str], column: ColumnOf, side: list[int]) -> Any:
    values = {name: [column(name)[row] for row in side] for name in names}
    if word == "covariates":
        return {name: np.array(listed) for name, listed in values.items()}
    if word == "strata":  # a text that no two different strata share
        return np.array([repr(one) for one in zip(*values.values(), strict=True)], dtype=np.str_)
    return np.array(values[names[0]], dtype=np.float64)
