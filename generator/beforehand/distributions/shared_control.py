"""The largest of several t statistics that share one control and one estimated variance (Dunnett)."""

import math
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy import special

from beforehand.distributions.studentized import MANY, Studentized, Values

Counts = NDArray[np.int64]
Sides = Literal[1, 2]

FAR = 9.0
"""A standard normal density has fallen to 3e-18 of its peak there."""


def shared_control_tail(t: ArrayLike, *, loadings: ArrayLike, df: float, sides: Sides) -> Values:
    """Give the upper tail of the largest of several t statistics with a shared control.

    Parameters
    ----------
    t : array_like, shape (n,)
        Quantiles.
    loadings : array_like, shape (m,)
        For each statistic b = √(n / (n + n of the control)), between -1 and 1 and not 0; negative where the statistic
        is control minus group. The correlation of two statistics is the product of their loadings.
    df : float
        Degrees of freedom of the variance, above 0; infinite when it is known.
    sides : {1, 2}
        1 for the largest T, 2 for the largest absolute T.

    Returns
    -------
    ndarray, shape (n,)
        P(max T > t), or P(max abs T > t); relative accuracy 1e-12 for up to 1,000 statistics, down to 1e-290.

    Raises
    ------
    ValueError
        When there is no loading or one out of range, sides is neither 1 nor 2, a quantile is missing, or the degrees
        of freedom are not above 0.

    References
    ----------
    Dunnett (1955), Journal of the American Statistical Association 50:1096-1121, section 6.
    Dunnett and Sobel (1955), Biometrika 42:258-260 (correlations that are products).
    """
    return _distribution(loadings, sides).tail(t, df)


def shared_control_quantile(tail: float, *, loadings: ArrayLike, df: float, sides: Sides) -> float:
    """Give the quantile above which a tail of the largest statistic lies.

    Parameters
    ----------
    tail : float
        Probability above the quantile, between 0 and 1/2.
    loadings, df, sides
        As for ``shared_control_tail``.

    Returns
    -------
    float
        c with P(max > c) = tail, relative accuracy 1e-11.

    Raises
    ------
    ValueError
        When the tail does not lie between 0 and 1/2, or as for ``shared_control_tail``.
    """
    if not 0 < tail < 0.5:
        raise ValueError(f"a tail lies between 0 and 1/2; found {tail}")
    m = np.atleast_1d(np.asarray(loadings)).size
    one, all_alone = (-float(special.stdtrit(df, tail / sides / each)) for each in (1, m))  # alone, and Bonferroni
    return _distribution(loadings, sides).quantile(tail, df, between=(one, all_alone))


def _distribution(loadings: ArrayLike, sides: Sides) -> Studentized:
    b = np.atleast_1d(np.asarray(loadings, dtype=np.float64))
    if not b.size or not np.all((np.abs(b) < 1) & (b != 0)):
        raise ValueError("loadings lie between -1 and 1 and are not 0, and there is at least one")
    if sides not in (1, 2):
        raise ValueError(f"sides are 1 or 2; found {sides}")
    different, times = np.unique(np.abs(b) if sides == 2 else b, return_counts=True)
    return Studentized(lambda w: _normal_tail(w, different, times, sides), rate=1 / 2, many=b.size > MANY)


def _normal_tail(w: Values, loadings: Values, times: Counts, sides: Sides) -> Values:
    """Give P(max > w) with a known variance, by the trapezoid rule over z, minus the control's error.

    Given z the statistics b z + √(1 - b²) x are independent, so the tail is the mean over z of 1 - Π(1 - tail_i(z)),
    written without the difference. Each tail_i turns from 0 to 1 about z = w / b, within √(1 - b²) / b.
    """
    steepest = float(np.abs(loadings).max())
    step = min(1 / 8 if times.sum() <= MANY else 1 / 16, 0.4 * math.sqrt(1 - steepest**2) / steepest)
    tails = np.empty_like(w)
    unit = np.maximum(np.ceil(w), -FAR)  # below that the tail is 1
    for top in np.unique(unit):
        here = unit == top
        z = _nodes(FAR + max(top, 0.0) * steepest, step, loadings, sides)
        weights = step * np.exp(-z * z / 2) / math.sqrt(2 * math.pi)
        if sides == 2:
            weights[1:] *= 2  # what z does on one side, -z does on the other
        tails[here] = (_any_above(w[here], z, loadings, times, sides) * weights).sum(axis=1)
    return np.minimum(tails, 1.0)


def _nodes(far: float, step: float, loadings: Values, sides: Sides) -> Values:
    """Give the nodes: far out on a side on which a large statistic needs a large z; one side stands for both."""
    low = 0.0 if sides == 2 else far if (loadings < 0).any() else FAR
    high = far if (loadings > 0).any() else FAR
    return step * np.arange(-math.ceil(low / step), math.ceil(high / step) + 1, dtype=np.float64)


def _any_above(w: Values, z: Values, loadings: Values, times: Counts, sides: Sides) -> Values:
    """Give for each w and z the probability that any statistic lies above w."""
    none = np.zeros((w.size, z.size))
    for b, count in zip(loadings, times, strict=True):
        rest = math.sqrt(1 - b * b)
        above = special.ndtr((b * z - w[:, np.newaxis]) / rest)
        if sides == 2:
            above += special.ndtr((-b * z - w[:, np.newaxis]) / rest)
        with np.errstate(divide="ignore"):  # log 0 where one surely lies above
            none += count * np.log1p(-np.minimum(above, 1.0))
    return -np.expm1(none)
