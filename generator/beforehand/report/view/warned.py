"""The warnings with their answers; and what can be said of departures without a sealed plan."""

from beforehand.record.model import Record, WarningRecord
from beforehand.report.view.front import SEVERITIES
from beforehand.report.view.headings import HEADINGS
from beforehand.report.view.model import Fact, Plain, Warned, WarningSection

EVIDENCE = {"record": "Recorded fact", "pattern": "Pattern in the data"}


def warning_section(record: Record) -> WarningSection:
    """Write the section on warnings, the weightiest first."""
    ordered = sorted(record.warnings, key=lambda warning: SEVERITIES.index(warning.severity))
    return WarningSection(
        heading=HEADINGS["warnings"],
        lead=(
            "A warning can be answered, never switched off. An objection takes the confirmatory label from what it is "
            "about; a caution asks the reader to look twice; a note is for completeness."
            if ordered
            else "No warning was raised."
        ),
        warnings=tuple(_warned(warning) for warning in ordered),
        unneeded=record.unneeded_answers,
    )


def _warned(warning: WarningRecord) -> Warned:
    about = "the study" if warning.scope == "study" else f"{warning.scope} {warning.about}"
    return Warned(
        severity=warning.severity.capitalize(),
        style=warning.severity,
        title=f"About {about}: {warning.rule.replace('_', ' ')}",
        facts=(
            Fact(EVIDENCE[warning.evidence], warning.fact),
            Fact("Why it matters", warning.why),
            Fact("What it costs", warning.number),
            Fact("What to do", warning.remedy),
            Fact("Ordinary explanation", warning.ordinary_explanation),
            Fact("The author's answer", warning.answer or "none given", "answer" if warning.answer else "answer quiet"),
        ),
    )


def departures() -> Plain:
    """Say plainly that departures can't be listed without a sealed plan."""
    return Plain(
        heading=HEADINGS["departures"],
        sentences=(
            "None can be listed. Departures are differences from a sealed plan, and this version of beforehand keeps "
            "no sealed plans and no history of amendments. That none is listed does not say that there were none.",
            "What can be checked: the plan this run followed is plan.json, with the checksum on page one. Where that "
            "checksum, or a printed plan, was deposited with somebody else before the data were seen, compare the two.",
        ),
    )
