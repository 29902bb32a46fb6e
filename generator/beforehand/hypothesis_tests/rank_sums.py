"""Null distributions of rank sums: exact by counting, ties included, or normal."""

import math
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from scipy import special

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.ties import Ranks


class SumDistribution(Protocol):
    """The distribution of a rank sum under the null hypothesis."""

    def above(self, observed: float) -> float:
        """Give P(sum >= observed)."""

    def below(self, observed: float) -> float:
        """Give P(sum <= observed)."""


@dataclass(frozen=True)
class Counted:
    """An exact distribution: ``share[i]`` is the probability of the sum ``smallest + i * step``.

    Every share is a sum of positive terms, so the far tails keep their digits.
    """

    smallest: int
    step: int
    share: Values

    def above(self, observed: float) -> float:
        """Give P(sum >= observed)."""
        return min(1.0, float(self.share[self._place(observed) :].sum()))

    def below(self, observed: float) -> float:
        """Give P(sum <= observed)."""
        return min(1.0, float(self.share[: self._place(observed) + 1].sum()))

    def _place(self, observed: float) -> int:
        return round(observed - self.smallest) // self.step


def of_subsets(ranks: Ranks, size: int) -> Counted:
    """Count the sums of all subsets of one size: every way to choose the first group.

    Parameters
    ----------
    ranks : ndarray of int, shape (n,)
        Doubled midranks.
    size : int
        Units in the first group, from 1 to n - 1.

    Returns
    -------
    Counted
        By the recursion over units: the subsets of j units with sum s either hold the next unit or not. About
        size x sum x n additions, with the smaller group.
    """
    if 2 * size > ranks.size:
        rest = of_subsets(ranks, ranks.size - size)
        largest = rest.smallest + rest.step * (rest.share.size - 1)
        return Counted(int(ranks.sum()) - largest, rest.step, rest.share[::-1])
    least = int(ranks.min())
    step = int(np.gcd.reduce(ranks - least)) or 1
    weights = np.sort((ranks - least) // step)
    ways = np.zeros((size + 1, int(weights[-size:].sum()) + 1))
    ways[0, 0] = 1.0
    for weight in weights.tolist():
        ways[1:, weight:] += ways[:-1, : ways.shape[1] - weight]
    return Counted(size * least, step, ways[size] / math.comb(ranks.size, size))


def of_signs(ranks: Ranks) -> Counted:
    """Count the sums of all subsets: every way to give signs to the ranks.

    Parameters
    ----------
    ranks : ndarray of int, shape (n,)
        Doubled midranks of the differences that have a sign, at least one.
    """
    step = int(np.gcd.reduce(ranks))
    weights = np.sort(ranks // step)
    share = np.zeros(int(weights.sum()) + 1)
    share[0] = 1.0
    for weight in weights.tolist():
        share *= 0.5
        share[weight:] += share[:-weight]
    return Counted(0, step, share)


@dataclass(frozen=True)
class Normal:
    """A normal approximation; ``correction`` moves the observed sum towards the mean (1/2, or 0 for none)."""

    mean: float
    sd: float
    correction: float

    def above(self, observed: float) -> float:
        """Give P(sum >= observed)."""
        return float(special.ndtr((self.mean + self.correction - observed) / self.sd))

    def below(self, observed: float) -> float:
        """Give P(sum <= observed)."""
        return float(special.ndtr((observed + self.correction - self.mean) / self.sd))
