"""Games and Howell's procedure: all pairs of means, whatever the variances of the groups."""

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
    title="Games and Howell's studentized range with unequal variances",
    controls=FWER,
    strong=True,
    valid_under=(
        "normal values and independent groups, approximately; slightly above the level in groups of fewer than about 6"
    ),
    intervals="critical_value",
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    tests=("welch_t",),
    compares="groups",
    one_sided=False,
    reference="Games and Howell (1976), Journal of Educational Statistics 1:113-125",
)
def games_howell(p: Ascending, *, statistics: Vector, dfs: Vector, groups: int) -> Steps:
    """Refer each Welch statistic to the studentized range of all groups with the degrees of freedom of its own pair.

    Keeps the family-wise error rate approximately: the variances need not be equal, and with very small groups the
    level is exceeded a little.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted two-sided p-values of Welch's t-tests of one family, ascending.
    statistics : ndarray, shape (m,)
        The t statistic behind each p; 0 where there is no result.
    dfs : ndarray, shape (m,)
        The Welch-Satterthwaite degrees of freedom of each; 0 where there is no result.
    groups : int
        Number of groups as planned, also where some were not observed.

    Returns
    -------
    Steps
        Per rank: no factor, product P(Q > √2 |t|) with Q the studentized range of so many groups, which is the adjusted
        p too. The order of the adjusted p-values can differ from that of p.

    References
    ----------
    Games, P. A. and Howell, J. F. (1976). Pairwise multiple comparison procedures with unequal n's and/or variances: a
    Monte Carlo study. Journal of Educational Statistics 1:113-125.
    """
    q = math.sqrt(2) * np.abs(statistics)

    def threshold(level: float) -> Vector:
        c = critical_values(level, statistics=statistics, dfs=dfs, groups=groups)
        return np.asarray(2 * special.stdtr(dfs, -c), dtype=np.float64)

    return by_largest(
        p,
        tails=tails_with(0, range(p.size), statistics=statistics, dfs=dfs, groups=groups),
        arithmetic=lambda rank: f"P(Q > {short(q[rank], 6)}), range of {groups} groups with {short(dfs[rank], 6)} df",
        critical=threshold,
    )


def critical_values(level: float, *, statistics: Vector, dfs: Vector, groups: int) -> Vector:
    """Give for each pair the quantile of its range divided by √2: so many standard errors of its difference."""
    values = [range_quantile(level, groups=groups, df=df) / math.sqrt(2) if df else math.nan for df in dfs]
    return np.array(values, dtype=np.float64)


def tails_with(further: int, members: Sequence[int], *, statistics: Vector, dfs: Vector, groups: int) -> Vector:
    """Give the tails of some members when further groups without effect join in."""
    tails = [
        float(range_tail(math.sqrt(2) * abs(statistics[i]), groups=groups + further, df=dfs[i])[0]) if dfs[i] else 1.0
        for i in members
    ]
    return np.array(tails, dtype=np.float64)


def replay(
    p: list[float],
    level: float,
    *,
    statistics: list[float],
    dfs: list[float],
    groups: int,
) -> dict[str, list[Any]]:
    """Games and Howell by another rule of integration, in plain Python."""
    present = [i for i, df in enumerate(dfs) if df]
    tails = range_tails([abs(statistics[i]) * 2**0.5 for i in present], [dfs[i] for i in present], groups)
    adjusted = [1.0] * len(p)
    for i, tail in zip(present, tails):  # noqa: B905 -- read by Python 3.8 too
        adjusted[i] = max(p[i], tail)
    return {"adjusted": adjusted, "rejected": [value <= level * (1 + 1e-12) for value in adjusted]}
