"""The studentized range: how far apart the largest and the smallest of several means are in standard errors."""

import math

import numpy as np
from numpy.typing import ArrayLike
from scipy import special

from beforehand.distributions.studentized import MANY, Studentized, Values

FAR = 9.0
"""A standard normal density has fallen to 3e-18 of its peak there."""


def range_tail(q: ArrayLike, *, groups: int, df: float) -> Values:
    """Give the upper tail of the studentized range.

    Parameters
    ----------
    q : array_like, shape (n,)
        Quantiles: (largest - smallest mean) / (standard error of a mean), which is √2 times the largest |t| of all
        pairs; any real numbers.
    groups : int
        Number of groups, 2 or more.
    df : float
        Degrees of freedom of the variance, above 0; infinite when it is known.

    Returns
    -------
    ndarray, shape (n,)
        P(Q > q), relative accuracy 1e-12 for up to 1,000 groups, down to 1e-290.

    Raises
    ------
    ValueError
        When there are fewer than 2 groups, a quantile is missing, or the degrees of freedom are not above 0.

    References
    ----------
    Tukey (1953), The problem of multiple comparisons, in The Collected Works of John W. Tukey VIII, 1-300.
    Lund and Lund (1983), Applied Statistics 32:204-210, equations 1 and 2.
    """
    return _distribution(groups).tail(q, df)


def range_quantile(tail: float, *, groups: int, df: float) -> float:
    """Give the quantile of the studentized range above which a tail lies.

    Parameters
    ----------
    tail : float
        Probability above the quantile, between 0 and 1/2.
    groups, df
        As for ``range_tail``.

    Returns
    -------
    float
        q with P(Q > q) = tail, relative accuracy 1e-11.

    Raises
    ------
    ValueError
        When the tail does not lie between 0 and 1/2, or as for ``range_tail``.
    """
    if not 0 < tail <= 0.5:
        raise ValueError(f"a tail lies between 0 and 1/2; found {tail}")
    pairs = groups * (groups - 1) / 2
    one, all_alone = (-float(special.stdtrit(df, tail / 2 / m)) for m in (1, pairs))  # a single pair, and Bonferroni
    return _distribution(groups).quantile(tail, df, between=(math.sqrt(2) * one, math.sqrt(2) * all_alone))


def _distribution(groups: int) -> Studentized:
    if groups < 2:
        raise ValueError(f"a range needs at least 2 groups; found {groups}")
    return Studentized(lambda w: _normal_range_tail(w, groups), rate=1 / 4, many=groups > MANY)


def _normal_range_tail(w: Values, groups: int) -> Values:
    """Give P(range > w) of standard normal values, by the trapezoid rule over the largest of them.

    k φ(z) [Φ(z)^(k-1) - (Φ(z) - Φ(z - w))^(k-1)], written without the difference. For large w the largest value lies
    near w / 2, so each unit of w has nodes of its own.
    """
    step = 1 / 8 if groups <= MANY else 1 / 16
    tails = np.ones_like(w)
    unit = np.ceil(w)
    for top in np.unique(unit[w > 0]):
        here = unit == top
        z = np.arange(max(-FAR, (top - 1) / 2 - FAR), top / 2 + FAR + step, step)
        below = special.ndtr(z)
        too_low = np.minimum(special.ndtr(z - w[here, np.newaxis]) / below, 1.0)
        with np.errstate(divide="ignore"):  # log 0 where all other values are surely too low
            any_too_low = -np.expm1((groups - 1) * np.log1p(-too_low))
        largest = step * groups * np.exp(-z * z / 2) / math.sqrt(2 * math.pi) * below ** (groups - 1)
        tails[here] = (any_too_low * largest).sum(axis=1)
    return np.minimum(tails, 1.0)
