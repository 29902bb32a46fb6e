"""What a pair of groups costs when it is picked because it lies further apart than any other."""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy import stats

Values = NDArray[np.float64]


def level_of_extreme_pair(groups: int, *, per_side: float, df: float = math.inf) -> float:
    """Give the level that an unadjusted t test really has when its pair is picked as the extreme one.

    The test rejects when t exceeds its quantile at ``per_side``. For the pair with the largest and the smallest mean
    t = Q / √2, where Q is the studentized range of all groups. Means tell nothing of variances, so that picking the
    pair by its means leaves the df of its test as they are.

    Parameters
    ----------
    groups : int
        Number of groups k from which the pair was picked, at least 2.
    per_side : float
        The level of one side: α for a one-sided test, α/2 for a two-sided one.
    df : float
        Degrees of freedom of the test; infinite for large samples.

    Returns
    -------
    float
        Exact for normal values with equal variances and equally many units; for unequal numbers an upper bound
        (Hayter 1984); for unequal variances, ranks and events an approximation.

    References
    ----------
    Tukey (1953), The problem of multiple comparisons, Princeton University. Hayter (1984), Annals of Statistics
    12:61-75.
    """
    return float(stats.studentized_range.sf(math.sqrt(2) * stats.t.isf(per_side, df), groups, df))


@dataclass(frozen=True)
class AmongAllPairs:
    """Two-sided p of one difference in means when every difference of the groups counts."""

    tukey_kramer: float
    """Among all pairs."""
    scheffe: float
    """Among all contrasts."""


def among_all_pairs(groups: tuple[Values, ...], first: int, second: int, *, null_value: float = 0.0) -> AmongAllPairs:
    """Give the adjusted p of one difference in means, with the variance pooled over all groups.

    Parameters
    ----------
    groups : tuple of ndarray
        The values of every group, none missing.
    first, second : int
        The two groups of the pair, by their place.
    null_value : float
        The difference first - second under the null hypothesis, in the unit of the values.

    Returns
    -------
    AmongAllPairs
        Tukey-Kramer and Scheffé; NaN where there are no more values than groups, or no group varies.

    Notes
    -----
    Assumes normal values with equal variances in all groups.

    References
    ----------
    Kramer (1956), Biometrics 12:307-310. Scheffé (1953), Biometrika 40:87-104.
    """
    k = len(groups)
    df = sum(values.size for values in groups) - k
    squares = sum(float(np.sum((values - values.mean()) ** 2)) for values in groups)
    if df < 1 or squares == 0:
        return AmongAllPairs(math.nan, math.nan)
    one, two = groups[first], groups[second]
    error = math.sqrt(squares / df * (1 / one.size + 1 / two.size))
    t = abs(float(one.mean() - two.mean()) - null_value) / error
    return AmongAllPairs(
        tukey_kramer=float(stats.studentized_range.sf(math.sqrt(2) * t, k, df)),
        scheffe=float(stats.f.sf(t * t / (k - 1), k - 1, df)),
    )
