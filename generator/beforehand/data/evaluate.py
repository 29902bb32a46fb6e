"""Expressions on the rows of a file: a row without a value is named by its line."""

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from beforehand.data.table import Rows
from beforehand.data.wording import line_list
from beforehand.errors import DataFault, Fault
from beforehand.spec.expressions import Column, ExpressionFault, parse


def evaluated(text: str, columns: Mapping[str, Column], lines: NDArray[np.intp], *, what: str, path: str) -> Column:
    """Evaluate an expression in every row of a file; ``what`` names it in a fault: "the exclusion"."""
    try:
        return parse(text).evaluate(columns)
    except ExpressionFault as wrong:
        if not wrong.rows:
            raise DataFault(path, f"{what} ({text}): {wrong.text}.") from None
        found = sorted(lines[list(wrong.rows)].tolist())
        told = (
            f"{what} ({text}) has no value: {wrong.text}, on {line_list(found)}. "
            "Correct the file, exclude these rows, or give them another value with pick(condition, a, b)."
        )
        raise DataFault(path, [Fault(found[0], 0, told)]) from None


def is_true(condition: Column) -> Rows:
    """Give the rows in which a condition is true; where it is missing, it is not."""
    rows: Rows = condition.values.astype(bool) & ~condition.missing
    return rows
