"""Descriptions: tables of what stands in the named columns, group by group, without any p-value."""

import math
from collections.abc import Callable, Iterable

from beforehand.record.model import DescribedColumn, DescribedGroup, DescriptionRecord, Record
from beforehand.report.view import tables
from beforehand.report.view.model import Cell, Row, Table
from beforehand.spelling import NO_BREAK, NOTHING, THIN, decimal, integer

SIDE_BY_SIDE = 6
"""So many groups, all rows together being the first, stand beside one another; the others continue in a table below."""


def described(record: Record, data: str) -> tuple[Table, ...]:
    """Write the descriptions of one data set."""
    return tuple(table for one in record.descriptions if one.data == data for table in _tables(one))


def _tables(one: DescriptionRecord) -> Iterable[Table]:
    for start in range(0, len(one.groups), SIDE_BY_SIDE):
        yield _table(one, range(start, min(start + SIDE_BY_SIDE, len(one.groups))), continued=start > 0)


def _table(one: DescriptionRecord, places: range, *, continued: bool) -> Table:
    names = [one.groups[at] or "All" for at in places]
    counts = tuple(Cell(integer(one.rows[at]), "number") for at in places)
    body = [Row(head=Cell("Rows"), cells=counts)]
    for column in one.columns:
        body += _column(column, [column.groups[at] for at in places])
    return Table(
        caption=_caption(one, continued=continued),
        head=tables.head("Column", *names, numbers=range(1, len(names) + 1)),
        rows=tuple(body),
        notes=tuple(_notes(one)),
        style="described",
    )


def _caption(one: DescriptionRecord, *, continued: bool) -> str:
    parts = [f"analysis set {one.analysis_set}" if one.analysis_set else "all rows analysed"]
    parts += [f"where {one.where}"] if one.where else []
    parts += [f"by {one.by}"] if one.by else []
    return f"Description {one.id}{', continued' if continued else ''}: {', '.join(parts)}"


def _column(column: DescribedColumn, groups: list[DescribedGroup]) -> Iterable[Row]:
    name = f"{column.column}, {column.unit}" if column.unit else column.column
    yield Row(head=Cell(name, note="values"), cells=tuple(Cell(integer(one.n), "number") for one in groups))
    yield Row(head=Cell("missing", "part"), cells=tuple(_missing(one.missing) for one in groups), style="part")
    for label, texts in _figures(column, groups):
        yield Row(head=Cell(label, "part"), cells=tables.plain(texts, "number"), style="part")


def _missing(count: int) -> Cell:
    return Cell(integer(count), "number" if count else "number none")


def _figures(column: DescribedColumn, groups: list[DescribedGroup]) -> Iterable[tuple[str, list[str]]]:
    """Give the lines of one column: what they are called, and the text in each group."""
    match column.kind:
        case "category":
            for at, level in enumerate(column.levels):
                yield level, [_share(one, at) for one in groups]
        case "date":
            if any(one.earliest for one in groups):
                yield "first", [one.earliest or NOTHING for one in groups]
                yield "last", [one.latest or NOTHING for one in groups]
        case kind:
            decimals = _decimals(column)
            if kind == "count":
                yield "total", [_number(one.total, 0) for one in groups]
            for label, get in FIGURES.items():
                yield label, [_number(get(one), decimals) for one in groups]


FIGURES: dict[str, Callable[[DescribedGroup], float | None]] = {
    "mean": lambda one: one.mean,
    "SD": lambda one: one.sd,
    "lower quartile": lambda one: one.lower_quartile,
    "median": lambda one: one.median,
    "upper quartile": lambda one: one.upper_quartile,
}


def _number(value: float | None, decimals: int) -> str:
    return NOTHING if value is None else decimal(value, decimals)


def _decimals(column: DescribedColumn) -> int:
    """Give the decimals that show three significant digits of the largest spread."""
    spread = max(one.sd or 0.0 for one in column.groups)
    return min(10, max(0, 2 - math.floor(math.log10(spread)))) if spread > 0 else 3


def _share(one: DescribedGroup, at: int) -> str:
    count = one.counts[at]
    return f"{integer(count)}{NO_BREAK}({decimal(100 * count / one.n, 1)}{THIN}%)" if one.n else integer(count)


def _notes(one: DescriptionRecord) -> Iterable[str]:
    if one.undecided:
        rows = "1 row is" if one.undecided == 1 else f"{integer(one.undecided)} rows are"
        yield f"{rows} left out because the condition met a missing value."
    numbers = [column for column in one.columns if column.kind in ("number", "count")]
    if any(0 < group.n < one.fewest for column in numbers for group in column.groups):
        yield (
            f"Numbers are summarised from {integer(one.fewest)} values on: the spec lets no row value be printed, and "
            "five figures of fewer values could give every one of them back."
        )
    if any(column.kind == "category" and any(group.missing for group in column.groups) for column in one.columns):
        yield "Shares are of the values that are there."
