"""Times until an event: who was under watch when, and what a hazard ratio of two groups has to do with it."""

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests.beside import Strata, Time, strata_numbers
from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.ties import rounding, settled
from beforehand.hypothesis_tests.two_by_two import increasing_root

Events = NDArray[np.bool_]


@dataclass(frozen=True)
class RiskSets:
    """At each time of an event, one stratum after the other: events and units under watch, of the first group and all.

    A unit whose watch ends at a time without its event is still under watch then.
    """

    events_first: Values
    events: Values
    watched_first: Values
    watched: Values

    @classmethod
    def of(cls, first: Events, second: Events, time: Time, strata: Strata | None) -> "RiskSets":
        """Count, within each stratum where there are any; times that differ by rounding only are equal."""
        pooled = np.concatenate(time)
        settled_times = settled(pooled, rounding(pooled)) if pooled.size else pooled
        times = np.split(settled_times, [time[0].size])
        numbers = strata_numbers(strata) if strata else tuple(np.zeros(one.size, dtype=np.intp) for one in time)
        parts = [
            _counts([at[of == stratum] for at, of in zip(times, numbers, strict=True)],
                    [ev[of == stratum] for ev, of in zip((first, second), numbers, strict=True)])
            for stratum in np.unique(np.concatenate(numbers))
        ]  # fmt: skip
        return cls(*np.concatenate([np.empty((4, 0)), *parts], axis=1))

    @property
    def informative(self) -> bool:
        """Whether an event happened while both groups were under watch."""
        return bool(((self.watched_first > 0) & (self.watched_first < self.watched)).any())

    def expected(self, ratio: float) -> Values:
        """Give the events of the first group to be expected at each time, at a hazard ratio."""
        weighed = ratio * self.watched_first
        found: Values = self.events * weighed / (weighed + (self.watched - self.watched_first))
        return found

    def variance(self, ratio: float) -> float:
        """Give the variance of the events of the first group, given all events of each time.

        At the ratio 1 it is hypergeometric (Mantel 1966); for others binomial, with the same correction for the finite
        number of units.
        """
        share = self.expected(ratio) / self.events
        finite = (self.watched - self.events) / np.maximum(self.watched - 1, 1)
        return math.fsum(self.events * share * (1 - share) * finite)

    def log_rank(self, ratio: float) -> float:
        """Give how far the events of the first group lie above what is expected, in standard deviations."""
        return math.fsum(self.events_first - self.expected(ratio)) / math.sqrt(self.variance(ratio))


def _counts(times: list[Values], events: list[Events]) -> Values:
    at = np.unique(np.concatenate([time[event] for time, event in zip(times, events, strict=True)]))
    happened, watched = [], []
    for time, event in zip(times, events, strict=True):
        happened.append(np.searchsorted(np.sort(time[event]), at, "right") - np.searchsorted(np.sort(time[event]), at))
        watched.append(time.size - np.searchsorted(np.sort(time), at))
    return np.stack([happened[0], happened[0] + happened[1], watched[0], watched[0] + watched[1]]).astype(np.float64)


@dataclass(frozen=True)
class Partial:
    """The partial likelihood of a hazard ratio, equal times after Efron: one term for each event.

    The term of an event is that of the units under watch, those with an event at the same time counted in part:
    ``first`` units of the first group against ``second`` of the second.
    """

    observed: float
    first: Values
    second: Values

    @classmethod
    def of(cls, sets: RiskSets) -> "Partial":
        """Spread each time over its events (Efron 1977, Journal of the American Statistical Association 72:557-565)."""
        many = sets.events.astype(np.intp)
        which = np.repeat(np.arange(many.size), many)
        gone = (np.arange(which.size) - np.repeat(np.cumsum(many) - many, many)) / sets.events[which]
        second, events_second = sets.watched - sets.watched_first, sets.events - sets.events_first
        return cls(
            float(sets.events_first.sum()),
            sets.watched_first[which] - gone * sets.events_first[which],
            second[which] - gone * events_second[which],
        )

    @cached_property
    def estimate(self) -> float:
        """The logarithm of the ratio that makes the data most likely; infinite where it has no end."""
        if self.observed == (self.second == 0).sum():
            return -math.inf
        if self.observed == (self.first > 0).sum():
            return math.inf
        return increasing_root(lambda beta: math.fsum(self.shares(beta)) - self.observed)

    def shares(self, beta: float) -> Values:
        """Give for each event the chance that it befalls the first group."""
        weighed = math.exp(beta) * self.first
        found: Values = weighed / (weighed + self.second)
        return found

    @property
    def error(self) -> float:
        """The standard error of the estimate."""
        shares = self.shares(self.estimate)
        return 1 / math.sqrt(math.fsum(shares * (1 - shares)))

    def root(self, beta: float) -> float:
        """Give the signed root of twice the log likelihood that the ratio lacks to the estimate: about normal."""
        shares = self.shares(beta)
        if math.isinf(self.estimate):
            rest = shares[self.first > 0] if self.estimate > 0 else self.second / self._both(beta)
            lacking = -math.fsum(np.log(rest[rest > 0]))
        else:
            step = self.estimate - beta
            lacking = step * self.observed - math.fsum(np.log1p(shares * math.expm1(step)))
        return math.copysign(math.sqrt(2 * max(0.0, lacking)), self.estimate - beta)

    def _both(self, beta: float) -> Values:
        return math.exp(beta) * self.first + self.second

    def interval(self, critical: float) -> Interval:
        """Give the ratios whose root is no further from 0 than the critical value."""
        lower, upper = 0.0, math.inf
        if self.estimate > -math.inf:
            lower = math.exp(increasing_root(lambda beta: critical - self.root(beta)))
        if self.estimate < math.inf:
            upper = math.exp(increasing_root(lambda beta: -critical - self.root(beta)))
        return Interval(lower, upper)

    def z(self, beta: float) -> float:
        """Give how far a finite estimate lies above a value, in standard errors."""
        return (self.estimate - beta) / self.error

    def around(self, critical: float) -> Interval:
        """Give the ratios that lie no further than so many standard errors from a finite estimate."""
        half = critical * self.error
        return Interval(math.exp(self.estimate - half), math.exp(self.estimate + half))

    @property
    def ratio(self) -> float:
        """The estimate as a ratio."""
        return math.exp(self.estimate) if self.estimate < math.inf else math.inf
