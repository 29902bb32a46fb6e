"""Estimates of one family with their intervals and bounds."""

import math
from collections.abc import Iterable

from beforehand.report.view import tables
from beforehand.report.view.lines import Line
from beforehand.report.view.model import Cell, Head, Table
from beforehand.report.view.sentences import capital
from beforehand.report.view.written import Written, bound, bound_level, written
from beforehand.spelling import NOTHING, integer, percent

Column = tuple[Head, tuple[Cell, ...]]

UNADJUSTED = "The unadjusted interval holds for each hypothesis by itself, not for all of them together."
BOUND = "The end that a one-sided test looks at is also a one-sided bound, at half the error."


def estimates_table(lines: tuple[Line, ...]) -> Table:
    """Tabulate the estimates of one family with unadjusted and, where they exist, simultaneous intervals."""
    family = lines[0].family
    numbers = tuple(written(line) for line in lines)
    what = _common(_estimated(line) for line in lines)
    label = "" if family.tested else "; no claim, because the family was not tested"
    first: list[Head] = [Head(text="Hypothesis", rows="2")]
    cells: list[tuple[Cell, ...]] = []
    if not what:
        first.append(Head(text="Estimated", rows="2"))
        cells.append(tables.plain(_estimated(line) for line in lines))
    for head, column in (*_sizes(lines), _estimate(numbers)):
        first.append(head)
        cells.append(column)
    if _several_levels(lines):
        first.append(Head(text="Level of the unadjusted interval", rows="2", style="number"))
        each = (line.number("interval_level") for line in lines)
        cells.append(tables.plain((NOTHING if math.isnan(one) else percent(one) for one in each), "number"))
    second: list[Head] = []
    for name, lower, upper in _intervals(lines, numbers):
        first.append(Head(text=name, columns="2", scope="colgroup", style="group"))
        second += [Head(text="from", style="number"), Head(text="to", style="number")]
        cells += [tables.aligned(lower), tables.aligned(upper)]
    bounds = tuple(bound(line) for line in lines)
    if any(bounds):
        levels = {bound_level(line) for line, text in zip(lines, bounds, strict=True) if text}
        level = f", {levels.pop()}" if len(levels) == 1 else ""
        first.append(Head(text=f"One-sided bound{level}", rows="2", style="next"))
        cells.append(tables.plain((text or NOTHING for text in bounds), "next"))
    return Table(
        caption=f"{capital(what or 'estimates')}, family {family.id}{label}",
        head=(tuple(first), tuple(second)),
        rows=tables.rows((Cell(line.label) for line in lines), tables.columns(*cells)),
        notes=tuple(_notes(lines, bool(any(bounds)))), style="estimates",
    )  # fmt: skip


def _estimated(line: Line) -> str:
    return ", ".join(part for part in (line.hypothesis.estimates, line.hypothesis.unit) if part)


def _common(texts: Iterable[str]) -> str:
    found = set(texts)
    return found.pop() if len(found) == 1 else ""


def _sizes(lines: tuple[Line, ...]) -> tuple[Column, ...]:
    if not any(line.count("n_second") for line in lines):
        return ((Head(text="n", rows="2", style="number"), _counts(lines, "n")),)
    return (
        (Head(text="n first", rows="2", style="number"), _counts(lines, "n_first")),
        (Head(text="n second", rows="2", style="number"), _counts(lines, "n_second")),
    )


def _counts(lines: tuple[Line, ...], column: str) -> tuple[Cell, ...]:
    return tuple(Cell(integer(line.count(column)), "number") for line in lines)


def _estimate(numbers: tuple[Written, ...]) -> Column:
    cells = tables.aligned([one.estimate for one in numbers], "strong")
    return Head(text="Estimate", rows="2", style="number"), cells


def _level(lines: tuple[Line, ...], column: str) -> str:
    levels = {percent(value) for line in lines if not math.isnan(value := line.number(column))}
    return levels.pop() if len(levels) == 1 else ""


def _levels(lines: tuple[Line, ...]) -> str:
    level = _level(lines, "interval_level")
    if level:
        return f", {level}"
    return "" if _several_levels(lines) else ", as supplied"


def _several_levels(lines: tuple[Line, ...]) -> bool:
    return len({level for line in lines if not math.isnan(level := line.number("interval_level"))}) > 1


def _intervals(lines: tuple[Line, ...], numbers: tuple[Written, ...]) -> Iterable[tuple[str, list[str], list[str]]]:
    lower, upper = [one.lower for one in numbers], [one.upper for one in numbers]
    yield f"Unadjusted interval{_levels(lines)}", lower, upper
    if _has_matching(lines):
        lower, upper = [one.matching_lower for one in numbers], [one.matching_upper for one in numbers]
        level = _level(lines, "matching_level")
        kind = "together" if lines[0].family.joint_intervals else "each"
        yield f"Simultaneous interval{f', {level} {kind}' if level else ''}", lower, upper


def _has_matching(lines: tuple[Line, ...]) -> bool:
    return any(not math.isnan(line.number("matching_level")) for line in lines)


def _notes(lines: tuple[Line, ...], bounds: bool) -> Iterable[str]:
    family = lines[0].family
    yield f"{UNADJUSTED} {BOUND}" if bounds else UNADJUSTED
    if _has_matching(lines):
        yield "The simultaneous intervals match the decisions: all of them together keep the promised confidence."
    elif family.no_intervals_because:
        yield family.no_intervals_because
