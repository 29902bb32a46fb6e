"""What a multiplicity procedure takes, gives and declares, and the decorator that enters it in the catalogue."""

import inspect
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field
from typing import Any, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from beforehand.catalogue import Catalogue
from beforehand.terms import Criterion

Ascending = NDArray[np.float64]
"""p-values of one family, ascending."""
Vector = NDArray[np.float64]

FWER: Criterion = "familywise_error_rate"
FDR: Criterion = "false_discovery_rate"
PER_COMPARISON: Criterion = "per_comparison_error_rate"

# No error at all, with probability 1 - a, is also fewer than k errors and a false discovery proportion of 0.
IMPLIED_BY_FWER: tuple[Criterion, ...] = (
    "k_familywise_error_rate", FDR, "false_discovery_exceedance", PER_COMPARISON,
)  # fmt: skip

WHOLE = "whole"
"""The replay needs nothing but p (and what the spec says): no ingredient is taken as recorded."""

Matching = Literal["bonferroni", "critical_value"] | None
"""Which simultaneous interval matches the decisions; None where none is in general use.

``bonferroni``: the interval of the test at the level shared out. ``critical_value``: the estimate and so many standard
errors on either side, or on one; the entry's file has ``critical_values(level, **ingredients)``, which gives them for
each member in the order of the ingredients, NaN where there is no result.
"""

Compares = Literal["anything", "groups", "control"]
"""What the hypotheses of a family must be about: anything; pairs of groups of one column, the same outcome and the same
rows in all; or such pairs that share one group, the control."""


PER_MEMBER = {
    "weights": "the weight that the plan gives each hypothesis",
    "positions": "the place of each hypothesis in the written order, from 0",
    "statistics": "the t statistic of each contrast, above 0 where it speaks for the side asked; 0 without a result",
    "loadings": (
        "for each contrast with a shared control, sqrt(n / (n + n of the control)); negative where the statistic is "
        "control minus group, 0 where there is no result"
    ),
    "dfs": "the degrees of freedom of each statistic, 0 where there is no result",
}
PER_FAMILY = {
    "level": "the level of the promise that covers the family",
    "df": "the degrees of freedom that all statistics of the family share, 0 where none has a result",
    "groups": "the planned number of groups",
    "sides": "on how many sides the statistics are judged: 1 or 2",
    "doubled": "whether the p of one side is doubled, because both sides share the level",
    "passes": "the share that each hypothesis passes on to each when it is rejected, both in the written order",
}
INGREDIENTS = PER_MEMBER | PER_FAMILY
"""What an entry may ask for beyond p, by these keyword-only parameters; its other keyword-only ones are options."""


Ranks = NDArray[np.intp]
"""Ranks, counted from 0."""


@dataclass(frozen=True, kw_only=True)
class Steps:
    """How each adjusted p arises, by rank: everything a pocket calculator needs.

    At level a the p-value of rank i has to meet the threshold a / factor[i], or what ``thresholds`` gives. Where an
    adjusted p is no multiple of p, factor is NaN and ``arithmetic`` says in words where the product comes from.
    """

    factor: Vector
    """By how much the p-value of this rank is multiplied."""
    product: Vector
    """factor x p (or what stands in its place), before it is made monotone and capped at 1."""
    adjusted: Vector
    """The adjusted p-value."""
    taken_from: Ranks
    """The rank, counted from 0, whose product became the adjusted p."""
    arithmetic: Sequence[str] = ()
    """For each rank what the product is, where it is no multiple of p: "P(Q > 3.41), 4 groups, 76 df"."""
    critical: Callable[[float], Vector] | None = field(default=None, repr=False)
    """Gives for a level the threshold of each rank, where that isn't level / factor."""

    def thresholds(self, level: float) -> Vector:
        """Give the threshold that the p-value of each rank has to meet at a level; NaN where there is none.

        Parameters
        ----------
        level : float
            The level of the promise that covers the family.

        Returns
        -------
        ndarray, shape (m,)
            By rank. Where a procedure's thresholds depend on the p-values, they are those of these p-values.
        """
        return level / self.factor if self.critical is None else self.critical(level)

    @classmethod
    def of(
        cls,
        *,
        factor: Vector,
        product: Vector,
        taken_from: Ranks,
        arithmetic: Sequence[str] = (),
        critical: Callable[[float], Vector] | None = None,
    ) -> "Steps":
        """Take each adjusted p from the product of its rank, capped at 1."""
        return cls(
            factor=factor,
            product=product,
            adjusted=np.minimum(product[taken_from], 1.0),
            taken_from=taken_from,
            arithmetic=arithmetic,
            critical=critical,
        )


