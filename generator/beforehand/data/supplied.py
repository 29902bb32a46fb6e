"""Families whose hypotheses are the rows of a table: what names them, and the numbers that others computed."""

import numpy as np

from beforehand.data.sets import in_order, rows_of
from beforehand.data.table import Table
from beforehand.data.wording import capped, line_list, quoted
from beforehand.errors import DataFault, Fault
from beforehand.spec.model import HypothesesFrom


def labelled_rows(table: Table, form: HypothesesFrom, family: str) -> dict[str, int]:
    """Find the row of each hypothesis by its label, in the order of the rows."""
    told = f"the column {quoted(form.each)} names the hypotheses of family '{family}'"
    rows = np.flatnonzero(rows_of(table, form, what=f"family '{family}'").rows)
    label = table.columns[form.each]
    unnamed = in_order(table.lines[rows[label.missing[rows]]])
    if unnamed:
        raise DataFault(table.declared.file, [Fault(unnamed[0], 0, f"{told}, and is missing on {line_list(unnamed)}.")])
    found: dict[str, list[int]] = {}
    for row, name in zip(rows.tolist(), label.values[rows].tolist(), strict=True):
        found.setdefault(name, []).append(row)
    faults = [
        Fault(lines[0], 0, f"{told}, and is the same on {line_list(lines)}. Write one row for each hypothesis.")
        for lines in (in_order(table.lines[same]) for same in found.values() if len(same) > 1)
    ]
    faults += _impossible_p(table, form, family)
    if faults:
        raise DataFault(table.declared.file, capped(faults))
    return {name: same[0] for name, same in found.items()}


def _impossible_p(table: Table, form: HypothesesFrom, family: str) -> list[Fault]:
    if form.p is None:
        return []
    p = table.columns[form.p]
    lines = in_order(table.lines[~p.missing & ~((p.values >= 0) & (p.values <= 1))])
    told = f"the column {quoted(form.p)} holds the p-values of family '{family}', which must lie between 0 and 1"
    return [Fault(lines[0], 0, f"{told}; other numbers stand on {line_list(lines)}.")] if lines else []
