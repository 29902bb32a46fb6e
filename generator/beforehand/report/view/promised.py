"""What was promised: families, procedures, gates, and each hypothesis in symbols."""

from collections.abc import Callable

from beforehand.record.model import FamilyRecord, HypothesisRecord, Record
from beforehand.report.figures.model import Figure
from beforehand.report.view import criteria, schemes, tables
from beforehand.report.view.headings import HEADINGS, section
from beforehand.report.view.lines import IN_FULL, Line
from beforehand.report.view.model import Cell, Drawing, Fact, Promised, PromisedFamily, Row, Table, drawing
from beforehand.report.view.sentences import claim
from beforehand.spelling import exact, integer, percent

SIDES = {
    "above": "one-sided, above",
    "below": "one-sided, below",
    "two_sided": "two-sided",
}
REASONS = {
    "SPECIFIED IN PROTOCOL": "specified in the protocol",
    "SPECIFIED IN SAP": "specified in the statistical analysis plan",
    "DATA DRIVEN": "data driven",
    "REQUESTED BY REGULATORY AGENCY": "requested by a regulatory agency",
}
Kind = tuple[str, ...]
NAMED = 6
BESIDE = 2
"""The place of what tests take beside the outcome among the columns of their uses: shown where one takes anything."""


def promised(record: Record, lines: tuple[Line, ...], figures: tuple[Figure, ...]) -> Promised:
    """Write the section."""
    return Promised(
        heading=HEADINGS["promised"],
        sentences=_sentences(record),
        chain=_chain(record),
        families=tuple(_family(family, _members(family, lines)) for family in record.families),
        uses=_uses(lines),
        drawings=_drawings(figures),
    )


def _drawings(figures: tuple[Figure, ...]) -> tuple[Drawing, ...]:
    return tuple(drawing(figure) for figure in figures if figure.key in ("error_by_m", "graph"))


def _members(family: FamilyRecord, lines: tuple[Line, ...]) -> tuple[Line, ...]:
    return tuple(line for line in lines if line.hypothesis.family == family.id)


def _sentences(record: Record) -> tuple[str, ...]:
    found = list(criteria.promises(record))
    if len(record.families) > 1:
        found.append(schemes.sentence(record))
    if record.scheme == "separate" and len(record.families) > 1 and all(map(_is_familywise, record.families)):
        total = min(1.0, sum(family.level for family in record.families))
        found.append(f"The chance of a false rejection in any of the families can reach {percent(total)}.")
    found.append(
        "An adjusted p is the smallest level of the promise at which the hypothesis would be rejected; it is compared "
        "with the level. Where the promise covers the whole study, the adjusted p of the study decides, otherwise "
        "that of the family; the other one is printed in grey."
    )
    return tuple(found)


def _is_familywise(family: FamilyRecord) -> bool:
    return family.promise.criterion == "familywise_error_rate"


def _chain(record: Record) -> tuple[Fact, ...]:
    if record.scheme not in ("serial", "parallel") or len(record.families) < 2:
        return ()
    families = {family.id: family for family in record.families}
    order = record.order or tuple(one.id for one in record.families if one.under_study_promise)
    return tuple(Fact(name, schemes.gate(families[name])) for name in order)


def _family(family: FamilyRecord, members: tuple[Line, ...]) -> PromisedFamily:
    options = "; ".join(f"{name} {value}" for name, value in sorted(family.procedure_options.items()))
    whose = "Promise of the study" if family.under_study_promise else "Promise of its own"
    facts = [
        Fact("Purpose", family.purpose.capitalize() or "not stated"),
        Fact(whose, criteria.short_promise(family.promise)),
        Fact("Procedure", f"{family.procedure_title}{f' ({options})' if options else ''}"),
        Fact("Dependence it needs", f"valid under {family.valid_under}"),
        Fact("Control", criteria.control(family)),
        Fact("Number of hypotheses (m)", _sizes(family)),
        *schemes.facts(family),
    ]
    return PromisedFamily(
        title=f"Family {family.id}", question=family.question, alarm=criteria.alarm(family), facts=tuple(facts),
        hypotheses=_hypotheses(members) if len(members) <= IN_FULL else _kinds(members),
    )  # fmt: skip


def _sizes(family: FamilyRecord) -> str:
    return f"{integer(family.planned)} planned, {integer(family.computed)} computed"


def _hypotheses(members: tuple[Line, ...]) -> Table:
    said = [_said(line) for line in members]
    common = {name for name in SAID if len(members) > 1 and len({one[name] for one in said}) == 1}
    rows = (_hypothesis(line, _listed(one, set(SAID) - common)) for line, one in zip(members, said, strict=True))
    return Table(
        caption=_title(members), style="hypotheses", rows=tuple(rows),
        head=tables.head("Hypothesis", "Claim", "Null", "Alternative", "Test"),
        notes=tuple(_listed({name: said[0][name]}, common) for name in SAID if name in common and said[0][name]),
    )  # fmt: skip


