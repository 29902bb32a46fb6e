"""Results, family by family."""

import math

from beforehand.record.model import FamilyRecord, Record
from beforehand.report.figures.model import Figure
from beforehand.report.view import criteria, schemes, sentences, tables
from beforehand.report.view.estimates import estimates_table
from beforehand.report.view.groups import group_tables
from beforehand.report.view.headings import HEADINGS, section
from beforehand.report.view.lines import IN_FULL, Line, foremost
from beforehand.report.view.model import (
    Cell,
    Drawing,
    Fact,
    Head,
    ResultsByFamily,
    ResultsOfFamily,
    Table,
    drawing,
)
from beforehand.report.view.supportive import Support, supportive_table, supports_of
from beforehand.report.view.trail import trail_table
from beforehand.report.view.written import p_of
from beforehand.spelling import decimal, exact, integer, short
from beforehand.terms import STATE_WORDS


def results(record: Record, lines: tuple[Line, ...], figures: tuple[Figure, ...]) -> ResultsByFamily:
    """Write the section."""
    drawn = {figure.key: drawing(figure) for figure in figures}
    supports = supports_of(record)
    members: dict[str, list[Line]] = {family.id: [] for family in record.families}
    for line in lines:
        members[line.family.id].append(line)
    return ResultsByFamily(
        heading=HEADINGS["results"],
        families=tuple(_family(family, tuple(members[family.id]), drawn, supports) for family in record.families),
    )


def _family(
    family: FamilyRecord, every: tuple[Line, ...], drawn: dict[str, Drawing], supports: dict[str, tuple[Support, ...]]
) -> ResultsOfFamily:
    lines = foremost(every, IN_FULL)
    return ResultsOfFamily(
        title=f"Family {family.id}",
        question=family.question,
        verdict=f"{sentences.family_verdict(family.states)} {schemes.verdict(family)}".rstrip(),
        alarm=criteria.alarm(family),
        shown_part=_part(len(lines), len(every)),
        findings=tuple(sentences.finding(line) for line in lines),
        estimates=estimates_table(lines) if lines else tables.empty("Estimates"),
        decisions=decisions_table(lines) if lines else tables.empty("Decisions"),
        trail=trail_table(lines) if lines else tables.empty("Decision trail"),
        supportive=supportive_table(lines, supports),
        groups=group_tables(lines) if lines else (),
        remarks=_remarks(lines),
        estimate_drawings=_drawings(drawn, f"estimates-{family.id}"),
        decision_drawings=_drawings(drawn, f"staircase-{family.id}"),
    )


def _drawings(drawn: dict[str, Drawing], key: str) -> tuple[Drawing, ...]:
    return (drawn[key],) if key in drawn else ()


def _part(shown: int, of_all: int) -> str:
    if shown == of_all:
        return ""
    return (
        f"Shown here are {shown} of the {integer(of_all)} hypotheses: rejections first, then the nearest misses. "
        f"All of them stand in {section('appendix')}."
    )


def decisions_table(lines: tuple[Line, ...]) -> Table:
    """Tabulate statistic, df, p, both adjusted p-values with the one that doesn't decide in grey, and the decision."""
    family = lines[0].family
    names = {line.hypothesis.statistic_name for line in lines if line.hypothesis.statistic_name}
    name = names.pop() if len(names) == 1 else "Statistic"
    adjusted = [column for column in ("p_family", "p_study") if _occurs(lines, column)]
    head = [
        Head(text="Hypothesis"), Head(text=name, style="number"), Head(text="df", style="number"),
        Head(text="Unadjusted p", style="p"), *(Head(text=ADJUSTED[column], style="p") for column in adjusted),
        Head(text="Threshold", style="p"), Head(text="Decision", style="next"),
    ]  # fmt: skip
    cells = (
        tables.aligned([statistic(line) for line in lines]),
        tables.aligned([degrees(line) for line in lines]),
        tables.plain((p_of(line) for line in lines), "p"),
        *(tuple(_adjusted(line, column) for line in lines) for column in adjusted),
        tables.plain((exact(line.threshold) for line in lines), "p"),
        tuple(Cell(STATE_WORDS[line.state], f"state {line.state.replace('_', '-')}") for line in lines),
    )
    return Table(
        caption=f"Tests and adjusted p-values, family {family.id}", head=(tuple(head),), style="decisions",
        notes=tuple(_notes(lines)),
        rows=tables.rows((_named(line, name == "Statistic") for line in lines), tables.columns(*cells)),
    )  # fmt: skip


def _named(line: Line, named: bool) -> Cell:
    name = line.hypothesis.statistic_name
    return Cell(line.label, note=f"statistic: {name}" if named and name else "")


ADJUSTED = {"p_family": "Adjusted p, family", "p_study": "Adjusted p, study"}


def _occurs(lines: tuple[Line, ...], column: str) -> bool:
    return any(not math.isnan(line.number(column)) for line in lines)


def _adjusted(line: Line, column: str) -> Cell:
    decides = line.values["decides"] == column and line.family.tested
    return Cell(p_of(line, column), "p strong" if decides else "p quiet")


def _notes(lines: tuple[Line, ...]) -> list[str]:
    found = []
    if not lines[0].family.tested:
        found.append("The family was not tested: its p-values are descriptive, and no claim is made.")
    if any(line.state == "no_result" for line in lines):
        found.append("A hypothesis without a result stays in its family and counts with p = 1.")
    return found


def statistic(line: Line) -> str:
    """Write the statistic of a test."""
    value = line.number("statistic")
    return short(value, 7) if abs(value) >= 1000 and math.isfinite(value) else decimal(value, 2)


def degrees(line: Line) -> str:
    """Write degrees of freedom: whole ones without decimals."""
    value = line.number("df")
    return decimal(value, 0 if value == round(value, 0) else 1) if math.isfinite(value) else decimal(value, 0)


def _remarks(lines: tuple[Line, ...]) -> tuple[Fact, ...]:
    found: dict[str, list[str]] = {}
    for line in lines:
        own = [*line.hypothesis.remarks, *([f"supplied: {line.hypothesis.origin}"] if line.hypothesis.origin else [])]
        for remark in own:
            found.setdefault(remark, []).append(line.label)
    return tuple(
        Fact("All hypotheses" if len(labels) == len(lines) else ", ".join(labels), text)
        for text, labels in found.items()
    )
