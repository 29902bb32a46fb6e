"""The second route of times until an event: units walked in the order of their times, sums in 40-digit decimals.

Nothing here is shared with ``risk_sets`` but which times count as equal: no sorted arrays are searched, no term has its
logarithm taken (a likelihood is one product), and roots are found by false position.
"""

import math
from collections import defaultdict
from collections.abc import Iterator
from dataclasses import dataclass
from decimal import Decimal
from functools import cached_property
from typing import Any

import numpy as np

from beforehand.hypothesis_tests.beside import Time
from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.ties import rounding, settled
from beforehand.hypothesis_tests.two_by_two_again import EXACT, solve


@dataclass(frozen=True)
class Moment:
    """One time of an event in one stratum: events and units under watch in each group."""

    events: tuple[int, int]
    watched: tuple[int, int]


def moments_of(first: Any, second: Any, time: Time, strata: Any) -> list[Moment]:
    """Walk the units of each stratum from the last time back to the first."""
    pooled = np.concatenate(time)
    at = settled(pooled, rounding(pooled)).tolist() if pooled.size else []
    names = [None] * len(at) if strata is None else [name for group in strata for name in group.tolist()]
    group = [0] * len(first) + [1] * len(second)
    units = zip(names, at, group, [*first.tolist(), *second.tolist()], strict=True)
    by_stratum: dict[Any, list[tuple[float, int, bool]]] = defaultdict(list)
    for name, when, place, event in units:
        by_stratum[name].append((when, place, event))
    return [moment for name in sorted(by_stratum, key=str) for moment in _walked(by_stratum[name])]


def _walked(units: list[tuple[float, int, bool]]) -> Iterator[Moment]:
    watched, events = [0, 0], [0, 0]
    at = math.nan
    for when, place, event in sorted(units, key=lambda unit: -unit[0]):
        if when != at and any(events):
            yield Moment((events[0], events[1]), (watched[0], watched[1]))
        if when != at:
            events, at = [0, 0], when
        watched[place] += 1
        events[place] += event
    if any(events):
        yield Moment((events[0], events[1]), (watched[0], watched[1]))


def log_rank(moments: list[Moment], ratio: Decimal) -> Decimal:
    """Give how far the events of the first group lie above what is expected, in standard deviations."""
    away = variance = Decimal(0)
    for moment in moments:
        (d1, d2), (n1, n2) = moment.events, moment.watched
        d, n = d1 + d2, n1 + n2
        both = EXACT.add(EXACT.multiply(ratio, Decimal(n1)), Decimal(n2))
        share, rest = EXACT.divide(EXACT.multiply(ratio, Decimal(n1)), both), EXACT.divide(Decimal(n2), both)
        away = EXACT.add(away, d1 - EXACT.multiply(share, Decimal(d)))
        if n > 1:
            finite = EXACT.divide(Decimal(d * (n - d)), Decimal(n - 1))
            variance = EXACT.add(variance, EXACT.multiply(EXACT.multiply(share, rest), finite))
    return EXACT.divide(away, EXACT.sqrt(variance))


@dataclass(frozen=True)
class Product:
    """The partial likelihood as a product over events, equal times after Efron."""

    observed: int
    terms: list[tuple[Decimal, Decimal]]
    """For each event how many units of the first and of the second group it could have befallen."""

    @classmethod
    def of(cls, moments: list[Moment]) -> "Product":
        """Take the j-th of d equal events from what j/d of them have left."""
        terms = []
        for moment in moments:
            (d1, d2), (n1, n2) = moment.events, moment.watched
            d = d1 + d2
            terms += [
                (EXACT.divide(Decimal(n1 * d - j * d1), Decimal(d)), EXACT.divide(Decimal(n2 * d - j * d2), Decimal(d)))
                for j in range(d)
            ]
        return cls(sum(moment.events[0] for moment in moments), terms)

    @cached_property
    def estimate(self) -> Decimal:
        """The ratio that makes the data most likely; 0 or infinite where it has no end."""
        if self.observed == sum(second == 0 for _, second in self.terms):
            return Decimal(0)
        if self.observed == sum(first > 0 for first, _ in self.terms):
            return Decimal("Infinity")
        return solve(lambda ratio: self._expected(ratio) - self.observed)

    def _expected(self, ratio: Decimal) -> Decimal:
        found = Decimal(0)
        for first, second in self.terms:
            weighed = EXACT.multiply(ratio, first)
            found = EXACT.add(found, EXACT.divide(weighed, EXACT.add(weighed, second)))
        return found

    @property
    def squared_error(self) -> Decimal:
        """The squared standard error of the logarithm of the estimate."""
        information = Decimal(0)
        for first, second in self.terms:
            weighed = EXACT.multiply(self.estimate, first)
            both = EXACT.add(weighed, second)
            information = EXACT.add(
                information, EXACT.divide(EXACT.multiply(weighed, second), EXACT.multiply(both, both))
            )
        return EXACT.divide(Decimal(1), information)

    def _lacking(self, ratio: Decimal) -> Decimal:
        """Give the logarithm of the likelihood at the estimate by that at a ratio: one product, one logarithm."""
        product = Decimal(1)
        for first, second in self.terms:
            here = EXACT.add(EXACT.multiply(ratio, first), second)
            if self.estimate.is_infinite():
                part = EXACT.divide(here, EXACT.multiply(ratio, first)) if first else Decimal(1)
            elif not self.estimate:
                part = EXACT.divide(here, second) if second else Decimal(1)
            else:
                part = EXACT.divide(here, EXACT.add(EXACT.multiply(self.estimate, first), second))
            product = EXACT.multiply(product, part)
        log = EXACT.ln(product)
        if self.estimate.is_infinite() or not self.estimate:
            return log
        return EXACT.add(log, EXACT.multiply(Decimal(self.observed), EXACT.ln(EXACT.divide(self.estimate, ratio))))

    def root(self, ratio: Decimal) -> Decimal:
        """Give the signed root of twice the logarithm."""
        size = EXACT.sqrt(max(Decimal(0), 2 * self._lacking(ratio)))
        return size if self.estimate > ratio else -size

    def z(self, null: Decimal) -> Decimal:
        """Give how far a finite estimate lies above a value, in standard errors of its logarithm."""
        return EXACT.divide(EXACT.ln(EXACT.divide(self.estimate, null)), EXACT.sqrt(self.squared_error))

    def around(self, critical: Decimal) -> Interval:
        """Give the ratios that lie no further than so many standard errors from a finite estimate."""
        factor = EXACT.exp(EXACT.multiply(critical, EXACT.sqrt(self.squared_error)))
        return Interval(float(EXACT.divide(self.estimate, factor)), float(EXACT.multiply(self.estimate, factor)))

    def interval(self, critical: Decimal) -> Interval:
        """Give the ratios whose root is no further from 0 than the critical value."""
        lower, upper = 0.0, math.inf
        if self.estimate:
            lower = float(solve(lambda ratio: critical - self.root(ratio)))
        if not self.estimate.is_infinite():
            upper = float(solve(lambda ratio: -critical - self.root(ratio)))
        return Interval(lower, upper)