SAID = ("Null hypothesis", "Margin", "Weight", "Place in the order", "Options of the test", "Estimand")


def _said(line: Line) -> dict[str, str]:
    hypothesis, given = line.hypothesis, line.family.given
    at = line.family.members.index(line.id)
    weight = exact(given["weights"][at]) if "weights" in given else ""
    place = integer(given["positions"][at] + 1) if "positions" in given else ""
    estimand = "; ".join(f"{name.replace('_', ' ')}: {text}" for name, text in hypothesis.estimand.items())
    # Without a claim the alternative stands in its place, in the same words as the null.
    null = hypothesis.null_in_words if hypothesis.claim else ""
    options = "; ".join(f"{name.replace('_', ' ')}: {_option(value)}" for name, value in hypothesis.options.items())
    return dict(zip(SAID, (null, hypothesis.margin_basis, weight, place, options, estimand), strict=True))


def _option(value: object) -> str:
    """Write the value of an option as a reader sees it: yes and no, words without underscores."""
    if isinstance(value, bool):
        return "yes" if value else "no"
    return str(value).replace("_", " ")


def _listed(said: dict[str, str], names: set[str]) -> str:
    return " ".join(f"{name}: {text}." for name, text in said.items() if text and name in names)


def _title(members: tuple[Line, ...]) -> str:
    return f"The hypotheses of family {members[0].family.id}" if members else "No hypotheses"


def _hypothesis(line: Line, said: str) -> Row:
    hypothesis = line.hypothesis
    return Row(
        head=Cell(line.label, note=line.id),
        cells=(
            Cell(claim(line), note=said),
            Cell(hypothesis.null, "symbols"),
            Cell(hypothesis.alternative, "symbols"),
            Cell(hypothesis.test_title, note=_side(hypothesis)),
        ),
    )


def _side(hypothesis: HypothesisRecord) -> str:
    return "two one-sided tests" if hypothesis.null_form == "outside" else SIDES[hypothesis.side]


def _kinds(members: tuple[Line, ...]) -> Table:
    kinds = _grouped(members, lambda one: (one.null, one.alternative, one.test_title, _side(one)))
    body = (
        Row(head=Cell(f"{integer(len(ids))} hypotheses"), cells=tuple(Cell(text) for text in kind))
        for kind, ids in kinds.items()
    )
    return Table(
        caption=f"{_title(members)}, by kind; each one stands in {section('appendix')}", style="kinds",
        head=tables.head("Hypotheses", "Null", "Alternative", "Test", "Side"), rows=tuple(body),
    )  # fmt: skip


def _grouped(lines: tuple[Line, ...], key: Callable[[HypothesisRecord], Kind]) -> dict[Kind, list[str]]:
    found: dict[Kind, list[str]] = {}
    for line in lines:
        found.setdefault(key(line.hypothesis), []).append(line.id)
    return found


def _use(hypothesis: HypothesisRecord) -> Kind:
    rows = ", ".join(part for part in (hypothesis.analysis_set, hypothesis.where) if part) or "all rows"
    if hypothesis.undecided:
        rows = f"{rows} ({integer(hypothesis.undecided)} left out: the condition met a missing value)"
    missing = hypothesis.missing_method.replace("_", " ") or "not stated"
    if hypothesis.missing_mechanism:
        missing = f"{missing} ({hypothesis.missing_mechanism})"
    beside = "; ".join(hypothesis.beside)
    return hypothesis.data or "none", rows, beside, missing, REASONS.get(hypothesis.reason, "not stated")


def _uses(lines: tuple[Line, ...]) -> Table:
    uses = _grouped(lines, _use)
    names = ("Data", "Analysis set", "Beside the outcome", "Missing values", "Reason for the analysis")
    shown = [at for at in range(len(names)) if at != BESIDE or any(use[BESIDE] for use in uses)]
    body = (
        Row(head=Cell(_names(ids, len(lines))), cells=tuple(Cell(use[at] or "nothing") for at in shown))
        for use, ids in uses.items()
    )
    return Table(
        caption="The rows each hypothesis uses, and why it is asked", rows=tuple(body), style="uses",
        head=tables.head("Hypotheses", *(names[at] for at in shown)),
    )  # fmt: skip


def _names(ids: list[str], of_all: int) -> str:
    if len(ids) == of_all:
        return "all hypotheses"
    return ", ".join(ids) if len(ids) <= NAMED else f"{ids[0]} and {integer(len(ids) - 1)} more"
