"""Tukey's studentized range, with Kramer's extension to unequal groups."""

import math
from collections.abc import Sequence
from typing import Any

import numpy as np
from scipy import special

from beforehand.distributions.studentized_range import range_quantile, range_tail
from beforehand.multiplicity.contract import FWER, IMPLIED_BY_FWER, WHOLE, Ascending, Steps, Vector, procedure
from beforehand.multiplicity.largest_again import legendre_rule, range_tails, studentized_tails
from beforehand.multiplicity.single_step import by_largest
from beforehand.spelling import short

REPLAY_USES = (legendre_rule, studentized_tails, range_tails)


@procedure(
    title="Tukey's studentized range (Tukey-Kramer for unequal groups)",
    controls=FWER,
    strong=True,
    valid_under="normal values, one variance and independent groups; conservative for unequal groups or fewer pairs",
    intervals="critical_value",
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    tests=("t_contrast",),
    compares="groups",
    one_sided=False,
    reference="Tukey (1953); Kramer (1956), Biometrics 12:307-310; Hayter (1984), Annals of Statistics 12:61-75",
)
def tukey(p: Ascending, *, statistics: Vector, df: float, groups: int) -> Steps:
    """Refer each difference of two means to the range of all of them.

    Keeps the family-wise error rate strongly for all pairs of groups: exactly for groups of one size, conservatively
    for unequal ones, and the more conservatively the fewer of the pairs are asked about.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted two-sided p-values of one family, ascending.
    statistics : ndarray, shape (m,)
        The t statistic behind each p, with the variance pooled over all groups; 0 where there is no result.
    df : float
        Degrees of freedom of that variance; 0 where there is no result at all.
    groups : int
        Number of groups as planned, also where some were not observed.

    Returns
    -------
    Steps
        Per rank: no factor, product P(Q > √2 |t|) with Q the studentized range of so many groups, which is the adjusted
        p too.

    References
    ----------
    Tukey, J. W. (1953). The problem of multiple comparisons. In The Collected Works of John W. Tukey VIII
    (1994), 1-300.
    Kramer, C. Y. (1956). Extension of multiple range tests to group means with unequal numbers of replications.
    Biometrics 12:307-310.
    Hayter, A. J. (1984). A proof of the conjecture that the Tukey-Kramer multiple comparisons procedure is
    conservative. Annals of Statistics 12:61-75.
    """
    q = math.sqrt(2) * np.abs(statistics)

    def threshold(level: float) -> Vector:
        c = critical_values(level, statistics=statistics, df=df, groups=groups)
        return np.asarray(2 * special.stdtr(df, -c), dtype=np.float64)

    return by_largest(
        p,
        tails=tails_with(0, range(p.size), statistics=statistics, df=df, groups=groups),
        arithmetic=lambda rank: f"P(Q > {short(q[rank], 6)}), range of {groups} groups with {short(df, 6)} df",
        critical=threshold,
    )


def critical_values(level: float, *, statistics: Vector, df: float, groups: int) -> Vector:
    """Give the quantile of the range divided by √2: so many standard errors of a difference."""
    value = range_quantile(level, groups=groups, df=df) / math.sqrt(2) if df else math.nan
    return np.full(len(statistics), value)


def tails_with(further: int, members: Sequence[int], *, statistics: Vector, df: float, groups: int) -> Vector:
    """Give the tails of some members when further groups without effect join in."""
    q = math.sqrt(2) * np.abs(np.asarray(statistics, dtype=np.float64)[members])
    return range_tail(q, groups=groups + further, df=df) if df else np.ones_like(q)


def replay(
    p: list[float],
    level: float,
    *,
    statistics: list[float],
    df: float,
    groups: int,
) -> dict[str, list[Any]]:
    """Tukey by another rule of integration, in plain Python."""
    q = [abs(t) * 2**0.5 for t in statistics]
    tails = range_tails(q, [df] * len(q), groups) if df else [1.0] * len(q)
    adjusted = [max(one, tail) for one, tail in zip(p, tails)]  # noqa: B905 -- read by Python 3.8 too
    return {"adjusted": adjusted, "rejected": [value <= level * (1 + 1e-12) for value in adjusted]}
