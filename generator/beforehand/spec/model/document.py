"""The keys of the whole file, of the study, and of what stands beside the families."""

from typing import Annotated

from pydantic import ConfigDict, Field

from beforehand.spec.model.data import DataSet
from beforehand.spec.model.families import Family, StudyPromise
from beforehand.spec.model.hypotheses import (
    Groups,
    MarginBasis,
    MissingValues,
    NullHypothesis,
    Outcome,
    Setting,
)
from beforehand.spec.model.scheme import Graph, Looks
from beforehand.spec.model.words import (
    PARTICULAR,
    Condition,
    Date,
    Id,
    Keys,
    Name,
    Names,
    Probability,
    Prose,
    Reference,
    StatisticalTestWord,
    Version,
)  # fmt: skip
from beforehand.terms import Alternative, Intent, SupportiveKind

HIGHEST_SEED = 2**53 - 1  # whole numbers above are not exact in JSON


class Study(Keys):
    """What the study is called, and what it is for."""

    title: Prose
    """The title of the study."""
    identifier: Name
    """The number or short name under which the study is known."""
    intent: Intent
    """Whether its decisions are to confirm or to explore."""
    prepared_by: Annotated[tuple[Prose, ...], PARTICULAR] = ()
    """Who wrote the spec."""
    dated: Annotated[Date | None, PARTICULAR] = None
    """The date that is printed; no clock is read."""
    protocol: Prose | None = None
    """The document that the spec carries out."""


class Change(Keys):
    """What a supportive analysis does another way."""

    test: StatisticalTestWord | None = None
    """Another test."""
    options: dict[Name, Setting] | None = None
    """Other options of the test."""
    outcome: Outcome | None = None
    """Another outcome."""
    groups: Groups | None = None
    """Other groups."""
    null_hypothesis: NullHypothesis | None = None
    """Another null hypothesis."""
    margin_basis: MarginBasis | None = None
    """Where another margin comes from."""
    alternative: Alternative | None = None
    """Another side: one instead of both, or both instead of one."""
    data: Reference | None = None
    """Another data set."""
    where: Condition | None = None
    """Other rows."""
    analysis_set: Reference | None = None
    """Another analysis set."""
    missing_values: MissingValues | None = None
    """Another rule for missing values."""
    strata: Names | None = None
    """Other strata."""
    covariates: Names | None = None
    """Other covariates."""


class Supportive(Keys):
    """The same question asked another way: estimate, interval and p, no decision, not counted."""

    id: Id
    """The name of the analysis."""
    of: Reference
    """The hypothesis whose question it is; or a family, for one analysis of each of its hypotheses."""
    change: Change
    """What is done another way, in place of what the hypothesis says; everything else stays."""
    because: Prose
    """Why it is asked another way."""
    analysis: SupportiveKind
    """What kind of analysis this is."""


class Description(Keys):
    """A table without any p-value."""

    id: Id
    """The name of the table."""
    columns: Names
    """The columns that are described: numbers, counts, dates, and text with declared levels."""
    by: Name | None = None
    """The column whose levels stand beside one another; it needs declared levels."""
    data: Reference | None = None
    """The data set; needed when there are several."""
    where: Condition | None = None
    """The rows that are described."""
    analysis_set: Reference | None = None
    """The analysis set that is described."""


class Expected(Keys):
    """What is assumed of one outcome."""

    means: dict[Name, float] | None = None
    """The mean in each group."""
    mean: float | None = None
    """The mean, or the mean difference of pairs, in a study without groups."""
    sd: float | dict[Name, float] | None = None
    """The standard deviation, one for all or one for each group."""
    rates: dict[Name, Probability] | None = None
    """The share of events in each group."""
    rate: Probability | None = None
    """The share of events in a study without groups."""
    n_per_group: int | dict[Name, int] | None = None
    """The independent units, in each group."""
    n: int | None = Field(default=None, ge=1)
    """The independent units, or pairs, in a study without groups."""
    correlation: float | None = Field(default=None, gt=-1, lt=1)
    """The correlation of the two values of a pair."""


class Assumption(Keys):
    """One set of assumptions for the power of the study; each further key is an outcome."""

    model_config = ConfigDict(extra="allow")
    __pydantic_extra__: dict[str, Expected]

    id: Id
    """The name of the assumptions."""

    @property
    def outcomes(self) -> dict[str, Expected]:
        """What is assumed, by outcome."""
        return dict(self.__pydantic_extra__)


class Resampling(Keys):
    """How chance is drawn where a method needs it."""

    draws: int = Field(default=99_999, ge=999, le=100_000_000)
    """How many draws are made."""
    seed: int = Field(ge=0, le=HIGHEST_SEED)
    """The number that all draws follow from."""


class Answer(Keys):
    """The author's answer to a warning; it is printed beside the warning."""

    warning: Reference
    """The warning rule."""
    about: Reference | None = None
    """The family, hypothesis or data set that the answer is about; the whole study when not given."""
    answer: Prose
    """The answer."""


class Document(Keys):
    """A whole spec."""

    beforehand: Version
    """The version of the spec language: 1."""
    study: Study
    """What the study is."""
    data: tuple[DataSet, ...] = Field(min_length=1)
    """The data sets."""
    promise: StudyPromise
    """The error rate that is promised for the study."""
    families: tuple[Family, ...] = Field(min_length=1)
    """The families of hypotheses, in the order in which they are reported."""
    graph: Graph | None = None
    """The graph, under across_families: graph."""
    looks: tuple[Looks, ...] = ()
    """Looks at the data before they are complete."""
    supportive: tuple[Supportive, ...] = ()
    """Analyses that support a hypothesis and decide nothing."""
    describe: tuple[Description, ...] = ()
    """Tables without any p-value."""
    assume: tuple[Assumption, ...] = ()
    """What is assumed for the power; never used by the report."""
    resampling: Resampling | None = None
    """How chance is drawn."""
    answers: Annotated[tuple[Answer, ...], PARTICULAR] = ()
    """Answers to warnings."""
    appendix_rows: Annotated[int, PARTICULAR, Field(ge=0, le=1_000_000)] = 1000
    """How many hypotheses the appendix of the report lists at most."""
