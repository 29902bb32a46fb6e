"""All rules over one study: the warnings in the order in which a reader needs them, each with its answer."""

from dataclasses import dataclass

from beforehand.record.model import WarningRecord
from beforehand.snooping.contract import GRAVEST_FIRST, STUDY, WARNING_RULES, Evidence, Finding, WarningRule


@dataclass(frozen=True)
class StudyWarnings:
    """What the rules had to say about one study."""

    records: tuple[WarningRecord, ...]
    """Gravest first, then in the order of the catalogue, then in the order of the spec."""
    unneeded_answers: tuple[str, ...]
    """Answers in the spec to warnings that did not fire: "extreme_pair_picked about energy"."""


def warnings_for(evidence: Evidence) -> StudyWarnings:
    """Run every rule of the catalogue and set the author's answers beside what was found.

    An answer is printed beside its warning and switches nothing off; it belongs to a warning by the name of the rule
    and what the warning is about.

    Parameters
    ----------
    evidence : Evidence
        The plan, the data, and what came of them.

    Returns
    -------
    StudyWarnings
        The warnings of record, and the answers that answer none of them.
    """
    answers = {(answer.warning, answer.about or STUDY): answer.answer for answer in evidence.spec.answers}
    found = [
        _record(rule, finding, answers.get((rule.name, finding.about), ""))
        for rule in map(WARNING_RULES.__getitem__, WARNING_RULES)
        for finding in rule(evidence)
    ]
    fired = {(record.rule, record.about) for record in found}
    return StudyWarnings(
        records=tuple(sorted(found, key=lambda record: GRAVEST_FIRST.index(record.severity))),
        unneeded_answers=tuple(f"{rule} about {about}" for rule, about in answers if (rule, about) not in fired),
    )


def _record(rule: WarningRule, finding: Finding, answer: str) -> WarningRecord:
    return WarningRecord(
        rule=rule.name,
        severity=finding.severity or rule.severity,
        scope=rule.scope,
        evidence=rule.evidence,
        about=finding.about,
        fact=finding.fact,
        number=finding.number,
        why=finding.why or rule.why,
        remedy=finding.remedy,
        ordinary_explanation=finding.ordinary_explanation,
        answer=answer,
    )
