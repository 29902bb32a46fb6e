"""Two groups compared by ranks: p at any shift, and the shifts that are kept."""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.location import Located, Tails, kept, kept_by_count
from beforehand.hypothesis_tests.pairwise import PairwiseSums
from beforehand.hypothesis_tests.rank_sums import Counted, Normal, of_subsets
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.ties import Ranks, doubled_midranks, rounding, settled


@dataclass(frozen=True)
class Differences:
    """All differences first - second, settled together with the null value, and the ranks within each group."""

    within_first: Ranks
    within_second: Ranks
    matrix: Values
    null_value: float

    @classmethod
    def of(cls, first: Values, second: Values, null_value: float) -> "Differences":
        """Form the differences; those that differ by rounding only become equal."""
        first, second = settled(first, rounding(first)), settled(second, rounding(second))
        values = np.subtract.outer(first, second)
        error = rounding(first[:, np.newaxis], second)
        together = settled(np.append(values, null_value), np.append(error, rounding(null_value)))
        matrix = together[:-1].reshape(values.shape)
        return cls(doubled_midranks(first), doubled_midranks(second), matrix, float(together[-1]))

    def ranks(self, shift: float) -> Ranks:
        """Give the doubled midranks of both groups together, once the shift is taken off the first."""
        larger, tied = self.matrix > shift, self.matrix == shift
        first = self.within_first + 2 * larger.sum(axis=1) + tied.sum(axis=1)
        second = self.within_second + 2 * (~larger & ~tied).sum(axis=0) + tied.sum(axis=0)
        return np.concatenate([first, second])


def exact(first: Values, second: Values, asked: Asked) -> Located:
    """Compare two groups by the exact distribution of their rank sum, given the ties.

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        Values of one unit; n1 × n2 differences are held in memory.
    """
    differences, size = Differences.of(first, second, asked.null_value), first.size
    counted: dict[bytes, Counted] = {}  # most shifts share their ties, and so their distribution

    def tails(shift: float) -> Tails:
        ranks = differences.ranks(shift)
        ties = np.sort(ranks).tobytes()
        if ties not in counted:
            counted[ties] = of_subsets(ranks, size)
        observed = int(ranks[:size].sum())
        return Tails(counted[ties].above(observed), counted[ties].below(observed))

    null_value = differences.null_value
    return Located(
        estimate=float(np.median(differences.matrix)),
        interval=kept(np.unique(differences.matrix), tails, asked),
        statistic=pairs_won(differences.ranks(null_value), size),
        tails=tails(null_value),
        null_value=null_value,
    )


def normal(first: Values, second: Values, asked: Asked, *, continuity: bool) -> Located:
    """Compare two groups by the normal approximation of the number of pairs won by the first.

    The variance behind p counts all ties at the null value, that behind the interval the ties within the groups:
    between critical shifts there are no others.
    """
    ranks = shifted_ranks(first, second, asked.null_value)
    won = pairs_won(ranks, first.size)
    at_null = approximation(first.size, second.size, tied(ranks), continuity=continuity)
    pooled = np.concatenate([first, second])
    first, second = np.split(settled(pooled, rounding(pooled)), [first.size])
    within = np.concatenate([tied(first), tied(second)])
    between = approximation(first.size, second.size, within, continuity=continuity)
    differences = PairwiseSums.of_differences(first, second)
    return Located(
        estimate=differences.median(),
        interval=kept_by_count(differences.size, between.above, differences.kth, asked),
        statistic=won,
        tails=Tails(at_null.above(won), at_null.below(won)),
        null_value=asked.null_value,
    )


def shifted_ranks(first: Values, second: Values, shift: float) -> Ranks:
    """Give the doubled midranks of both groups together, once the shift is taken off the first."""
    pooled = np.concatenate([first - shift, second])
    return doubled_midranks(settled(pooled, np.concatenate([rounding(first, shift), rounding(second)])))


def pairs_won(ranks: Ranks, size: int) -> float:
    """Give U: the pairs in which the first group's value is the larger, ties counting 1/2."""
    return int(ranks[:size].sum()) / 2 - size * (size + 1) / 2


def tied(values: NDArray[np.float64] | Ranks) -> Ranks:
    """Count how often each value occurs."""
    return np.unique(values, return_counts=True)[1]


def approximation(n1: int, n2: int, ties: Ranks, *, continuity: bool) -> Normal:
    """Give the normal distribution of U with variance n1 n2 / 12 (N + 1 - Σ(t³ - t) / (N (N - 1)))."""
    n, t = n1 + n2, ties.astype(np.float64)
    lost = float((t**3 - t).sum()) / (n * (n - 1))
    return Normal(n1 * n2 / 2, math.sqrt(n1 * n2 / 12 * (n + 1 - lost)), 0.5 if continuity else 0.0)
