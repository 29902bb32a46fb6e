"""One p-value for several hypotheses: that all nulls are true."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.optimize import brentq
from scipy.special import chdtrc, ndtr, ndtri

from beforehand.multiplicity.contract import Ascending, Ordered, Vector
from beforehand.multiplicity.simes import VALID_UNDER as WHERE_SIMES_HOLDS

ALL_TRUE = "all null hypotheses are true"


@dataclass(frozen=True, kw_only=True)
class Combined:
    """One p-value for several hypotheses, and what it rests on. It rejects no single one of them."""

    p: float
    statistic: float
    """What was summed up; for a p-value that is the smallest of several multiples, the p before it is capped at 1."""
    title: str
    null: str
    valid_under: str
    """The dependence between p-values under which it is valid."""
    reference: str


def fisher(p: ArrayLike | Ordered) -> Combined:
    """Combine p-values by the sum of their logarithms.

    Parameters
    ----------
    p : array_like, shape (m,), or Ordered
        p-values, each uniform or larger under its null.

    Returns
    -------
    Combined
        Statistic -2 (log p_1 + ... + log p_m), chi-squared with 2 m degrees of freedom when all nulls are true.

    Raises
    ------
    ValueError
        When there is no p-value, or one is outside 0 to 1.

    References
    ----------
    Fisher, R. A. (1932). Statistical Methods for Research Workers, 4th edition. Oliver and Boyd, section 21.1.
    """
    ascending = checked(p)
    with np.errstate(divide="ignore"):  # p = 0
        statistic = -2 * float(np.sum(np.log(ascending)))
    return Combined(
        p=float(chdtrc(2 * ascending.size, statistic)),
        statistic=statistic,
        title="Fisher's combination",
        null=ALL_TRUE,
        valid_under="independence",
        reference="Fisher (1932), Statistical Methods for Research Workers, section 21.1",
    )


def stouffer(p: ArrayLike, *, weights: ArrayLike | None = None) -> Combined:
    """Combine one-sided p-values by the weighted sum of their normal quantiles.

    Parameters
    ----------
    p : array_like, shape (m,)
        One-sided p-values, each uniform or larger under its null.
    weights : array_like, shape (m,), optional
        Positive weights, such as the square roots of the sample sizes; equal ones when not given.

    Returns
    -------
    Combined
        Statistic: the sum of weight x quantile of 1 - p, divided by the root of the sum of squared weights; standard
        normal when all nulls are true.

    Raises
    ------
    ValueError
        When there is no p-value, one is outside 0 to 1, one is 0 and another 1, or a weight isn't positive.

    References
    ----------
    Stouffer, S. A. and others (1949). The American Soldier, volume 1. Princeton University Press.
    Liptak, T. (1958). On the combination of independent tests. Magyar Tudomanyos Akademia Matematikai Kutato Intezete
    Kozlemenyei 3:171-197 (the weights).
    """
    values = _of_one_mind(p)
    weight = _weights(weights, values.size)
    statistic = float(np.sum(weight * -ndtri(values)) / np.sqrt(np.sum(weight**2)))
    return Combined(
        p=float(ndtr(-statistic)),
        statistic=statistic,
        title="Stouffer's combination",
        null=ALL_TRUE,
        valid_under="independence",
        reference="Stouffer and others (1949), The American Soldier, volume 1",
    )


def simes(p: ArrayLike | Ordered) -> Combined:
    """Combine p-values by the smallest m x p_(i) / i.

    Parameters
    ----------
    p : array_like, shape (m,), or Ordered
        p-values, each uniform or larger under its null.

    Returns
    -------
    Combined
        p: the smallest of the quotients, which is also the smallest p adjusted by Benjamini and Hochberg.

    Raises
    ------
    ValueError
        When there is no p-value, or one is outside 0 to 1.

    References
    ----------
    Simes, R. J. (1986). An improved Bonferroni procedure for multiple tests of significance. Biometrika 73:751-754.
    """
    ascending = checked(p)
    smallest = float(np.min(ascending.size / np.arange(1.0, ascending.size + 1) * ascending))
    return Combined(
        p=smallest,
        statistic=smallest,
        title="Simes' test",
        null=ALL_TRUE,
        valid_under=WHERE_SIMES_HOLDS,
        reference="Simes (1986), Biometrika 73:751-754",
    )


def bonferroni(p: ArrayLike | Ordered) -> Combined:
    """Combine p-values by m times the smallest.

    Parameters
    ----------
    p : array_like, shape (m,), or Ordered
        p-values, each uniform or larger under its null.

    Returns
    -------
    Combined
        p: the product, capped at 1.

    Raises
    ------
    ValueError
        When there is no p-value, or one is outside 0 to 1.

    References
    ----------
    Dunn, O. J. (1961). Multiple comparisons among means. Journal of the American Statistical Association 56:52-64.
    """
    ascending = checked(p)
    product = float(ascending.size * ascending[0])
    return Combined(
        p=min(1.0, product),
        statistic=product,
        title="Bonferroni's test of all",
        null=ALL_TRUE,
        valid_under="any dependence",
        reference="Dunn (1961), Journal of the American Statistical Association 56:52-64",
    )


def cauchy(p: ArrayLike, *, weights: ArrayLike | None = None) -> Combined:
    """Combine p-values by the weighted mean of their Cauchy quantiles.

    The mean of independent standard Cauchy values is standard Cauchy; far out, dependence changes next to nothing. A
    single p of 1 makes the combined p 1.

    Parameters
    ----------
    p : array_like, shape (m,)
        p-values, each uniform or larger under its null.
    weights : array_like, shape (m,), optional
        Positive weights, of which only the ratios matter; equal ones when not given.

    Returns
    -------
    Combined
        Statistic: the mean of tan((1/2 - p) pi).

    Raises
    ------
    ValueError
        When there is no p-value, one is outside 0 to 1, one is 0 and another 1, or a weight isn't positive.

    References
    ----------
    Liu, Y. & Xie, J. (2020). Cauchy combination test: a powerful test with analytic p-value calculation under arbitrary
    dependency structures. Journal of the American Statistical Association 115:393-402.
    """
    values = _of_one_mind(p)
    weight = _weights(weights, values.size)
    quantiles = np.full(values.size, -np.inf)  # tan((1/2 - p) pi) = cot(p pi), which keeps the digits of a small p
    with np.errstate(divide="ignore"):  # p = 0
        np.divide(1.0, np.tan(np.pi * values), out=quantiles, where=values < 1)
    statistic = float(np.sum(weight * quantiles) / np.sum(weight))
    return Combined(
        p=float(np.arctan2(1.0, statistic) / np.pi),
        statistic=statistic,
        title="Cauchy combination",
        null=ALL_TRUE,
        valid_under=(
            "independence exactly; approximately, and only for a small combined p, statistics of which any two are "
            "jointly normal"
        ),
        reference="Liu & Xie (2020), Journal of the American Statistical Association 115:393-402",
    )


def harmonic_mean(p: ArrayLike | Ordered) -> Combined:
    """Combine p-values by their harmonic mean times the factor that makes it valid under any dependence.

    The harmonic mean itself is no p-value: it can err more often than the level even under independence. The factor is
    near the logarithm of m.

    Parameters
    ----------
    p : array_like, shape (m,), or Ordered
        p-values, each uniform or larger under its null.

    Returns
    -------
    Combined
        Statistic: the harmonic mean; p: the factor x the harmonic mean, capped at 1.

    Raises
    ------
    ValueError
        When there is no p-value, or one is outside 0 to 1.

    References
    ----------
    Vovk, V. & Wang, R. (2020). Combining p-values via averaging. Biometrika 107:791-808.
    """
    ascending = checked(p)
    with np.errstate(divide="ignore"):  # p = 0
        mean = float(ascending.size / np.sum(1 / ascending))
    return Combined(
        p=min(1.0, harmonic_factor(ascending.size) * mean),
        statistic=mean,
        title="Harmonic mean of p-values, times its factor for any dependence",
        null=ALL_TRUE,
        valid_under="any dependence",
        reference="Vovk & Wang (2020), Biometrika 107:791-808",
    )


def harmonic_factor(m: int) -> float:
    """Give the smallest factor that makes the harmonic mean of m p-values valid under any dependence.

    For m from 3 on it is (y + m)^2 / ((y + 1) m) with y > 0 the solution of y^2 = m ((y + 1) log(y + 1) - y) (Vovk &
    Wang 2020; from memory, and derived again in the tests from the worst dependence of such sums).
    """
    if m <= 2:
        return float(m)
    y = brentq(lambda y: y**2 - m * ((y + 1) * np.log1p(y) - y), 1e-3, 10 * m * np.log(m), xtol=1e-12, rtol=1e-14)
    return float((y + m) ** 2 / ((y + 1) * m))


def checked(p: ArrayLike | Ordered) -> Ascending:
    """Give p-values in ascending order; there has to be one."""
    ascending = Ordered.of(p).ascending
    if ascending.size == 0:
        raise ValueError("there is no p-value to combine")
    return ascending


def _of_one_mind(p: ArrayLike) -> Vector:
    """Check p-values of which 0 and 1 would weigh without limit on either side."""
    ascending = checked(p)
    if ascending[0] == 0 and ascending[-1] == 1:
        raise ValueError("a p of 0 and a p of 1 have no sum of quantiles")
    return np.asarray(p, dtype=np.float64)


def _weights(weights: ArrayLike | None, m: int) -> Vector:
    values = np.ones(m) if weights is None else np.asarray(weights, dtype=np.float64)
    if values.shape != (m,) or not np.all(np.isfinite(values) & (values > 0)):
        raise ValueError(f"the weights are {m} positive numbers, one for each p-value")
    return values
