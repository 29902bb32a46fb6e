"""The keys of schemes across families: the graph, and the looks at data that accumulate."""

from typing import Annotated, Literal, Self

from pydantic import Field, model_validator

from beforehand.spec.model.families import Dependence
from beforehand.spec.model.words import (
    PARTICULAR,
    Exact,
    FolderPath,
    Id,
    Keys,
    Probability,
    Reference,
    References,
    Share,
    refused,
)
from beforehand.terms import LevelIs

Spending = Literal["obrien_fleming_type", "pocock_type", "power_family", "uniform"]


class Passing(Keys):
    """How much of its level a rejected node passes on, and to whom."""

    from_: Reference = Field(alias="from")
    """The node that is rejected."""
    to: Reference
    """The node that receives."""
    share: Share
    """The share that is passed on; 'epsilon' and '1 - epsilon' stand for an infinitesimal share and the rest."""


class Graph(Keys):
    """Local levels that move from what is rejected to what is not yet."""

    nodes_are: Literal["hypotheses", "families"]
    """Whether the nodes are hypotheses, or families (which pass on only when all of them is rejected)."""
    start: dict[Reference, Exact] = Field(min_length=1)
    """The shares of the level with which the nodes start; a node that isn't named starts with none."""
    pass_: tuple[Passing, ...] = Field(alias="pass", default=())
    """What is passed on."""
    local: Literal["bonferroni", "simes", "parametric"] = "bonferroni"
    """How intersections are tested; simes and parametric need 'dependence'."""
    dependence: Dependence | None = None
    """What is known beforehand about the dependence between the p-values."""


class EventCount(Keys):
    """Information counted in events."""

    events: Reference
    """The column, or the value of the status, whose events are counted."""


class InverseVariance(Keys):
    """Information as the inverse variance of an estimate."""

    inverse_variance: Reference
    """The hypothesis whose estimate is meant."""


class Efficacy(Keys):
    """How the level is spent over the looks."""

    spending: Spending
    """The spending function."""
    level_is: LevelIs
    """Whether the function spends the level of one side or of both; published tables differ in this."""
    parameter: float | None = Field(default=None, gt=0)
    """The exponent of a power family."""


class Futility(Keys):
    """How a study may stop because it will not succeed."""

    spending: Spending
    """The spending function of the error of the second kind."""
    binding: bool
    """Whether crossing the futility bound obliges to stop."""
    parameter: float | None = Field(default=None, gt=0)
    """The exponent of a power family."""


class Looks(Keys):
    """Looks at the data before they are complete."""

    id: Id
    """The name of the plan of looks."""
    for_: References = Field(alias="for")
    """The hypotheses that are looked at early; nothing else is."""
    information: Literal["rows", "independent_units"] | EventCount | InverseVariance
    """What measures the information at a look."""
    maximum: float = Field(gt=0)
    """The information at the end."""
    planned_at: Annotated[tuple[Probability | Literal[1], ...], Field(min_length=1)]
    """The fractions of the maximum at which looks are planned, ascending, the last one 1."""
    efficacy: Efficacy
    """How the level is spent."""
    futility: Futility | None = None
    """How the study may stop for futility."""
    after_efficacy_stop: Literal["others_tested_at_own_boundary", "others_not_tested"] | None = None
    """What happens to the other hypotheses when one stops the study."""
    earlier_results: Annotated[FolderPath | None, PARTICULAR] = None
    """The folder of the sealed results of earlier looks."""

    @model_validator(mode="after")
    def _ascending(self) -> Self:
        fractions = [float(fraction) for fraction in self.planned_at]
        if fractions != sorted(set(fractions)) or fractions[-1] != 1:
            raise refused("must plan its looks at ascending fractions, the last one 1")
        return self
