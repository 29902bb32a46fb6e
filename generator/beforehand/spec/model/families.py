"""The keys of promises and families, and of the short forms that make many hypotheses."""

from typing import Literal, Self

from pydantic import Field, model_validator

from beforehand.spec.model.hypotheses import Groups, Outcome, PerHypothesis, Setting, WrittenHypothesis
from beforehand.spec.model.words import (
    Condition,
    Id,
    Keys,
    Level,
    Name,
    Names,
    Probability,
    ProcedureWord,
    Prose,
    References,
    Weight,
    refused,
)  # fmt: skip
from beforehand.terms import AcrossFamilies, Criterion, LevelIs, Purpose, Reason


class _Promised(Keys):
    """The keys that every promise may have."""

    level_is: LevelIs | None = None
    """Whether the level belongs to one side or is shared by both; needed as soon as a test has a side."""
    false_rejections: int | None = Field(default=None, ge=2)
    """The number k of false rejections that a k-family-wise error rate counts from."""
    false_share: Probability | None = None
    """The share of false rejections that the false discovery proportion is to stay under."""


class Promise(_Promised):
    """The error rate that is promised."""

    criterion: Criterion
    """The error rate: familywise_error_rate, false_discovery_rate, per_comparison_error_rate ..."""
    level: Level
    """Its level, between 0 and 0.5."""


class StudyPromise(_Promised):
    """The error rate that is promised for the study, and how the families share it."""

    criterion: Criterion | None = None
    """The error rate of the whole study; none under across_families: separate."""
    level: Level | None = None
    """Its level, between 0 and 0.5; none under across_families: separate."""
    across_families: AcrossFamilies | None = None
    """How the families share the level; needed when there are several."""
    order: References | None = None
    """The families in the order in which they are tested, under serial and parallel."""

    @model_validator(mode="after")
    def _whole_or_separate(self) -> Self:
        separate = self.across_families == "separate"
        if separate and (self.criterion or self.level or self.level_is):
            raise refused(
                "has a criterion or a level beside across_families: separate. Under 'separate' "
                "each family has its own promise and the study has none: move it into the families."
            )
        if not separate and (self.criterion is None or self.level is None):
            raise refused("needs 'criterion' and 'level': the error rate that is promised, and how high it may be")
        if self.order and self.across_families not in ("serial", "parallel"):
            raise refused("has an 'order', which needs across_families: serial or parallel")
        return self


class AtLeast(Keys):
    """How many hypotheses of a family must be rejected."""

    at_least: int = Field(ge=1)
    """The number."""


class EachWith(Keys):
    """Every level against one."""

    each_with: Name
    """The level that every other one is compared with."""


class Comparisons(PerHypothesis):
    """The pairs of levels of one column, one hypothesis each."""

    outcome: Outcome | None = None
    """The column of the outcome, or {column, values} for an event; none where a time is given."""
    groups: Name
    """The category column; it must declare its levels."""
    pairs: Literal["all"] | EachWith
    """Which pairs: all (later level minus earlier), or {each_with: a level}."""


class Keep(Keys):
    """Which features are tested, decided without looking at the groups."""

    where: Condition
    """A condition on feature_mean, feature_sd and feature_detected, pooled over the groups."""


class HypothesesFrom(PerHypothesis):
    """Many hypotheses of one form: one for each row of supplied p-values, each named column, or each feature."""

    each: Name
    """What makes a hypothesis: the column of labels, or a word: outcome (beside 'outcomes'), level, feature."""
    outcomes: Names | None = None
    """The columns that are tested, one hypothesis each."""
    values: Names | None = None
    """The values of these columns that count as the event, in a test of events."""
    levels_of: Names | None = None
    """The columns whose levels, taken together, each make a hypothesis about their own rows."""
    groups: Groups | None = None
    """The two groups that are compared."""
    p: Name | None = None
    """The column of supplied p-values."""
    estimate: Name | None = None
    """The column of supplied estimates."""
    lower: Name | None = None
    """The column of the lower ends of supplied intervals."""
    upper: Name | None = None
    """The column of the upper ends of supplied intervals."""
    origin: Prose | None = None
    """Who computed the supplied values, and with what."""
    planned: int | None = Field(default=None, ge=1, le=1_000_000)
    """How many hypotheses there will be."""
    planned_at_most: int | None = Field(default=None, ge=1, le=1_000_000)
    """How many there will be at most, when 'keep' decides."""
    keep: Keep | None = None
    """Which features are tested, decided without looking at the groups."""


class Dependence(Keys):
    """What is known beforehand about the dependence between p-values."""

    text: Prose
    """What is assumed, in words."""
    source: Prose
    """Why it may be assumed."""
    correlation: float | None = Field(default=None, gt=-1, lt=1)
    """The common correlation of the statistics, where one is assumed."""


class Family(Keys):
    """Hypotheses that share one question and one adjustment."""

    id: Id
    """The name of the family."""
    question: Prose
    """The question that the family answers."""
    purpose: Purpose | None = None
    """What its outcomes are to the study."""
    reason: Reason | None = None
    """Why the analysis is made."""
    procedure: ProcedureWord
    """The multiplicity procedure; `beforehand methods` lists them."""
    procedure_options: dict[Name, Setting] = Field(default_factory=dict)
    """Options of the procedure."""
    promise: Promise | None = None
    """The family's own promise, under separate or with another criterion than the study's."""
    success: Literal["any", "all"] | AtLeast = "any"
    """What counts as success of the family: any (at least one rejection), all, or {at_least: a number}."""
    share: Weight | None = None
    """The share of the study's level, under across_families: shares."""
    truncation: float | None = Field(default=None, ge=0, lt=1)
    """The truncation of a truncated procedure, from 0 (Bonferroni) to below 1: the larger, the more is rejected in the
    family, and the less of the level a rejection passes on under across_families: parallel."""
    exploratory_after_gate: bool = False
    """Whether a family with its own promise is tested only after the confirmatory families."""
    dependence: Dependence | None = None
    """What is known beforehand about the dependence between its p-values."""
    comparisons: Comparisons | None = None
    """The pairs of levels of one column, one hypothesis each."""
    hypotheses: tuple[WrittenHypothesis, ...] | None = Field(default=None, min_length=1)
    """Hypotheses written one by one."""
    hypotheses_from: HypothesesFrom | None = None
    """Many hypotheses of one form."""

    @model_validator(mode="after")
    def _one_form(self) -> Self:
        forms = ("comparisons", "hypotheses", "hypotheses_from")
        if sum(getattr(self, form) is not None for form in forms) != 1:
            raise refused("must have exactly one of 'comparisons', 'hypotheses' and 'hypotheses_from'")
        return self

    @property
    def options(self) -> dict[str, Setting]:
        """The options of the procedure, of which the truncation is one."""
        truncation = {} if self.truncation is None else {"truncation": self.truncation}
        return {**self.procedure_options, **truncation}

    @property
    def written(self) -> tuple[Comparisons | WrittenHypothesis | HypothesesFrom, ...]:
        """What stands in the family, whichever form it has."""
        one = self.comparisons or self.hypotheses_from
        return (one,) if one else self.hypotheses or ()
