"""Estimates of the share of true nulls: what is left of the p-values far from 0."""

from functools import lru_cache
from typing import Literal

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import brentq

from beforehand.multiplicity.contract import Ascending, Vector

Way = Literal["smoother", "bootstrap", "from_half"]

POINTS = np.arange(1, 20) / 20
"""From where on p-values are counted: 0.05, 0.10, ..., 0.95 (Storey & Tibshirani 2003)."""
DEGREES_OF_FREEDOM = 3.0
"""The trace of the smoother (Storey & Tibshirani 2003)."""


def share_of_true_nulls(p: Ascending, by: Way) -> float:
    """Estimate the share of true nulls among m hypotheses.

    Parameters
    ----------
    p : ndarray, shape (m,)
        p-values, ascending.
    by : {"smoother", "bootstrap", "from_half"}
        ``smoother``: the share of p-values from each point on, relative to what true nulls would give, smoothed by a
        natural cubic spline with three degrees of freedom and read at 0.95. ``bootstrap``: the same at the point with
        the smallest estimated mean squared error, in its closed form, so that nothing is drawn. ``from_half``: twice
        the p-values above 0.5 and one more.

    Returns
    -------
    float
        From 1/m to 1: at least one null is taken to be true. Only ``from_half`` can be above 1, and has to be left
        there: cut off at 1 it wouldn't keep the false discovery rate when all nulls are true.

    References
    ----------
    Storey, J. D. (2002). A direct approach to false discovery rates. Journal of the Royal Statistical Society B
    64:479-498.
    Storey, J. D. & Tibshirani, R. (2003). Statistical significance for genomewide studies. Proceedings of the National
    Academy of Sciences 100:9440-9445.
    Storey, J. D., Taylor, J. E. & Siegmund, D. (2004). Strong control, conservative point estimation and simultaneous
    conservative consistency of false discovery rates. Journal of the Royal Statistical Society B 66:187-205.
    """
    m = p.size
    if m == 0:
        return 1.0
    if by == "from_half":
        return 2.0 * float(m - np.searchsorted(p, 0.5, side="right") + 1) / m
    beyond = m - np.searchsorted(p, POINTS)
    shares = beyond / (m * (1 - POINTS))
    estimate = np.sum(smoothing() * shares) if by == "smoother" else _least_error(beyond, shares, m)
    return float(np.clip(estimate, 1 / m, 1.0))


def _least_error(beyond: NDArray[np.intp], shares: Vector, m: int) -> float:
    """Choose the point with the smallest variance plus squared distance from the tenth percentile of the shares."""
    variance = beyond / (m * (1 - POINTS)) ** 2 * (1 - beyond / m)
    error = variance + (shares - np.quantile(shares, 0.1)) ** 2
    return float(shares[np.argmin(error)])


@lru_cache(maxsize=1)
def smoothing() -> Vector:
    """Give by how much each of the 19 shares counts in the smoothed share at 0.95."""
    roughness, shapes = np.linalg.eigh(_roughness())
    roughness[:2] = 0.0  # a straight line isn't rough
    kept = 1 / (1 + smoothing_parameter(roughness) * roughness)
    result: Vector = np.sum(shapes * (shapes[-1] * kept), axis=1)
    return result


def smoothing_parameter(roughness: Vector) -> float:
    """Give the weight of the roughness with which the smoother has its trace, for points one apart."""
    return float(brentq(lambda x: np.sum(1 / (1 + x * roughness)) - DEGREES_OF_FREEDOM, 1e-3, 1e9, rtol=1e-15))


def _roughness() -> Vector:
    """Give the matrix whose quadratic form is the squared second derivative of the natural spline, points one apart.

    Green & Silverman (1994), Nonparametric Regression and Generalized Linear Models, section 2.1.2; from memory.
    """
    inner = POINTS.size - 2
    second = np.zeros((POINTS.size, inner))
    for j in range(inner):
        second[j : j + 3, j] = (1.0, -2.0, 1.0)
    band = np.eye(inner) * 2 / 3 + (np.eye(inner, k=1) + np.eye(inner, k=-1)) / 6
    return second @ np.linalg.solve(band, second.T)
