"""Fisher's noncentral hypergeometric distribution in double precision: what a 2 x 2 table says of its odds ratio."""

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy import optimize

from beforehand.hypothesis_tests.contract import Values

# Two tables count as equally probable when their probabilities differ by less than this share: rounding, no more.
EQUALLY_PROBABLE = 1e-9


@dataclass(frozen=True)
class Table:
    """A 2 x 2 table with both margins fixed.

    ``events`` of the ``first`` units of the first group, and ``all_events`` of all ``first + second`` units, have had
    the event.
    """

    events: int
    first: int
    second: int
    all_events: int

    @classmethod
    def of(cls, first: NDArray[np.bool_], second: NDArray[np.bool_]) -> "Table":
        """Count the events of two groups."""
        events = int(first.sum())
        return cls(events, first.size, second.size, events + int(second.sum()))

    @property
    def least(self) -> int:
        """The fewest events that the first group can have with these margins."""
        return max(0, self.all_events - self.second)

    @property
    def most(self) -> int:
        """The most events that the first group can have with these margins."""
        return min(self.first, self.all_events)


@dataclass(frozen=True)
class Hypergeometric:
    """The conditional distribution of the events in the first group, for any odds ratio.

    ``log_weights`` are the logarithms of C(first, x) C(second, all - x), for each possible x, relative to the observed
    one: they are summed outwards from it, so the terms that matter are small and hold their digits in large tables.
    """

    away: Values
    """x minus the observed events."""
    log_weights: Values

    @classmethod
    def of(cls, table: Table) -> "Hypergeometric":
        """Sum the logarithms of the ratios of neighbouring weights."""
        x = np.arange(table.least, table.most, dtype=np.float64)
        up = (table.first - x) * (table.all_events - x) / ((x + 1) * (table.second - table.all_events + x + 1))
        here = table.events - table.least
        steps = np.log(up)
        below, above = -np.cumsum(steps[:here][::-1])[::-1], np.cumsum(steps[here:])
        away = np.arange(table.least, table.most + 1, dtype=np.float64) - table.events
        return cls(away, np.concatenate([below, [0.0], above]))

    def log_above(self, log_ratio: float) -> float:
        """Give log P(X >= observed) for an odds ratio given by its logarithm."""
        return self._log_share(log_ratio, self.away >= 0)

    def log_below(self, log_ratio: float) -> float:
        """Give log P(X <= observed)."""
        return self._log_share(log_ratio, self.away <= 0)

    def log_no_more_probable(self, log_ratio: float) -> float:
        """Give log P(a table no more probable than the observed one)."""
        return self._log_share(log_ratio, self._terms(log_ratio) <= math.log1p(EQUALLY_PROBABLE))

    def estimate(self) -> float:
        """Give the conditional maximum likelihood estimate of the odds ratio: there E(X) is what was observed."""
        if self._at_least or self._at_most:
            return 0.0 if self._at_least else math.inf
        return math.exp(increasing_root(self._mean_away))

    def lower(self, tail: float) -> float:
        """Give the odds ratio at which P(X >= observed) is the tail."""
        if self._at_least:
            return 0.0
        return math.exp(increasing_root(lambda log_ratio: self.log_above(log_ratio) - math.log(tail)))

    def upper(self, tail: float) -> float:
        """Give the odds ratio at which P(X <= observed) is the tail."""
        if self._at_most:
            return math.inf
        return math.exp(increasing_root(lambda log_ratio: math.log(tail) - self.log_below(log_ratio)))

    @property
    def _at_least(self) -> bool:
        return bool(self.away[0] == 0)

    @property
    def _at_most(self) -> bool:
        return bool(self.away[-1] == 0)

    def _terms(self, log_ratio: float) -> Values:
        return self.log_weights + self.away * log_ratio

    def _log_share(self, log_ratio: float, part: NDArray[np.bool_]) -> float:
        terms = self._terms(log_ratio)
        return log_sum(terms[part]) - log_sum(terms)

    def _mean_away(self, log_ratio: float) -> float:
        terms = self._terms(log_ratio)
        weights = np.exp(terms - terms.max())
        return float((self.away * weights).sum() / weights.sum())


def log_sum(terms: Values) -> float:
    """Give the logarithm of a sum from the logarithms of its terms."""
    largest = float(terms.max())
    return largest + math.log(float(np.exp(terms - largest).sum()))


def increasing_root(function: Callable[[float], float]) -> float:
    """Find where an increasing function of a log odds ratio is 0, to 1e-13."""
    reach = 1.0
    while function(-reach) > 0 or function(reach) < 0:
        reach *= 2
    return float(optimize.brentq(function, -reach, reach, xtol=1e-13, rtol=1e-15))
