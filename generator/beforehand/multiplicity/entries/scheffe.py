"""Scheffe's procedure: every contrast of the means, also one that the data suggested."""

import math
from collections.abc import Sequence
from typing import Any

import numpy as np
from scipy import special

from beforehand.multiplicity.contract import FWER, IMPLIED_BY_FWER, WHOLE, Ascending, Steps, Vector, procedure
from beforehand.multiplicity.largest_again import legendre_rule, studentized_tails
from beforehand.multiplicity.single_step import by_largest
from beforehand.spelling import short

REPLAY_USES = (legendre_rule, studentized_tails)


@procedure(
    title="Scheffe's F for all contrasts",
    controls=FWER,
    strong=True,
    valid_under="normal values, one variance and independent groups; very conservative for a few planned contrasts",
    intervals="critical_value",
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    tests=("t_contrast",),
    compares="groups",
    one_sided=False,
    reference="Scheffe (1953), Biometrika 40:87-104",
)
def scheffe(p: Ascending, *, statistics: Vector, df: float, groups: int) -> Steps:
    """Refer each contrast to the largest of all contrasts between the groups.

    Keeps the family-wise error rate strongly for every contrast of the means, those chosen after looking included.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted two-sided p-values of one family, ascending.
    statistics : ndarray, shape (m,)
        The t statistic behind each p, with the variance pooled over all groups; 0 where there is no result.
    df : float
        Degrees of freedom of that variance; 0 where there is no result at all.
    groups : int
        Number of groups k as planned, also where some were not observed.

    Returns
    -------
    Steps
        Per rank: no factor, product P(F > t² / (k - 1)) with k - 1 and df degrees of freedom, which is the adjusted p
        too.

    References
    ----------
    Scheffe, H. (1953). A method for judging all contrasts in the analysis of variance. Biometrika 40:87-104.
    """
    between = groups - 1
    f = statistics**2 / between

    def threshold(level: float) -> Vector:
        c = critical_values(level, statistics=statistics, df=df, groups=groups)
        return np.asarray(2 * special.stdtr(df, -c), dtype=np.float64)

    return by_largest(
        p,
        tails=tails_with(0, range(p.size), statistics=statistics, df=df, groups=groups),
        arithmetic=lambda rank: f"P(F > {short(f[rank], 6)}) with {between} and {short(df, 6)} df",
        critical=threshold,
    )


def critical_values(level: float, *, statistics: Vector, df: float, groups: int) -> Vector:
    """Give √((k - 1) F) with F the quantile of its distribution: so many standard errors of a difference."""
    # x = df / (df + t²) has the beta distribution with df/2 and (k - 1)/2, and t is large where x is small
    x = special.betaincinv(df / 2, (groups - 1) / 2, level) if df else math.nan
    return np.full(len(statistics), math.sqrt(df * (1 - x) / x) if df else math.nan)


def tails_with(further: int, members: Sequence[int], *, statistics: Vector, df: float, groups: int) -> Vector:
    """Give the tails of some members when further groups without effect join in."""
    between = groups + further - 1
    f = np.asarray(statistics, dtype=np.float64)[members] ** 2 / between
    return np.asarray(special.fdtrc(between, df, f) if df else np.ones_like(f), dtype=np.float64)


def replay(
    p: list[float],
    level: float,
    *,
    statistics: list[float],
    df: float,
    groups: int,
) -> dict[str, list[Any]]:
    """Scheffe by integration over the standard deviation: sqrt((k - 1) F) is a chi divided by it."""

    def chi_tail(w: float) -> float:
        x, odd = w * w / 2, (groups - 1) % 2
        tail = math.erfc(w / 2**0.5) if odd else 0.0
        term = math.exp(-x) * (w * (2 / math.pi) ** 0.5 if odd else 1.0)
        for j in range((groups - 1) // 2):
            tail += term
            term *= x / (j + 1.5 if odd else j + 1)
        return tail

    tails = studentized_tails(chi_tail, 0.5, groups > 100, [abs(t) for t in statistics], [df] * len(p)) if df else []
    adjusted = [max(one, tail) for one, tail in zip(p, tails or [1.0] * len(p))]  # noqa: B905 -- read by Python 3.8 too
    return {"adjusted": adjusted, "rejected": [value <= level * (1 + 1e-12) for value in adjusted]}