class Words(Sequence[str]):
    """For each rank what its product is, written only when it is read; empty where there is a factor."""

    def __init__(self, factor: Vector, write: Callable[[int], str]) -> None:
        self._factor = factor
        self._write = write

    def __len__(self) -> int:
        return self._factor.size

    def __getitem__(self, rank: Any) -> Any:
        if isinstance(rank, slice):
            return tuple(self[i] for i in range(*rank.indices(len(self))))
        return self._write(rank) if np.isnan(self._factor[rank]) else ""

    def __iter__(self) -> Iterator[str]:
        return (self[rank] for rank in range(len(self)))


def largest_so_far(product: Vector) -> Ranks:
    """Give for each rank the rank of the largest product up to it."""
    is_largest = product >= np.maximum.accumulate(product)
    return np.maximum.accumulate(np.where(is_largest, np.arange(product.size), 0))


def smallest_from_here(product: Vector) -> Ranks:
    """Give for each rank the rank of the smallest product from it on."""
    is_smallest = product <= np.minimum.accumulate(product[::-1])[::-1]
    last = max(product.size - 1, 0)
    return np.minimum.accumulate(np.where(is_smallest, np.arange(product.size), last)[::-1])[::-1]


def running_maximum(p: Ascending, *, factor: Vector) -> Steps:
    """Adjust step-down: each rank takes the largest product so far, capped at 1."""
    product = factor * p
    return Steps.of(factor=factor, product=product, taken_from=largest_so_far(product))


def running_minimum(p: Ascending, *, factor: Vector) -> Steps:
    """Adjust step-up: each rank takes the smallest product from its own on, capped at 1."""
    product = factor * p
    return Steps.of(factor=factor, product=product, taken_from=smallest_from_here(product))


def each_alone(p: Ascending, *, factor: Vector) -> Steps:
    """Adjust in a single step: each rank keeps its own product, capped at 1."""
    return Steps.of(factor=factor, product=factor * p, taken_from=np.arange(p.size))


@dataclass(frozen=True)
class Ordered:
    """p-values with their ascending order, which several procedures may share."""

    ascending: Ascending
    """The p-values in ascending order."""
    order: Ranks
    """Where each of them stood; equal values keep the order in which they came."""

    @classmethod
    def of(cls, p: "ArrayLike | Ordered") -> "Ordered":
        """Check p-values and sort them once.

        Raises
        ------
        ValueError
            When the values are not one-dimensional numbers between 0 and 1.
        """
        if isinstance(p, Ordered):
            return p
        values = np.asarray(p, dtype=np.float64)
        if values.ndim != 1:
            raise ValueError(f"p-values of one family are a one-dimensional array; found {values.ndim} dimensions")
        if not np.all((values >= 0) & (values <= 1)):
            raise ValueError("p-values lie between 0 and 1, and none is missing: a missing result counts as p = 1")
        order = _stable_order(values)
        return cls(values[order], order)

    def unsorted(self, by_rank: NDArray[Any]) -> NDArray[Any]:
        """Bring values by rank back into the order in which the p-values came."""
        result = np.empty_like(by_rank)
        result[self.order] = by_rank
        return result


def _stable_order(values: Vector) -> Ranks:
    """Sort quickly, then put equal values back into the order in which they came: less work than a stable sort."""
    order = np.argsort(values)
    ascending = values[order]
    differs = ascending[1:] != ascending[:-1]
    if np.all(differs):
        return order
    run_of_equals = np.concatenate([[0], np.cumsum(differs)])
    keys: Ranks = np.sort(run_of_equals * values.size + order)
    return keys % values.size


