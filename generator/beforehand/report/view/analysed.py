"""The flow of rows: received, excluded, missing, analysed, by group."""

from collections.abc import Mapping

from beforehand.record.model import AnalysisSetRecord, ExclusionRecord, MissingRecord, Record, RowsRecord
from beforehand.report.view import tables
from beforehand.report.view.described import described
from beforehand.report.view.headings import HEADINGS
from beforehand.report.view.model import Analysed, AnalysedData, Cell, Row, Table
from beforehand.spelling import MINUS, integer

# More groups than this are written as a list in one cell.
GROUPS_AS_COLUMNS = 6
LINES_NAMED = 8

KNOWN_AT = {"before_allocation": "known before allocation", "after_allocation": "known only after allocation"}


def analysed(record: Record) -> Analysed:
    """Write the section."""
    return Analysed(heading=HEADINGS["analysed"], data=tuple(_data(record, rows) for rows in record.rows))


def _data(record: Record, rows: RowsRecord) -> AnalysedData:
    found = [_flow(rows), _overlaps(rows), _missing(rows), _derived(rows)]
    return AnalysedData(
        title=f"Data set {rows.data}", sentences=_sentences(rows), tables=tuple(table for table in found if table.rows),
        described=described(record, rows.data),
    )  # fmt: skip


def _sentences(rows: RowsRecord) -> tuple[str, ...]:
    found = [f"One row is {rows.one_row_is}."] if rows.one_row_is else []
    if rows.allocated_by:
        found.append(f"Groups are those of {rows.allocated_by}, by which units were allocated.")
    if not rows.exclusions:
        found.append("The spec has no exclusion rule, and no row was excluded.")
    return (" ".join([*found, _quiet(rows)]).strip(),)


def _quiet(rows: RowsRecord) -> str:
    without = len(rows.missing) - len(_with_missing(rows))
    if not rows.missing or not without:
        return ""
    if without == len(rows.missing):
        return f"None of the {integer(without)} variables used has a missing value among the rows analysed."
    return f"{integer(without)} of the {integer(len(rows.missing))} variables used have no missing value."


def _groups(rows: RowsRecord) -> tuple[str, ...]:
    groups = tuple(rows.received_by_group)
    return groups if len(groups) <= GROUPS_AS_COLUMNS else ()


def _head(rows: RowsRecord, first: str) -> tuple[str, ...]:
    groups = _groups(rows)
    if groups or not rows.received_by_group:
        return first, "All", *groups
    return first, "All", "By group"


def _cells(rows: RowsRecord, total: int, by_group: Mapping[str, int], sign: str = "") -> tuple[Cell, ...]:
    def count(value: int) -> Cell:
        return Cell(f"{sign if value else ''}{integer(value)}", "number" if value else "number none")

    groups = _groups(rows)
    if groups or not rows.received_by_group:
        return count(total), *(count(by_group.get(group, 0)) for group in groups)
    listed = ", ".join(f"{group} {integer(value)}" for group, value in by_group.items() if value)
    return count(total), Cell(listed or "none")


def _table(rows: RowsRecord, caption: str, first: str, body: list[Row], style: str) -> Table:
    names = _head(rows, first)
    numbers = range(1, len(names) if names[-1] != "By group" else 2)
    return Table(caption=caption, head=tables.head(*names, numbers=numbers), rows=tuple(body), style=style)


def _flow(rows: RowsRecord) -> Table:
    body = [Row(head=Cell("Received"), cells=_cells(rows, rows.received, rows.received_by_group))]
    body += [
        Row(
            head=Cell(f"Excluded: {rule.because}", note=_rule(rule)),
            cells=_cells(rows, rule.rows, rule.by_group, MINUS),
        )
        for rule in rows.exclusions
    ]
    body.append(Row(head=Cell("Analysed"), cells=_cells(rows, rows.analysed, rows.analysed_by_group), style="total"))
    body += [
        Row(
            head=Cell(f"Analysis set {one.id}", note=_set(one)),
            cells=_cells(rows, one.rows, one.by_group),
        )
        for one in rows.analysis_sets
    ]
    return _table(rows, f"Flow of rows, data set {rows.data}", "Rows", body, "flow")


def _rule(rule: ExclusionRecord) -> str:
    kept = _undecided(rule.undecided, rule.undecided_lines, "kept")
    return f"{rule.where}; {KNOWN_AT.get(rule.known_at, rule.known_at)}{kept}"


def _undecided(rows: int, lines: tuple[int, ...], what: str) -> str:
    if not rows:
        return ""
    more = f" and {integer(len(lines) - LINES_NAMED)} more" if len(lines) > LINES_NAMED else ""
    where = f" (file lines {', '.join(map(str, lines[:LINES_NAMED]))}{more})" if lines else ""
    return f"; {integer(rows)} {what} because the condition met a missing value{where}"


def _set(one: AnalysisSetRecord) -> str:
    left_out = _undecided(one.undecided, one.undecided_lines, "left out")
    return f"{one.where or 'all rows'}; {one.principle.replace('_', ' ') or 'no principle stated'}{left_out}"


def _overlaps(rows: RowsRecord) -> Table:
    body = tuple(
        Row(
            head=Cell(f"{one.first} and {one.second}"),
            cells=tuple(Cell(integer(count), "number") for count in (one.both, one.only_first, one.only_second)),
        )
        for one in rows.overlaps
    )
    names = ("Analysis sets", "In both", "Only in the first", "Only in the second")
    return Table(caption="Rows that analysis sets share", head=tables.head(*names, numbers=(1, 2, 3)), rows=body)


def _with_missing(rows: RowsRecord) -> tuple[MissingRecord, ...]:
    return tuple(one for one in rows.missing if one.rows)


def _missing(rows: RowsRecord) -> Table:
    body = [Row(head=Cell(one.variable), cells=_cells(rows, one.rows, one.by_group)) for one in _with_missing(rows)]
    return _table(rows, "Missing values among the rows analysed", "Variable", body, "missing")


def _derived(rows: RowsRecord) -> Table:
    body = tuple(Row(head=Cell(name), cells=(Cell(text, "code"),)) for name, text in rows.derived.items())
    return Table(caption="Derived columns", head=tables.head("Column", "Worked out as"), rows=body, style="derived")
