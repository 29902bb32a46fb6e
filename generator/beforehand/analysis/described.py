"""Tables without any p-value: what stands in the named columns, group by group."""

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from beforehand.data.dataset import Dataset
from beforehand.data.sets import rows_of
from beforehand.data.table import NO_GROUP, Rows, Table
from beforehand.record.model import DescribedColumn, DescribedGroup, DescriptionRecord
from beforehand.spec.model import Description
from beforehand.spec.planned import Spec
from beforehand.terms import DescribedKind

FEWEST = 6
"""Mean, standard deviation, median and two quartiles are five numbers: of five values or fewer they can give every
single one back, so that they are shown from six values on."""


def description_records(spec: Spec, dataset: Dataset) -> tuple[DescriptionRecord, ...]:
    """Make every table of the spec."""
    return tuple(_record(asked, dataset.tables[asked.data or spec.data[0].id]) for asked in spec.document.describe)


def _record(asked: Description, table: Table) -> DescriptionRecord:
    chosen = rows_of(table, asked, what=f"description '{asked.id}'")
    groups = _groups(asked, table, chosen.rows)
    return DescriptionRecord(
        id=asked.id,
        data=table.declared.id,
        analysis_set=asked.analysis_set or "",
        where=asked.where or "",
        undecided=chosen.undecided,
        by=asked.by or "",
        groups=tuple(groups),
        rows=tuple(int(rows.sum()) for rows in groups.values()),
        columns=tuple(_column(name, table, groups) for name in asked.columns),
        fewest=_fewest(table),
    )


def _groups(asked: Description, table: Table, rows: Rows) -> dict[str, Rows]:
    """Give the rows of all together and of each group; those without a group stand last, where there are any."""
    groups = {"": rows}
    if asked.by is None:
        return groups
    by = table.columns[asked.by]
    groups |= {level: rows & (by.values == level) & ~by.missing for level in _levels(table, asked.by)}
    return groups | ({NO_GROUP: rows & by.missing} if (rows & by.missing).any() else {})


def _levels(table: Table, name: str) -> tuple[str, ...]:
    declared = table.declared.columns.get(name) or table.declared.derive[name]
    return declared.levels or ()


def _column(name: str, table: Table, groups: dict[str, Rows]) -> DescribedColumn:
    declared = table.declared.columns.get(name) or table.declared.derive[name]
    kind = _kind(name, table)
    return DescribedColumn(
        column=name,
        kind=kind,
        unit=declared.unit or "",
        levels=_levels(table, name) if kind == "category" else (),
        groups=tuple(_group(name, kind, table, rows) for rows in groups.values()),
    )


def _kind(name: str, table: Table) -> DescribedKind:
    declared = table.declared.columns.get(name)
    if declared and declared.kind == "count":
        return "count"
    kinds: dict[str, DescribedKind] = {"text": "category", "date": "date"}
    return kinds.get(table.columns[name].kind, "number")


def _group(name: str, kind: DescribedKind, table: Table, rows: Rows) -> DescribedGroup:
    column = table.columns[name]
    values = column.values[rows & ~column.missing]
    sizes = DescribedGroup(n=values.size, missing=int((rows & column.missing).sum()))
    if kind == "category":
        return replace(sizes, counts=tuple(int((values == level).sum()) for level in _levels(table, name)))
    if kind == "date":
        shown = table.declared.print_row_values and values.size
        return replace(sizes, earliest=str(min(values)), latest=str(max(values))) if shown else sizes
    if values.size < _fewest(table):
        return sizes
    summary = _summarised(values, sizes)
    return replace(summary, total=float(values.sum())) if kind == "count" else summary


def _summarised(values: NDArray[np.float64], sizes: DescribedGroup) -> DescribedGroup:
    lower, median, upper = (float(q) for q in np.quantile(values, [0.25, 0.5, 0.75]))
    return replace(
        sizes,
        mean=float(values.mean()),
        sd=float(values.std(ddof=1)) if values.size > 1 else None,
        median=median,
        lower_quartile=lower,
        upper_quartile=upper,
    )


def _fewest(table: Table) -> int:
    return 1 if table.declared.print_row_values else FEWEST
