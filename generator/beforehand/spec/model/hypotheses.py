"""The keys of a hypothesis: what is tested, on which rows, against what, and how it is judged."""

from typing import Annotated, Any, Literal, Self

from pydantic import Discriminator, Field, Tag, model_validator

from beforehand.spec.model.words import (
    Condition,
    Confidence,
    Id,
    Keys,
    Name,
    Names,
    Prose,
    Reference,
    StatisticalTestWord,
    Weight,
    refused,
)
from beforehand.terms import Alternative, ClaimDirection, MissingMethod, NullForm, Purpose, Reason

Setting = bool | int | float | str
"""What an option of a test or procedure may be; the test itself says which."""


class EventOutcome(Keys):
    """An outcome that happens or not."""

    column: Name
    """The category or text column that holds the outcome."""
    values: Names
    """Its values that count as the event."""


class PairOutcome(Keys):
    """A pair of columns of one row."""

    first: Name
    """The column whose values come first in the difference."""
    second: Name
    """The column whose values are subtracted."""


def _outcome(written: Any) -> str:
    if isinstance(written, dict):
        return "pair" if set(written) & {"first", "second"} else "event"
    return "pair" if isinstance(written, PairOutcome) else "event" if isinstance(written, EventOutcome) else "column"


ColumnOutcome = Annotated[Name, Tag("column")]
Outcome = Annotated[
    ColumnOutcome | Annotated[EventOutcome, Tag("event")] | Annotated[PairOutcome, Tag("pair")],
    Discriminator(_outcome),
]


class Groups(Keys):
    """The two groups that are compared: everything is said of first minus second, or first over second."""

    column: Name
    """The category column that holds the group."""
    first: Name
    """The level that comes first."""
    second: Name
    """The level it is compared with."""


class NullHypothesis(Keys):
    """What is to be rejected, in one of five forms."""

    at: float | None = None
    """The difference (or ratio) is this; the side comes from 'alternative'."""
    at_most: float | None = None
    """It is at most this, so the claim is that it is above: non-inferiority when larger is better."""
    at_least: float | None = None
    """It is at least this, so the claim is that it is below: non-inferiority when smaller is better."""
    outside: tuple[float, float] | None = None
    """It lies outside these two margins, so the claim is equivalence: two one-sided tests, the larger p."""
    inside: tuple[float, float] | None = None
    """It lies inside these two margins, so the claim is an effect of at least that size."""

    @model_validator(mode="after")
    def _one_form(self) -> Self:
        if len(self.model_fields_set) != 1:
            raise refused("must hold exactly one of at, at_most, at_least, outside, inside")
        margins = self.outside or self.inside
        if margins and not margins[0] < margins[1]:
            raise refused("must hold its two margins with the smaller first")
        return self

    @property
    def form(self) -> NullForm:
        """Which of the five forms this is."""
        forms: tuple[NullForm, ...] = ("at", "at_most", "at_least", "outside", "inside")
        return next(form for form in forms if getattr(self, form) is not None)

    @property
    def margins(self) -> tuple[float, ...]:
        """The one or two numbers of the form."""
        value = getattr(self, self.form)
        return value if isinstance(value, tuple) else (value,)


class MissingValues(Keys):
    """What is done about missing values."""

    method: MissingMethod = "complete_cases"
    """The rule: leave incomplete units out, stop the run, count them as worst or best, or impute."""
    mechanism: Prose | None = None
    """Why values are missing, as far as it is known."""
    imputations: Annotated[int, Field(ge=2, le=10_000)] | None = None
    """How many times values are imputed."""
    using: Names | None = None
    """The columns from which values are imputed."""
    shift: float | None = None
    """What is added to imputed values of the first group, to see how much the conclusion bears."""


class Intervals(Keys):
    """Which intervals are given."""

    unadjusted_level: Confidence | None = None
    """The confidence of the unadjusted interval, where it is not to follow from the level of the promise."""


class Estimand(Keys):
    """What is estimated, in the five attributes of ICH E9(R1)."""

    treatment: Prose
    """The condition whose effect is meant."""
    population: Prose
    """The units that are meant."""
    variable: Prose
    """What is measured on each unit."""
    intercurrent: dict[
        Name, Literal["treatment_policy", "hypothetical", "composite", "while_on_treatment", "principal_stratum"]
    ] = Field(default_factory=dict)
    """The events that may come between, and how each is dealt with."""
    summary: Prose
    """How the groups are summarised and compared."""


class MarginBasis(Keys):
    """Where a margin comes from."""

    text: Prose
    """Why the margin is this wide."""
    source: Prose
    """Where that is written."""


class RandomEffects(Keys):
    """The random effects of a mixed model."""

    intercept: Name
    """The column whose levels each have an intercept of their own."""


