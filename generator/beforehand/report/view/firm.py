"""How far each decision stands from its threshold, and how large a family it would survive."""

import math

from beforehand.record.model import Record
from beforehand.report.view.headings import HEADINGS, section
from beforehand.report.view.lines import IN_FULL, Line, foremost
from beforehand.report.view.model import Cell, Head, Plain, Row, Table
from beforehand.report.view.written import MET
from beforehand.spelling import NOTHING, exact, integer, p_value, short
from beforehand.terms import STATE_WORDS, State

COMPARED: frozenset[State] = MET | {"not_rejected"}
FURTHER_GROUPS = (
    "Where comparisons of groups are judged together, the others are those with further groups of the same size and "
    "without effect."
)
NOT_COMPUTED = (
    "Not worked out in this version: which single rows would flip a decision, and what another procedure, valid under "
    "another dependence between p-values, would have decided."
)


def firmness(record: Record, lines: tuple[Line, ...]) -> Plain:
    """Write the section."""
    compared = tuple(line for line in lines if line.state in COMPARED)
    shown = foremost(compared, IN_FULL)
    part = f" Shown are {len(shown)} of {integer(len(compared))}; {section('appendix')} has all."
    return Plain(
        heading=HEADINGS["firmness"],
        sentences=(
            "The margin says how many times the value that decides is smaller, or larger, than its threshold. The last "
            "column is the largest number of hypotheses (m) the family could have had with the rejection still "
            f"standing, if all the others had p = 1.{part if len(shown) < len(compared) else ''}",
            *([FURTHER_GROUPS] if any(line.family.joint_intervals for line in shown) else []),
            NOT_COMPUTED,
        )
        if compared
        else ("No hypothesis was compared with a threshold.", NOT_COMPUTED),
        tables=(_table(shown),) if compared else (),
    )


def _table(lines: tuple[Line, ...]) -> Table:
    body = (
        Row(
            head=Cell(line.label, note=line.id),
            cells=(
                Cell(STATE_WORDS[line.state], f"state {line.state.replace('_', '-')}"),
                Cell(p_value(line.deciding, line.threshold), "p"),
                Cell(exact(line.threshold), "p"),
                Cell(margin(line)),
                Cell(integer(line.family.planned), "number"),
                Cell(integer(line.count("survives_up_to")) if line.count("survives_up_to") else NOTHING, "number"),
            ),
        )
        for line in lines
    )
    head = (
        Head(text="Hypothesis"), Head(text="Decision", style="next"), Head(text="Adjusted p", style="p"),
        Head(text="Threshold", style="p"), Head(text="Margin"), Head(text="m planned", style="number"),
        Head(text="Stands up to m =", style="number"),
    )  # fmt: skip
    return Table(caption="Margins", head=(head,), rows=tuple(body), style="margins")


def margin(line: Line) -> str:
    """Write how many times smaller or larger than its threshold the value that decides is."""
    value, threshold = line.deciding, line.threshold
    if line.state in MET:
        return f"{_times(threshold / value)} smaller" if value > 0 else "smaller beyond measure"
    return f"{_times(value / threshold)} larger" if threshold > 0 and not math.isnan(value) else NOTHING


def _times(ratio: float) -> str:
    return f"{short(ratio, 2 if ratio >= 1.1 else 3)} times"
