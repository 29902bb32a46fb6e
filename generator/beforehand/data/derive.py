"""From the rows received to the rows analysed: exclusions in their order, and then derived columns.

The order is fixed. Each exclusion sees the columns of the file, in the rows that the exclusions before it left; a
derived column is computed on the rows that all of them left, from columns of the file and derived columns written
above it. So an excluded row can't make a derivation fail, and no derived value decides whether a row is excluded.
"""

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from beforehand.data.evaluate import evaluated, is_true
from beforehand.data.sets import analysis_rows, in_order
from beforehand.data.table import Excluded, Flow, Grouping, Rows, Table
from beforehand.data.wording import capped, line_list, listed, quoted
from beforehand.errors import DataFault, Fault
from beforehand.spec.expressions import Column, parse
from beforehand.spec.model import DataSet, Derived


def table_of(received: Mapping[str, Column], lines: NDArray[np.intp], declared: DataSet) -> Table:
    """Exclude, derive and find the analysis sets of one data set whose rows are in their final order."""
    kept, exclusions = _excluded(received, lines, declared)
    columns = {name: _rows_of(column, kept) for name, column in received.items()}
    left = lines[kept]
    if not left.size:
        raise DataFault(declared.file, "the exclusions leave no row. Read the conditions under 'exclude' once more.")
    columns |= _derived(columns, left, declared)
    grouping = _grouping(columns, declared)
    return Table(
        declared=declared,
        columns=columns,
        lines=left,
        grouping=grouping,
        flow=Flow(
            received=_grouping(received, declared).counts(np.ones(lines.size, dtype=bool)),
            exclusions=exclusions,
            analysed=grouping.counts(np.ones(left.size, dtype=bool)),
        ),
        sets=analysis_rows(columns, left, grouping, declared),
    )


def _excluded(
    received: Mapping[str, Column], lines: NDArray[np.intp], declared: DataSet
) -> tuple[Rows, tuple[Excluded, ...]]:
    """Apply the exclusions one after another, and account for each."""
    kept = np.ones(lines.size, dtype=bool)
    grouping = _grouping(received, declared)
    found = []
    for rule in declared.exclude:
        left = {name: _rows_of(column, kept) for name, column in received.items()}
        condition = evaluated(rule.where, left, lines[kept], what="the exclusion", path=declared.file)
        out = kept.copy()
        out[kept] = is_true(condition)
        found.append(
            Excluded(
                where=rule.where,
                because=rule.because,
                known_at=rule.known_at,
                uses=parse(rule.where).names,
                counts=grouping.counts(out),
                undecided=in_order(lines[kept][condition.missing]),
            )
        )
        kept &= ~out
    return kept, tuple(found)


def _derived(columns: Mapping[str, Column], lines: NDArray[np.intp], declared: DataSet) -> dict[str, Column]:
    derived: dict[str, Column] = {}
    faults: list[Fault] = []
    for name, rule in declared.derive.items():
        known = {**columns, **derived}
        if not known.keys() >= set(parse(rule.is_).names):
            continue  # it needs a column that has a fault already
        what = f"the derived column {quoted(name)}"
        try:
            derived[name] = evaluated(rule.is_, known, lines, what=what, path=declared.file)
        except DataFault as wrong:
            faults += wrong.faults
        else:
            faults += _undeclared_levels(name, rule, derived[name], lines)
    if faults:
        raise DataFault(declared.file, capped(faults))
    return derived


def _undeclared_levels(name: str, rule: Derived, column: Column, lines: NDArray[np.intp]) -> list[Fault]:
    if rule.levels is None:
        return []
    odd = ~np.isin(column.values, rule.levels) & ~column.missing
    if not odd.any():
        return []
    found = in_order(lines[odd])
    texts = listed([*map(quoted, dict.fromkeys(column.values[odd].tolist()))], shown=5)
    levels = listed([*map(quoted, rule.levels)], shown=10, last="or")
    told = f"the derived column {quoted(name)} must be {levels}; found {texts} on {line_list(found)}."
    return [Fault(found[0], 0, told)]


def _grouping(columns: Mapping[str, Column], declared: DataSet) -> Grouping:
    """Give the allocated group of each row; no groups where no allocation is declared."""
    if declared.allocated is None:
        rows = next(iter(columns.values())).missing.size
        return Grouping((), np.full(rows, -1, dtype=np.intp))
    column = columns[declared.allocated.by]
    values = column.values.tolist()
    present = sorted({value for value, gone in zip(values, column.missing, strict=True) if not gone})
    labels = declared.columns[declared.allocated.by].levels or tuple(map(_label, present))
    code = {label: i for i, label in enumerate(labels)}
    codes = [-1 if gone else code[_label(value)] for value, gone in zip(values, column.missing, strict=True)]
    return Grouping(labels, np.array(codes, dtype=np.intp))


def _label(value: str | float) -> str:
    return value if isinstance(value, str) else repr(value).removesuffix(".0")


def _rows_of(column: Column, rows: Rows) -> Column:
    return Column(column.values[rows], column.missing[rows], column.kind)
