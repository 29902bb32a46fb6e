"""Paired differences judged by signed ranks: p at any null value, and the null values that are kept."""

import math
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.location import Located, Tails, kept, kept_by_count
from beforehand.hypothesis_tests.pairwise import PairwiseSums
from beforehand.hypothesis_tests.rank_sums import Counted, Normal, of_signs
from beforehand.hypothesis_tests.rank_two_groups import tied
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.ties import Ranks, doubled_midranks, rounding, settled

Zeros = Literal["pratt", "dropped"]


@dataclass(frozen=True)
class Differences:
    """Differences within pairs with their rounding errors, same unit; equal but for rounding is equal."""

    values: Values
    error: Values

    @classmethod
    def of(cls, first: Values, second: Values) -> "Differences":
        """Subtract, and settle what differs by rounding only, on either side of 0 alike."""
        values, error = first - second, rounding(first, second)
        if values.size:
            values = np.copysign(settled(np.abs(values), error), values) + 0.0  # never -0.0
        return cls(values, error)


@dataclass(frozen=True)
class Signed:
    """Doubled ranks of the differences that are not zero, and which of these are positive."""

    ranks: Ranks
    positive: NDArray[np.bool_]

    @property
    def observed(self) -> int:
        """The doubled rank sum of the positive differences."""
        return int(self.ranks[self.positive].sum())


@dataclass(frozen=True)
class Averages:
    """All averages of two differences (each with itself, too), settled together with the null value."""

    matrix: Values
    null_value: float

    @classmethod
    def of(cls, pairs: Differences, null_value: float) -> "Averages":
        """Form the averages; those that differ by rounding only become equal."""
        values = np.add.outer(pairs.values / 2, pairs.values / 2)
        errors = np.add.outer(pairs.error / 2, pairs.error / 2) + rounding(values)
        together = settled(np.append(values, null_value), np.append(errors, rounding(null_value)))
        return cls(together[:-1].reshape(values.shape), float(together[-1]))

    @property
    def each_once(self) -> Values:
        """The averages, each pair once."""
        return self.matrix[np.triu_indices_from(self.matrix)]

    def signed(self, null_value: float, zeros: Zeros) -> Signed:
        """Rank the distances from a null value.

        An average of two differences lies on the side of the one that is farther from the null value, and on the
        null value when both are equally far on either side of it.
        """
        value = np.diagonal(self.matrix)
        smaller, larger = value < value[:, np.newaxis], value > value[:, np.newaxis]
        nearer = (self.matrix > null_value) & smaller | (self.matrix < null_value) & larger
        as_far = (value == value[:, np.newaxis]) | (self.matrix == null_value)
        signed = value != null_value
        ranked = signed if zeros == "dropped" else np.full_like(signed, True)
        ranks = (2 * nearer[:, ranked].sum(axis=1) + as_far[:, ranked].sum(axis=1) + 1)[signed]
        return Signed(ranks, (value > null_value)[signed])


def exact(pairs: Differences, asked: Asked, *, zeros: Zeros) -> Located:
    """Judge n differences by the exact distribution of their signed rank sum, given the ties.

    All n² averages are held in memory.
    """
    averages = Averages.of(pairs, asked.null_value)
    counted: dict[bytes, Counted] = {}  # most null values share their ties, and so their distribution

    def tails(null_value: float) -> Tails:
        signed = averages.signed(null_value, zeros)
        ties = np.sort(signed.ranks).tobytes()
        if ties not in counted:
            counted[ties] = of_signs(signed.ranks)
        return Tails(counted[ties].above(signed.observed), counted[ties].below(signed.observed))

    null_value = averages.null_value
    return Located(
        estimate=float(np.median(averages.each_once)),
        interval=kept(np.unique(averages.matrix), tails, asked),
        statistic=averages.signed(null_value, zeros).observed / 2,
        tails=tails(null_value),
        null_value=null_value,
    )


def normal(pairs: Differences, asked: Asked, *, zeros: Zeros, continuity: bool) -> Located:
    """Judge differences by the normal approximation of their signed rank sum.

    The variance behind p counts zeros and all ties at the null value, that behind the interval the ties among the
    differences: between critical null values there are no others.
    """
    n = pairs.values.size
    signed = signed_ranks(pairs, asked.null_value, zeros)
    null = at_null(signed, n, zeros, continuity=continuity)
    between = approximation(n, 0, tied(pairs.values), continuity=continuity)
    averages = PairwiseSums.of_sample(pairs.values / 2)
    observed = signed.observed / 2
    return Located(
        estimate=averages.median(),
        interval=kept_by_count(averages.size, between.above, averages.kth, asked),
        statistic=observed,
        tails=Tails(null.above(observed), null.below(observed)),
        null_value=asked.null_value,
    )


def signed_ranks(pairs: Differences, null_value: float, zeros: Zeros) -> Signed:
    """Rank the distances from a null value by sorting them."""
    away = pairs.values - null_value
    distance = settled(np.abs(away), pairs.error + rounding(null_value))
    signed = distance > 0
    if zeros == "dropped":
        return Signed(doubled_midranks(distance[signed]), away[signed] > 0)
    return Signed(doubled_midranks(distance)[signed], away[signed] > 0)


def at_null(signed: Signed, n: int, zeros: Zeros, *, continuity: bool) -> Normal:
    """Give the normal distribution at the null value for n differences, of which those without a sign are zeros."""
    skipped = n - signed.ranks.size if zeros == "pratt" else 0
    return approximation(skipped + signed.ranks.size, skipped, tied(signed.ranks), continuity=continuity)


def approximation(n: int, zeros: int, ties: Ranks, *, continuity: bool) -> Normal:
    """Give the normal distribution of the sum of positive ranks out of 1 to n, the lowest of which belong to zeros.

    Without zeros its mean is n (n + 1) / 4, its variance n (n + 1) (2 n + 1) / 24 - Σ(t³ - t) / 48; zeros take off the
    same expressions with their own number (Pratt 1959).
    """
    t = ties.astype(np.float64)
    lost = float((t**3 - t).sum()) / 48
    variance = (_squares(n) - _squares(zeros)) / 24 - lost
    mean = (n * (n + 1) - zeros * (zeros + 1)) / 4
    return Normal(mean, math.sqrt(variance), 0.5 if continuity else 0.0)


def _squares(n: int) -> int:
    return n * (n + 1) * (2 * n + 1)
