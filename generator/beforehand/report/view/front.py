"""Page one: the decisions, what they are held against, and how to check them."""

from collections.abc import Iterable

from beforehand.record.model import FamilyRecord, Record
from beforehand.report.view import criteria, sentences
from beforehand.report.view.headings import section
from beforehand.report.view.lines import Line
from beforehand.report.view.model import Cell, Checksum, Command, Fact, Finding, Front, Head, Row, Table
from beforehand.spelling import checksum, integer
from beforehand.terms import STATE_WORDS, Intent, Severity, State

SHOWN_ON_PAGE_ONE = 3
AGAINST_ON_PAGE_ONE = 8
ALWAYS_COUNTED: tuple[State, ...] = ("rejected", "not_rejected")
SEVERITIES: tuple[Severity, ...] = ("objection", "caution", "note")

KINDS: dict[Intent, str] = {"confirmatory": "Declared confirmatory, not sealed", "exploratory": "Exploratory study"}

NOT_SEALED = (
    "Not sealed: this version of beforehand keeps no sealed plans. That the plan was written before the data were "
    "seen rests on its author's word; the plan checksum shows which plan this report follows, not when it was written."
)
COMMANDS = (
    Command(
        text="sha256sum -c manifest-sha256.txt",
        shows="no file of this folder has changed since the run",
    ),
    Command(
        text="python3 recheck.py",
        shows="works out every adjusted p and every decision again",
    ),
)


def front(record: Record, lines: tuple[Line, ...], results_sha256: str) -> Front:
    """Write page one."""
    shown = [line for line in lines if line.state == "rejected"]
    against = [line for line in lines if line.state == "rejected_against_claim"]
    return Front(
        kind=KINDS[record.study.intent],
        facts=_facts(record),
        verdict=sentences.family_verdict(_states(record.families)),
        reading=_reading(record),
        against=_findings(against[:AGAINST_ON_PAGE_ONE]),
        more_against=_more(len(against) - AGAINST_ON_PAGE_ONE),
        shown=_findings(shown[:SHOWN_ON_PAGE_ONE]),
        more_shown=_more(len(shown) - SHOWN_ON_PAGE_ONE),
        promises=criteria.promises(record),
        alarms=_alarms(record),
        families=families_table(record),
        standing=(Fact("Sealed plan", NOT_SEALED), Fact("Warnings", _warnings(record))),
        checksums=_checksums(record, results_sha256),
        commands=COMMANDS,
    )


def _facts(record: Record) -> tuple[Fact, ...]:
    study = record.study
    return (
        Fact("Prepared by", ", ".join(study.prepared_by) or "not stated in the spec"),
        Fact("Dated in the spec", study.dated or "no date; no clock was read"),
        Fact("Protocol", study.protocol or "not stated in the spec"),
    )


def _findings(lines: Iterable[Line]) -> tuple[Finding, ...]:
    return tuple(sentences.finding(line) for line in lines)


def _more(more: int) -> str:
    return f"{integer(more)} more in {section('results')} and {section('appendix')}." if more > 0 else ""


def _states(families: Iterable[FamilyRecord]) -> dict[State, int]:
    families = tuple(families)
    counts = {state: sum(family.states.get(state, 0) for family in families) for state in STATE_WORDS}
    return {state: count for state, count in counts.items() if count}


def _reading(record: Record) -> str:
    if record.study.intent == "exploratory":
        return "Exploratory: a rejection is a lead for a later study to confirm, not a confirmed claim."
    objections = sum(warning.severity == "objection" for warning in record.warnings)
    if objections:
        count = "1 objection" if objections == 1 else f"{objections} objections"
        return f"Declared confirmatory; {count} in {section('warnings')} take that label from what they are about."
    return ""


def _alarms(record: Record) -> tuple[str, ...]:
    found = {family.id: criteria.alarm(family) for family in record.families}
    return tuple(f"Family {name}: {alarm[:1].lower()}{alarm[1:]}" for name, alarm in found.items() if alarm)


def _warnings(record: Record) -> str:
    counts = {severity: sum(w.severity == severity for w in record.warnings) for severity in SEVERITIES}
    words = [f"{count} {severity}{'' if count == 1 else 's'}" for severity, count in counts.items()]
    answered = sum(bool(warning.answer) for warning in record.warnings)
    total = sum(counts.values())
    answers = f"; {answered} of {total} answered by the author" if total else ""
    return f"{', '.join(words)}{answers}. They stand in {section('warnings')}."


def _checksums(record: Record, results_sha256: str) -> tuple[Checksum, ...]:
    found = {
        "Plan": ("plan.json", record.plan_sha256),
        "Data": ("inputs-sha256.txt", record.data_sha256),
        "Results": ("record.json", results_sha256),
    }
    return tuple(Checksum(name=name, of_file=file, digits=checksum(digits)) for name, (file, digits) in found.items())


def families_table(record: Record) -> Table:
    """One line per family: the promise, m as planned and as computed, and the states counted."""
    states = [state for state in STATE_WORDS if state in ALWAYS_COUNTED or _states(record.families).get(state)]
    totals = _states(record.families)
    body = [_family_row(family, states) for family in record.families]
    if len(body) > 1:
        planned = sum(family.planned for family in record.families)
        computed = sum(family.computed for family in record.families)
        counts = [planned, computed, *(totals.get(state, 0) for state in states)]
        cells = (Cell(""), *(Cell(integer(count), "number") for count in counts))
        body.append(Row(head=Cell("All families"), cells=cells, style="total"))
    return Table(caption="Decisions by family", head=_families_head(states), rows=tuple(body), style="families")


def _families_head(states: list[State]) -> tuple[tuple[Head, ...], ...]:
    first = (
        Head(text="Family", rows="2"),
        Head(text="Promise", rows="2"),
        Head(text="Number of hypotheses (m)", columns="2", scope="colgroup", style="group"),
        Head(text="Decisions", columns=str(len(states)), scope="colgroup", style="group"),
    )
    second = [Head(text="planned", style="number"), Head(text="computed", style="number")]
    return first, (*second, *(Head(text=STATE_WORDS[state], style="number") for state in states))


def _family_row(family: FamilyRecord, states: list[State]) -> Row:
    counts = [family.planned, family.computed, *(family.states.get(state, 0) for state in states)]
    cells = [Cell(integer(count), "number" if count else "number none") for count in counts]
    promise = Cell(f"{criteria.short_promise(family.promise)}, {family.procedure_title}", "promise")
    return Row(head=Cell(family.id, note=family.question), cells=(promise, *cells))
