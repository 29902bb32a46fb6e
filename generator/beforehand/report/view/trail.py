"""The decision trail: arithmetic that a pocket calculator can follow."""

import math
from collections.abc import Iterable

from beforehand.report.view import schemes, tables
from beforehand.report.view.lines import Line
from beforehand.report.view.model import Cell, Row, Table
from beforehand.report.view.written import MET
from beforehand.spelling import NOTHING, calculated, exact, multiplication
from beforehand.terms import STATE_WORDS

LARGER = (
    "An adjusted p is never smaller than that of a hypothesis with a smaller p: where an earlier rank gave a larger "
    "result, that one counts (running maximum)."
)
SMALLER = (
    "An adjusted p is never larger than that of a hypothesis with a larger p: where a later rank gave a smaller "
    "result, that one counts (running minimum)."
)
ELSEWHERE = "Where the result of another rank counts, in the order of weights or of the plan, that rank is named."
CAPPED = "A result above 1 counts as 1."


def trail_table(lines: tuple[Line, ...]) -> Table:
    """Show how each decision of one family comes out, by rank; no rows where nothing was decided."""
    decided = sorted((line for line in lines if _is_adjusted(line)), key=lambda line: line.count("rank"))
    return Table(
        caption=f"Decision trail, family {lines[0].family.id}, by {lines[0].family.procedure_title}",
        head=tables.head(_first(lines[0]), "Hypothesis", "Enters with", "Arithmetic", "Decision"),
        rows=tuple(_row(line) for line in decided),
        notes=tuple(_notes(decided)),
        style="trail",
    )


def _first(line: Line) -> str:
    return "Step" if schemes.is_walked(line) else "Rank"


def _is_adjusted(line: Line) -> bool:
    return schemes.is_walked(line) or not math.isnan(line.number("p_family"))


def _adjusted(line: Line) -> float:
    return line.number("p_study" if schemes.is_walked(line) else "p_family")


def _row(line: Line) -> Row:
    sign = "≤" if line.state in MET else ">"
    decision = f"{calculated(line.deciding, line.threshold)} {sign} {exact(line.threshold)}: {STATE_WORDS[line.state]}"
    decision = decision if line.values["decides"] else STATE_WORDS[line.state]
    return Row(
        head=Cell(str(line.count("rank") or NOTHING)),
        cells=(Cell(line.label), Cell(entered(line)), Cell(arithmetic(line)), Cell(decision, "strong")),
    )


def entered(line: Line) -> str:
    """Say with which p a hypothesis enters its procedure, and how it came from the p of its test."""
    how = line.values["entered_as"]
    if how == "no result":
        return "no result: p counts as 1"
    p, value = calculated(line.number("p")), calculated(line.number("p_entered"))
    if how == "doubled":
        return f"{value}: {p} doubled, because the level is two-sided"
    if how == "claim side":
        return f"{value}: the claim's side of {p}"
    return value


def arithmetic(line: Line) -> str:
    """Write p × factor = product, the rank that counts where it is another one, and the cap at 1."""
    adjusted = _adjusted(line)
    steps = [text for text in (_multiplication(line), _from_elsewhere(line)) if text]
    if adjusted == 1 and line.number("product") > 1 and line.count("from_rank") == line.count("rank"):
        steps.append("counts as 1")
    study = line.number("p_study")
    if line.values["decides"] == "p_study" and study > adjusted:
        steps.append(schemes.of_the_study(line))
    return "; ".join(steps)


def _multiplication(line: Line) -> str:
    factor, product = line.number("factor"), line.number("product")
    if math.isnan(factor) and schemes.is_walked(line):
        return line.hypothesis.arithmetic
    if math.isnan(factor):
        return f"{line.hypothesis.arithmetic or 'product'} = {calculated(product, line.threshold)}"
    written = multiplication(line.number("p_entered"), factor, rank=line.count("rank"), threshold=line.threshold)
    return f"{written.p} × {written.factor} = {written.product}"


def _from_elsewhere(line: Line) -> str:
    if line.count("from_rank") == line.count("rank"):
        return ""
    return f"{_first(line).lower()} {line.count('from_rank')} counts: {calculated(_adjusted(line), line.threshold)}"


def _notes(lines: list[Line]) -> Iterable[str]:
    walked = any(schemes.is_walked(line) for line in lines)
    if walked:
        yield schemes.WALKED
    own_order = bool(lines) and {"weights", "positions"} & lines[0].family.given.keys()
    moved = [line.count("from_rank") - line.count("rank") for line in lines]
    if own_order and any(moved):
        yield ELSEWHERE
    elif not walked and min(moved, default=0) < 0:
        yield LARGER
    if not own_order and max(moved, default=0) > 0:
        yield SMALLER
    if any(line.number("product") > 1 for line in lines):
        yield CAPPED
    if any(line.values["decides"] == "p_study" and line.number("p_study") > line.number("p_family") for line in lines):
        yield schemes.NOTES[lines[0].scheme]