class Event(Keys):
    """When a time counts as observed."""

    column: Name
    """The column of the status."""
    values: Names
    """The values that mean that the event happened; a missing status is neither yes nor no."""


class Time(Keys):
    """A time until an event."""

    column: Name
    """The column of the time."""
    event: Event
    """The column that says whether the event happened."""
    ties: Literal["efron", "breslow", "exact"] = "efron"
    """How equal times are handled."""


class NonDetect(Keys):
    """Values below what could be measured."""

    column: Name
    """The column that marks them."""
    values: Names
    """The marks that mean: below the value given."""


class PerHypothesis(Keys):
    """The keys that a hypothesis and the short forms share."""

    test: StatisticalTestWord
    """The statistical test; `beforehand methods` lists them."""
    options: dict[Name, Setting] = Field(default_factory=dict)
    """Options of the test."""
    null_hypothesis: NullHypothesis | None = None
    """What is to be rejected; a difference of 0 (a ratio of 1) when not given."""
    switch_to_superiority: bool = False
    """Whether superiority is tested at the same level once non-inferiority is shown."""
    alternative: Alternative | None = None
    """The side of the test when the null hypothesis is a single value: above, below or two_sided."""
    claim_direction: ClaimDirection | None = None
    """The side that the claim is about when the test has two: above, below or either."""
    claim: Prose | None = None
    """The claim in words; {group}, {first}, {second} and {feature} are replaced."""
    data: Reference | None = None
    """The data set; needed when there are several."""
    where: Condition | None = None
    """The rows that the hypothesis is about: those where this is true."""
    analysis_set: Reference | None = None
    """The analysis set; all rows that are not excluded when not given."""
    matched_by: Name | None = None
    """The column that names the pair, when the two values of a pair stand in two rows."""
    missing_values: MissingValues = Field(default_factory=MissingValues)
    """What is done about missing values."""
    strata: Names | None = None
    """The columns of the strata."""
    cluster: Name | None = None
    """The column of the clusters."""
    random: RandomEffects | None = None
    """The random effects of a mixed model."""
    covariates: Names | None = None
    """The columns that the comparison is adjusted for."""
    exposure: Name | None = None
    """The column of the exposure of a rate."""
    time: Time | None = None
    """The time until an event, instead of an outcome."""
    non_detect: NonDetect | None = None
    """Which values lie below what could be measured."""
    period: Name | None = None
    """The column of the period of a cross-over."""
    sequence: Name | None = None
    """The column of the sequence of a cross-over."""
    subject: Name | None = None
    """The column of the subject of a cross-over."""
    modifier: Groups | None = None
    """The two groups between which the effect itself is compared, in a test of interaction."""
    intervals: Intervals = Field(default_factory=Intervals)
    """Which intervals are given."""
    estimand: Estimand | None = None
    """What is estimated."""
    margin_basis: MarginBasis | None = None
    """Where the margin comes from; required for a margin in a confirmatory study."""
    weight: Weight | None = None
    """The weight in a weighted procedure."""
    truth: Literal["no_effect", "effect"] | None = None
    """What is known to be true of a control that was put in on purpose."""
    purpose: Purpose | None = None
    """What the outcome is to the study; the family's when not given."""
    reason: Reason | None = None
    """Why the analysis is made; the family's when not given."""


class WrittenHypothesis(PerHypothesis):
    """One hypothesis as it is written in a spec."""

    id: Id
    """The name of the hypothesis."""
    outcome: Outcome | None = None
    """The column of the outcome, or {column, values} for an event, or {first, second} for two columns of a row."""
    groups: Groups | None = None
    """The two groups that are compared."""


class Hypothesis(PerHypothesis):
    """One hypothesis after expansion: every default is filled in."""

    id: str
    """The written id, or `family/first-second`, `family/column`, `family/label` for a made one."""
    family: str
    """The family it belongs to."""
    data: str
    """The data set."""
    null_hypothesis: NullHypothesis
    """What is to be rejected."""
    outcome: Outcome | None = None
    """The outcome; None where p-values are supplied."""
    groups: Groups | None = None
    """The two groups that are compared; None in a test of one sample or of two columns of a row."""
    feature: str | None = None
    """The column or the label that a short form made this hypothesis of."""

    @property
    def observed(self) -> Outcome | None:
        """What is observed of each unit: the outcome, or whether the event of its time happened."""
        if self.time is None:
            return self.outcome
        return EventOutcome(column=self.time.event.column, values=self.time.event.values)

    @property
    def side(self) -> Alternative:
        """The side on which the null hypothesis is rejected: above, below, or two_sided."""
        sides: dict[NullForm, Alternative] = {"at_most": "above", "at_least": "below"}
        return sides.get(self.null_hypothesis.form, self.alternative or "two_sided")
