"""Supportive analyses, under the hypotheses that they support."""

import math
from collections.abc import Iterable
from dataclasses import dataclass

from beforehand.record.model import Record, SupportiveRecord
from beforehand.report.view import criteria, tables
from beforehand.report.view.lines import Line, supporting_lines
from beforehand.report.view.model import Cell, Head, Row, Table
from beforehand.report.view.sentences import capital
from beforehand.report.view.written import size, written
from beforehand.spelling import NOTHING, integer, p_value, percent
from beforehand.terms import EnteredAs

SAME = {True: "same", False: "other", None: NOTHING}
READ: dict[EnteredAs, str] = {"doubled": "doubled", "claim side": "claim's side"}


@dataclass(frozen=True)
class Support:
    """One supportive analysis with its numbers."""

    record: SupportiveRecord
    line: Line

    @property
    def agrees(self) -> bool:
        """Whether it agrees with its hypothesis in direction and in the side of the threshold."""
        return self.record.same_direction is True and self.record.same_side is True


def supports_of(record: Record) -> dict[str, tuple[Support, ...]]:
    """Give the supportive analyses of each hypothesis that has any."""
    found: dict[str, tuple[Support, ...]] = {}
    for one, line in zip(record.supportive, supporting_lines(record), strict=True):
        found[one.of] = (*found.get(one.of, ()), Support(one, line))
    return found


def agreement(supports: tuple[Support, ...]) -> str:
    """Count those that agree: "1 of 2 supportive analyses agrees with it in direction and in the side of …"."""
    agreeing = sum(support.agrees for support in supports)
    noun = "supportive analysis" if len(supports) == 1 else "supportive analyses"
    verb = "agrees" if agreeing == 1 else "agree"
    return (
        f"{integer(agreeing)} of {integer(len(supports))} {noun} {verb} with it in direction and in the side of the "
        "threshold"
    )


@dataclass(frozen=True)
class Entry:
    """One row of the table before its numbers are set under each other."""

    line: Line
    head: Cell
    p: Cell
    beside: tuple[Cell, Cell]
    style: str


def supportive_table(lines: tuple[Line, ...], supports: dict[str, tuple[Support, ...]]) -> Table:
    """Tabulate the hypotheses of one family that have supportive analyses, each with these below it."""
    entries = [entry for line in lines if line.id in supports for entry in _entries(line, supports[line.id])]
    if not entries:
        return tables.empty("Supportive analyses")
    every = tuple(entry.line for entry in entries)
    numbers = [written(line) for line in every]
    levels = {percent(line.number("interval_level")) for line in every if not math.isnan(line.number("interval_level"))}
    level = f", {levels.pop()}" if len(levels) == 1 else ""
    first = (
        Head(text="Analysis", rows="2"), Head(text="n", rows="2", style="number"),
        Head(text="Estimate", rows="2", style="number"),
        Head(text=f"Unadjusted interval{level}", columns="2", scope="colgroup", style="group"),
        Head(text="Unadjusted p", rows="2", style="p"),
        Head(text="Beside its hypothesis", columns="2", scope="colgroup", style="group"),
    )  # fmt: skip
    second = (
        Head(text="from", style="number"), Head(text="to", style="number"), Head(text="Direction"),
        Head(text="Side of threshold"),
    )  # fmt: skip
    cells = tables.columns(
        tables.plain((size(line) for line in every), "number"),
        tables.aligned([one.estimate for one in numbers], "strong"),
        tables.aligned([one.lower for one in numbers]),
        tables.aligned([one.upper for one in numbers]),
        [entry.p for entry in entries],
        [entry.beside[0] for entry in entries],
        [entry.beside[1] for entry in entries],
    )
    return Table(
        caption=f"Supportive analyses, family {lines[0].family.id}",
        head=(first, second),
        rows=tuple(
            Row(head=entry.head, cells=others, style=entry.style) for entry, others in zip(entries, cells, strict=True)
        ),
        notes=_notes(lines[0]),
        style="supportive",
    )


def _entries(line: Line, supports: tuple[Support, ...]) -> Iterable[Entry]:
    read = line.number("p_entered")
    nothing = (Cell(""), Cell(""))
    yield Entry(
        line, Cell(line.label, note=agreement(supports)), _p(line, line.values["entered_as"], read), nothing, ""
    )
    for one in supports:
        p_read = math.nan if one.record.p_read is None else one.record.p_read
        yield Entry(
            one.line,
            Cell(one.line.label, "part", note=_about(one.record, line)),
            _p(one.line, one.record.read_as, p_read),
            (Cell(SAME[one.record.same_direction]), Cell(SAME[one.record.same_side])),
            "part",
        )


def _about(record: SupportiveRecord, base: Line) -> str:
    """Say what kind of analysis it is, why it is made, and what it does another way."""
    own = record.hypothesis
    parts = [f"{capital(record.analysis)}: {record.because.strip().removesuffix('.')}", *map(capital, record.changes)]
    if own.estimates != base.hypothesis.estimates:
        parts.append(f"Estimated: {', '.join(part for part in (own.estimates, own.unit) if part)}")
    if own.no_result_because:
        parts.append(f"No result: {own.no_result_because.strip().removesuffix('.')}")
    return f"{'. '.join(parts)}."


def _p(line: Line, read_as: EnteredAs, p_read: float) -> Cell:
    """Write an unadjusted p on its side of the level, and beneath it the p that the level reads, if another."""
    level = line.family.level
    text = p_value(line.number("p"), {"as it is": level, "doubled": level / 2}.get(read_as, math.nan))
    return Cell(text, "p", note=f"{READ[read_as]} {p_value(p_read, level)}" if read_as in READ else "")


def _notes(line: Line) -> tuple[str, ...]:
    level = criteria.level_readings(line.family.promise)
    return (
        "A supportive analysis asks the question of its hypothesis another way. It is computed twice like every "
        "hypothesis, is not counted in m, opens no gate and decides nothing.",
        "Direction: whether both estimates lie on the same side of their null values. Side of threshold: whether both "
        f"unadjusted p-values lie on the same side of the level, {level}; nothing is adjusted for this.",
    )
