"""What a warning rule takes, gives and declares, and the decorator that enters it in the catalogue."""

from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from functools import cached_property
from typing import TYPE_CHECKING

from beforehand.catalogue import Catalogue
from beforehand.record.model import FamilyRecord, HypothesisRecord, Results
from beforehand.terms import EvidenceFrom, Scope, Severity

if TYPE_CHECKING:  # only for the types: what the rules declare is printed without loading the rooms of spec and data
    from beforehand.data.dataset import Dataset
    from beforehand.spec.planned import Spec

STUDY = "study"
"""What a finding about the whole study is about, and an answer that names nothing else."""
GRAVEST_FIRST: tuple[Severity, ...] = ("objection", "caution", "note")


@dataclass(frozen=True, kw_only=True)
class Evidence:
    """Everything that a rule may look at: the plan, the data, and what came of them."""

    spec: "Spec"
    dataset: "Dataset"
    families: tuple[FamilyRecord, ...]
    hypotheses: tuple[HypothesisRecord, ...]
    results: Results
    again: "Callable[[Spec, Dataset], Results]"
    """The analysis' own function: what another plan, or other rows, would have given."""
    history: None = None
    """Seals, looks and runs before this one; nothing is kept yet."""

    @cached_property
    def row(self) -> dict[str, int]:
        """The row of ``results`` in which each hypothesis stands, by id."""
        return {name: row for row, name in enumerate(self.results.id)}

    @cached_property
    def words(self) -> dict[str, HypothesisRecord]:
        """Each hypothesis in words, by id."""
        return {hypothesis.id: hypothesis for hypothesis in self.hypotheses}


@dataclass(frozen=True, kw_only=True)
class Finding:
    """What a rule found about one thing: whole sentences that state the record and accuse nobody."""

    about: str
    """The hypothesis or family it is about, by id; ``STUDY`` for the whole study."""
    fact: str
    """What the record shows."""
    number: str
    """What it costs in this study, with the number."""
    remedy: str
    ordinary_explanation: str
    """How the same comes about with nothing amiss, and how often."""
    why: str = ""
    """Why it matters here; "" where the rule's own sentence says it."""
    severity: Severity | None = None
    """A severity below the rule's, where this finding weighs less."""


@dataclass(frozen=True, kw_only=True)
class WarningRule:
    """One entry of the catalogue: what it declares, and how it finds.

    Calling the entry gives its findings: ``extreme_pair_picked(evidence)``.
    """

    title: str
    severity: Severity
    """How grave a finding can be at most."""
    scope: Scope
    """What loses its confirmatory label through an objection."""
    evidence: EvidenceFrom
    """Whether it reads a recorded choice or a pattern in the data."""
    why: str
    """Why it matters, in one or two sentences."""
    basis: str
    """Where the reasoning was published, or that it is common practice without a source."""
    false_alarm_rate: float
    """Share of simulated honest studies in which the rule speaks."""
    measured_on: str
    """The honest studies on which that share was measured, in words."""
    find: Callable[[Evidence], Iterator[Finding]] = field(repr=False)

    def __post_init__(self) -> None:
        if self.evidence == "pattern" and self.severity == "objection":
            raise ValueError(f"{self.name}: a pattern in the data alone is never an objection")

    @property
    def name(self) -> str:
        """The word that a spec uses in its answers."""
        return self.find.__name__

    def __call__(self, evidence: Evidence) -> tuple[Finding, ...]:
        """Give the findings in the order of the spec, at most one about each thing.

        Parameters
        ----------
        evidence : Evidence
            The plan, the data, and what came of them.

        Returns
        -------
        tuple of Finding
            One for each cause; empty where there is nothing to say.

        Raises
        ------
        ValueError
            When two findings are about the same thing, for an answer could not tell them apart, or when one is graver
            than the rule declares: a defect of the rule.
        """
        findings = tuple(self.find(evidence))
        if len({finding.about for finding in findings}) < len(findings):
            raise ValueError(f"{self.name}: two findings are about the same thing; one warning is given for one cause")
        for finding in findings:
            if GRAVEST_FIRST.index(finding.severity or self.severity) < GRAVEST_FIRST.index(self.severity):
                raise ValueError(f"{self.name}: a finding is graver than the rule declares")
        return findings


def warning_rule(
    *,
    title: str,
    severity: Severity,
    scope: Scope,
    evidence: EvidenceFrom,
    why: str,
    basis: str,
    false_alarm_rate: float,
    measured_on: str,
) -> Callable[[Callable[[Evidence], Iterator[Finding]]], WarningRule]:
    """Enter a function from evidence to findings in the catalogue of warning rules with what it declares."""

    def enter(find: Callable[[Evidence], Iterator[Finding]]) -> WarningRule:
        return WarningRule(
            title=title, severity=severity, scope=scope, evidence=evidence, why=why, basis=basis,
            false_alarm_rate=false_alarm_rate, measured_on=measured_on, find=find,
        )  # fmt: skip

    return enter


WARNING_RULES: Catalogue[WarningRule] = Catalogue("beforehand.snooping.entries", kind="warning rule")
