"""Pairs whose two sides each have an event or not: their counts, and the score test of the difference in shares."""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy import optimize

from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.shares import NEAREST_TO_ONE


@dataclass(frozen=True)
class Discordant:
    """How many of ``pairs`` have the event on one side alone."""

    first: int
    second: int
    pairs: int

    @classmethod
    def of(cls, first: NDArray[np.bool_], second: NDArray[np.bool_]) -> "Discordant":
        """Count the pairs."""
        return cls(int((first & ~second).sum()), int((second & ~first).sum()), first.size)

    @property
    def total(self) -> int:
        """The pairs whose two sides differ."""
        return self.first + self.second


def paired_score(counts: Discordant, null: float) -> float:
    """Give z for a difference of paired shares between -1 and 1 (Tango 1998); 0 where no pair tells anything."""
    n, alone = counts.pairs, fitted_alone(counts, null)
    variance = n * (2 * alone + abs(null) * (1 - abs(null)))
    away = (counts.first - counts.second) - n * null
    return away / math.sqrt(variance) if variance > 0 else 0.0


def fitted_alone(counts: Discordant, null: float) -> float:
    """Fit the share of pairs with the event on the rarer side alone: the root of a quadratic (Tango 1998).

    It is the share of the second side for a null value above 0, of the first side below.
    """
    rarer, other = (counts.second, counts.first) if null >= 0 else (counts.first, counts.second)
    n, size = counts.pairs, abs(null)
    b = (2 * n + rarer - other) * size - counts.total
    root = math.sqrt(b * b + 8 * n * rarer * size * (1 - size))
    if b <= 0:
        return (root - b) / (4 * n)
    return 2 * rarer * size * (1 - size) / (root + b)


def paired_ends(counts: Discordant, critical: float) -> Interval:
    """Give the differences at which z is the critical value, on either side of the observed difference."""
    observed = (counts.first - counts.second) / counts.pairs

    def end(at: float, outermost: float) -> float:
        if abs(observed) == 1 and observed * outermost > 0:
            return observed
        low, high = sorted((observed, outermost))
        return float(optimize.brentq(lambda null: paired_score(counts, null) - at, low, high, xtol=1e-20))

    return Interval(end(critical, -NEAREST_TO_ONE), end(-critical, NEAREST_TO_ONE))