@dataclass(frozen=True, kw_only=True)
class Procedure:
    """One entry of the catalogue: what it declares, and the computation.

    Calling the entry adjusts p-values in the order in which they come: ``holm([0.01, 0.04, 0.03])``.
    """

    title: str
    controls: Criterion
    strong: bool
    """Whether control holds whichever nulls are true, not only when all are."""
    valid_under: str
    """The dependence between p-values under which the control holds."""
    intervals: Matching
    no_intervals_because: str
    """One sentence for the report where no matching interval exists; empty where one does."""
    replays: str
    """``WHOLE``, or the ingredient that the replay takes as recorded."""
    implies: tuple[Criterion, ...]
    """Further criteria that this control implies."""
    monotone: bool
    """Whether raising a p, or a further hypothesis with p = 1, never adds a rejection."""
    tests: tuple[str, ...]
    """The statistical tests whose statistics it can judge; empty where any p will do."""
    compares: Compares
    """What its hypotheses must be about."""
    one_sided: bool
    """Whether it can judge one side; otherwise every test must be two-sided, under a level that both sides share."""
    reference: str
    adjust: Callable[..., Steps] = field(repr=False)

    @property
    def name(self) -> str:
        """The word that a spec uses."""
        return self.adjust.__name__

    @property
    def _keywords(self) -> dict[str, inspect.Parameter]:
        parameters = inspect.signature(self.adjust).parameters.values()
        return {p.name: p for p in parameters if p.kind is p.KEYWORD_ONLY}

    @property
    def needs(self) -> frozenset[str]:
        """The ingredients beyond p that it asks for."""
        return frozenset(self._keywords.keys() & INGREDIENTS.keys())

    @property
    def options(self) -> dict[str, inspect.Parameter]:
        """The procedure's own options: its keyword-only parameters that are no ingredients."""
        return {name: parameter for name, parameter in self._keywords.items() if name not in INGREDIENTS}

    def keeps(self, criterion: Criterion) -> bool:
        """Whether the declared control implies a family's promise."""
        return criterion == self.controls or criterion in self.implies

    def steps(self, p: ArrayLike | Ordered, **given: Any) -> Steps:
        """Give the steps by rank; ``given`` are options and ingredients, those of each member in the order of ``p``."""
        ordered = Ordered.of(p)
        by_rank = {name: np.asarray(value)[ordered.order] for name, value in given.items() if name in PER_MEMBER}
        return self.adjust(ordered.ascending, **(given | by_rank))

    def __call__(self, p: ArrayLike | Ordered, **given: Any) -> Vector:
        """Give the adjusted p-values in the order of ``p``.

        Parameters
        ----------
        p : array_like, shape (m,), or Ordered
            Unadjusted p-values of one family, in any order.
        **given
            Options of the procedure, and the ingredients that it needs, those of each member in the order of ``p``.

        Returns
        -------
        ndarray, shape (m,)
            Adjusted p-values.
        """
        ordered = Ordered.of(p)
        adjusted: Vector = ordered.unsorted(self.steps(ordered, **given).adjusted)
        return adjusted

    def critical_values(self, level: float, **given: Any) -> Vector:
        """Give by how many standard errors each estimate has to differ from its null value, in the order of ``given``.

        For procedures whose intervals are of the kind "critical_value".
        """
        values: Vector = PROCEDURES.module(self.name).critical_values(level, **given)
        return values

    def replay(self, p: list[float], level: float, **given: Any) -> dict[str, list[Any]]:
        """Adjust again on plain lists, another way round: ``{"adjusted": [...], "rejected": [...]}``.

        Everything is in the order of the members. The level is a parameter of every replay, and no ingredient of it.

        The text of this function in the entry's file is also what recheck.py is made of.
        """
        again: dict[str, list[Any]] = PROCEDURES.module(self.name).replay(p, level, **given)
        return again


def procedure(
    *,
    title: str,
    controls: Criterion,
    strong: bool,
    valid_under: str,
    intervals: Matching,
    replays: str,
    reference: str,
    no_intervals_because: str = "",
    implies: tuple[Criterion, ...] = (),
    monotone: bool = True,
    tests: tuple[str, ...] = (),
    compares: Compares = "anything",
    one_sided: bool = True,
) -> Callable[[Callable[..., Steps]], Procedure]:
    """Enter a function on ascending p-values in the catalogue of procedures with what it declares."""

    def enter(adjust: Callable[..., Steps]) -> Procedure:
        return Procedure(
            title=title, controls=controls, strong=strong, valid_under=valid_under, intervals=intervals,
            no_intervals_because=no_intervals_because, replays=replays, implies=implies, monotone=monotone,
            tests=tests, compares=compares, one_sided=one_sided, reference=reference, adjust=adjust,
        )  # fmt: skip

    return enter


PROCEDURES: Catalogue[Procedure] = Catalogue("beforehand.multiplicity.entries", kind="multiplicity procedure")
