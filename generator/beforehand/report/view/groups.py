"""Descriptive summaries of the groups, each once, however many hypotheses compare it."""

import math
from collections.abc import Callable
from dataclasses import replace

from beforehand.record.model import GroupSummary
from beforehand.report.view import tables
from beforehand.report.view.lines import Line
from beforehand.report.view.model import Cell, Head, Row, Table
from beforehand.spelling import NOTHING, THIN, decimal, integer, number, short

NAMED = 2
PAIRS = "Of pairs, the column Missing counts those that lack at least one of their two values, on both sides alike."

Summaries = dict[tuple[str, GroupSummary], list[str]]
"""Outcome and summary of a group, with the labels of the hypotheses that use it."""

NUMBERS: tuple[tuple[str, Callable[[GroupSummary], float | None]], ...] = (
    ("Mean", lambda one: one.mean),
    ("SD", lambda one: one.sd),
    ("Lower quartile", lambda one: one.lower_quartile),
    ("Median", lambda one: one.median),
    ("Upper quartile", lambda one: one.upper_quartile),
)


def group_tables(lines: tuple[Line, ...]) -> tuple[Table, ...]:
    """Summarise the groups of one family: numbers, events and events by exposure in a table of their own."""
    numbers: Summaries = {}
    events: Summaries = {}
    rates: Summaries = {}
    for line in lines:
        for one in line.hypothesis.summaries:
            found = numbers if one.events is None else events if one.exposure is None else rates
            found.setdefault((line.hypothesis.outcome, one), []).append(line.label)
    tables_found = (_numbers(numbers, len(lines)), _events(events, len(lines)), _rates(rates, len(lines)))
    notes = (PAIRS,) if any(line.hypothesis.design == "pairs" for line in lines) else ()
    return tuple(replace(table, notes=notes) for table in tables_found if table.rows)


def _numbers(found: Summaries, of_all: int) -> Table:
    used = [one for one in NUMBERS if any(one[1](summary) is not None for _, summary in found)]
    cells = [
        (*_sizes(one), *(_number(get(one), one) for _, get in used), Cell(_users(labels, of_all), "next"))
        for (_, one), labels in found.items()
    ]
    return _table("Summaries of numbers", tuple(name for name, _ in used), found, cells)


def _events(found: Summaries, of_all: int) -> Table:
    cells = [
        (
            *_sizes(one), Cell(integer(one.events or 0), "number"), Cell(_share(one), "number"),
            Cell(_users(labels, of_all), "next"),
        )
        for (_, one), labels in found.items()
    ]  # fmt: skip
    return _table("Counts of events", ("Events", "Share"), found, cells)


def _rates(found: Summaries, of_all: int) -> Table:
    cells = [
        (
            *_sizes(one), Cell(integer(one.events or 0), "number"), Cell(short(one.exposure or 0.0, 6), "number"),
            Cell(_rate(one), "number"), Cell(_users(labels, of_all), "next"),
        )
        for (_, one), labels in found.items()
    ]  # fmt: skip
    return _table("Events and what they were counted in", ("Events", "Exposure, or time in all", "Rate"), found, cells)


def _table(caption: str, names: tuple[str, ...], found: Summaries, cells: list[tuple[Cell, ...]]) -> Table:
    columns = ("Outcome", "Group", "n", "Missing", *names)
    (head,) = tables.head(*columns, numbers=range(2, len(columns)))
    outcomes = [outcome for outcome, _ in found]
    heads = [
        Cell(outcome, "again" if outcome == before else "")
        for outcome, before in zip(outcomes, ["", *outcomes], strict=False)
    ]
    rows = tuple(Row(head=name, cells=others) for name, others in zip(heads, cells, strict=True))
    return Table(caption=caption, head=((*head, Head(text="Compared in", style="next")),), rows=rows, style="groups")


def _sizes(one: GroupSummary) -> tuple[Cell, ...]:
    missing = Cell(integer(one.missing), "number" if one.missing else "number none")
    return Cell(one.group or "all"), Cell(integer(one.n), "number"), missing


def _number(value: float | None, one: GroupSummary) -> Cell:
    spread = one.sd or (one.upper_quartile or 0) - (one.lower_quartile or 0)
    decimals = min(10, max(0, 2 - math.floor(math.log10(spread)))) if spread > 0 else 3
    return Cell(NOTHING if value is None else decimal(value, decimals), "number")


def _share(one: GroupSummary) -> str:
    return f"{decimal(100 * (one.events or 0) / one.n, 1)}{THIN}%" if one.n else NOTHING


def _rate(one: GroupSummary) -> str:
    return number((one.events or 0) / one.exposure, 4) if one.exposure else NOTHING


def _users(labels: list[str], of_all: int) -> str:
    if len(labels) == of_all and of_all > 1:
        return "all shown"
    return ", ".join(labels) if len(labels) <= NAMED else f"{integer(len(labels))} hypotheses"
