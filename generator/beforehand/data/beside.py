"""What a test takes of each row beside its outcome: which columns, and their values in the shape of the samples."""

from collections.abc import Iterator, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from beforehand.data.sets import in_order
from beforehand.data.table import Table
from beforehand.data.wording import line_list, quoted
from beforehand.errors import DataFault, Fault
from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
from beforehand.spec.model import Hypothesis

Positions = NDArray[np.intp]


def columns_beside(hypothesis: Hypothesis) -> dict[str, tuple[str, ...]]:
    """Give the columns that a hypothesis hands its test beside the outcome, by the word of the spec."""
    written = {
        "exposure": (hypothesis.exposure,) if hypothesis.exposure else (),
        "covariates": hypothesis.covariates or (),
        "strata": hypothesis.strata or (),
        "time": (hypothesis.time.column,) if hypothesis.time else (),
    }
    return {word: written[word] for word in STATISTICAL_TESTS[hypothesis.test].takes if written[word]}


def without(table: Table, hypothesis: Hypothesis, rows: Positions) -> NDArray[np.bool_]:
    """Find the rows in which one of these columns has no value."""
    gone = np.zeros(rows.size, dtype=bool)
    for name in _names(hypothesis):
        gone |= table.columns[name].missing[rows]
    return gone


def _names(hypothesis: Hypothesis) -> tuple[str, ...]:
    return tuple(name for names in columns_beside(hypothesis).values() for name in names)


def beside(table: Table, hypothesis: Hypothesis, sides: Sequence[Positions]) -> dict[str, Any]:
    """Give their values for the complete rows of each side."""
    found: dict[str, Any] = {}
    for word, names in columns_beside(hypothesis).items():
        if word == "covariates":
            found[word] = tuple({name: table.columns[name].values[rows] for name in names} for rows in sides)
        elif word == "strata":
            numbers = table.frame.groupby(list(names), dropna=False).ngroup().to_numpy(dtype=np.intp)
            found[word] = tuple(numbers[rows] for rows in sides)
        else:
            found[word] = tuple(table.columns[names[0]].values[rows] for rows in sides)
    return found


def missing_beside(table: Table, hypothesis: Hypothesis, rows: Positions) -> Iterator[Fault]:
    """Say which of these columns lack a value, for a hypothesis that allows none."""
    for name in _names(hypothesis):
        gone = rows[table.columns[name].missing[rows]]
        if gone.size:
            lines = in_order(table.lines[gone])
            told = f"hypothesis '{hypothesis.id}' allows no missing {quoted(name)} (method: fail); it is missing on"
            yield Fault(lines[0], 0, f"{told} {line_list(lines)}.")


def refuse_out_of_range(table: Table, hypothesis: Hypothesis, rows: Positions) -> None:
    """Refuse an exposure that is not above 0, and a time below 0."""
    given = columns_beside(hypothesis)
    for word, must in (("exposure", "above 0"), ("time", "0 or more")):
        for name in given.get(word, ()):
            column = table.columns[name]
            values = column.values[rows]
            wrong = rows[~column.missing[rows] & (values <= 0 if word == "exposure" else values < 0)]
            if wrong.size:
                lines = in_order(table.lines[np.unique(wrong)])
                told = (
                    f"hypothesis '{hypothesis.id}' takes {quoted(name)} as its {word}, which is {must}; it is not on "
                    f"{line_list(lines)}. Correct the file, or leave such rows out by 'where' or 'exclude'."
                )
                raise DataFault(table.declared.file, [Fault(lines[0], 0, told)])
