"""The second route of several 2 x 2 tables: weights and sums in 40-digit decimals, estimates in fractions.

Nothing here is shared with ``stratified``: tables are counted row by row; no weight has its logarithm taken; an upper
end is the lower end of the groups exchanged.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction
from functools import cached_property
from typing import Any

from beforehand.hypothesis_tests import normal_again
from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.stratified import Judged
from beforehand.hypothesis_tests.two_by_two_again import EXACT, Weights, solve, total

Cells = tuple[int, int, int, int]
"""Events and other units of the first group, then of the second."""


def cells_of(first: Any, second: Any, strata: tuple[Any, ...]) -> list[Cells]:
    """Count row by row."""
    found: dict[Any, list[int]] = {}
    for place, (events, names) in enumerate(zip((first, second), strata, strict=True)):
        for event, name in zip(events.tolist(), names.tolist(), strict=True):
            found.setdefault(name, [0, 0, 0, 0])[2 * place + (not event)] += 1
    return [(a, b, c, d) for a, b, c, d in (found[name] for name in sorted(found))]


def free(cells: list[Cells]) -> list[Cells]:
    """Keep the strata in which both groups have units, and some but not all have the event."""
    return [one for one in cells if one[0] + one[1] and one[2] + one[3] and one[0] + one[2] and one[1] + one[3]]


@dataclass(frozen=True)
class Strata:
    """The tables of the strata, and what their sum says of a common odds ratio."""

    cells: list[Cells]

    @cached_property
    def weights(self) -> list[Weights]:
        """The weights of each stratum."""
        return [Weights.of(a + b, c + d, a + c) for a, b, c, d in self.cells]

    @property
    def events(self) -> int:
        """The events of the first group in all strata."""
        return sum(cells[0] for cells in self.cells)

    @cached_property
    def together(self) -> Weights:
        """The weights of the sum: every product of one weight of each stratum."""
        least, weight = self.weights[0].least, list(self.weights[0].weight)
        for one in self.weights[1:]:
            product = [Decimal(0)] * (len(weight) + len(one.weight) - 1)
            for i, x in enumerate(weight):
                for j, y in enumerate(one.weight):
                    product[i + j] = EXACT.add(product[i + j], EXACT.multiply(x, y))
            least, weight = least + one.least, product
        return Weights(least, tuple(weight))

    def z(self, odds_ratio: Decimal, continuity: Decimal) -> Decimal:
        """Give how far the events lie above their mean, less the correction, in standard deviations."""
        mean = variance = Decimal(0)
        for one in self.weights:
            terms = one.terms(odds_ratio)
            whole = total(terms)
            x = [Decimal(one.least + i) for i in range(len(terms))]
            centre = EXACT.divide(total([EXACT.multiply(t, i) for t, i in zip(terms, x, strict=True)]), whole)
            squares = [EXACT.multiply(t, (i - centre) ** 2) for t, i in zip(terms, x, strict=True)]
            mean, variance = mean + centre, variance + EXACT.divide(total(squares), whole)
        return EXACT.divide(self.events - mean - continuity, EXACT.sqrt(variance))

    @property
    def at_least(self) -> bool:
        """Whether the first group has as few events as it can have."""
        return self.events == sum(one.least for one in self.weights)

    def score_lower(self, critical: Decimal, continuity: Decimal) -> Decimal:
        """Give the odds ratio from which the events lie a critical number of standard deviations above."""
        return Decimal(0) if self.at_least else solve(lambda ratio: critical - self.z(ratio, continuity))

    def lower(self, tail: float) -> Decimal:
        """Give the odds ratio at which P(events or more) is the tail."""
        return Decimal(0) if self.at_least else Decimal(self.together.lower(self.events, tail))

    def above(self, odds_ratio: Decimal) -> float:
        """Give P(events or more)."""
        return float(self.together.above(self.events, odds_ratio))


@dataclass(frozen=True)
class Both:
    """The strata as they are, and with the groups exchanged."""

    here: Strata
    there: Strata

    @classmethod
    def of(cls, cells: list[Cells]) -> "Both":
        """Exchange the groups."""
        return cls(Strata(cells), Strata([(c, d, a, b) for a, b, c, d in cells]))

    def judged(self, above: float, below: float, lower: Decimal, mirrored: Decimal) -> Judged:
        """Put together what was found of both; the upper end is that of the groups exchanged, turned round."""
        estimate = 0.0 if self.here.at_least else math.inf
        if not self.here.at_least and not self.there.at_least:
            estimate = float(solve(lambda ratio: -self.here.z(ratio, Decimal(0))))
        return Judged(above, below, estimate, Interval(float(lower), float(1 / mirrored) if mirrored else math.inf))


def exact(cells: list[Cells], null: Decimal, asked: Asked) -> Judged:
    """Judge by the conditional distribution."""
    both = Both.of(cells)
    sides = both.here.above(null), both.there.above(EXACT.divide(Decimal(1), null))
    return both.judged(*sides, both.here.lower(asked.tail), both.there.lower(asked.tail))


def score(cells: list[Cells], null: Decimal, asked: Asked, *, continuity: bool) -> Judged:
    """Judge by mean and variance."""
    both, correction, critical = Both.of(cells), Decimal("0.5") * continuity, normal_again.critical(asked.tail)
    above = normal_again.upper_tail(float(both.here.z(null, correction)))
    below = normal_again.upper_tail(float(both.there.z(EXACT.divide(Decimal(1), null), correction)))
    ends = both.here.score_lower(critical, correction), both.there.score_lower(critical, correction)
    return both.judged(above, below, *ends)


def weighed(cells: list[Cells], null: Decimal, asked: Asked) -> Judged | None:
    """Judge by the estimate of Mantel and Haenszel; None where it has no error."""
    found = Weighed.of(cells)
    if found.odds_ratio is None or found.squared is None:
        return None
    ratio, squared = (Decimal(x.numerator) / Decimal(x.denominator) for x in (found.odds_ratio, found.squared))
    error = EXACT.sqrt(squared)
    z = float(EXACT.divide(EXACT.ln(EXACT.divide(ratio, null)), error))
    factor = EXACT.exp(EXACT.multiply(normal_again.critical(asked.tail), error))
    ends = Interval(float(EXACT.divide(ratio, factor)), float(EXACT.multiply(ratio, factor)))
    return Judged(normal_again.upper_tail(z), normal_again.upper_tail(-z), float(ratio), ends)


@dataclass(frozen=True)
class Weighed:
    """The estimate of Mantel and Haenszel as a fraction, and its squared error; None where there is none."""

    odds_ratio: Fraction | None
    squared: Fraction | None

    @classmethod
    def of(cls, cells: list[Cells]) -> "Weighed":
        """Add up over the strata."""

        def added(term: Callable[[int, int, int, int], int], power: int) -> Fraction:
            return sum((Fraction(term(*one), sum(one) ** power) for one in cells), Fraction(0))

        r, s = added(lambda a, b, c, d: a * d, 1), added(lambda a, b, c, d: b * c, 1)
        if not (r and s):
            return cls(Fraction(0) if s else None, None)
        squared = (
            added(lambda a, b, c, d: (a + d) * a * d, 2) / (2 * r * r)
            + added(lambda a, b, c, d: (a + d) * b * c + (b + c) * a * d, 2) / (2 * r * s)
            + added(lambda a, b, c, d: (b + c) * b * c, 2) / (2 * s * s)
        )
        return cls(r / s, squared)
