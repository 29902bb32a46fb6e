"""Dunnett's procedure: each group with one control."""

import math
from collections.abc import Sequence
from typing import Any

import numpy as np
from scipy import special

from beforehand.distributions.shared_control import Sides, shared_control_quantile, shared_control_tail
from beforehand.multiplicity.contract import FWER, IMPLIED_BY_FWER, WHOLE, Ascending, Steps, Vector, procedure
from beforehand.multiplicity.largest_again import legendre_rule, shared_control_tails, studentized_tails
from beforehand.multiplicity.single_step import by_largest
from beforehand.spelling import calculated, short

REPLAY_USES = (legendre_rule, studentized_tails, shared_control_tails)


@procedure(
    title="Dunnett's comparisons with a control",
    controls=FWER,
    strong=True,
    valid_under="normal values, one variance and independent groups; exact for any group sizes",
    intervals="critical_value",
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    tests=("t_contrast",),
    compares="control",
    reference="Dunnett (1955), Journal of the American Statistical Association 50:1096-1121",
)
def dunnett(p: Ascending, *, statistics: Vector, loadings: Vector, df: float, sides: Sides, doubled: bool) -> Steps:
    """Refer each comparison with the control to the largest of all of them.

    Keeps the family-wise error rate strongly, exactly so for any group sizes. A planned comparison without a result
    leaves its place: the tail of the m' others is multiplied by m / m'.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending: of two sides or of one, doubled or not.
    statistics : ndarray, shape (m,)
        The t statistic behind each p, with the variance pooled over all groups, above 0 where it speaks for the side
        asked; 0 where there is no result.
    loadings : ndarray, shape (m,)
        √(n / (n + n of the control)) for each, negative where the statistic is control minus group; 0 where there is
        no result. The correlation of two statistics is the product of their loadings.
    df : float
        Degrees of freedom of the variance; 0 where there is no result at all.
    sides : {1, 2}
        Whether the largest T or the largest absolute T is referred to.
    doubled : bool
        Whether the tail of one side is doubled, because both sides share the level.

    Returns
    -------
    Steps
        Per rank: no factor, product P(largest > t), times m / m' and 2 where that applies; capped at 1 the adjusted p.

    References
    ----------
    Dunnett, C. W. (1955). A multiple comparison procedure for comparing several treatments with a control. Journal of
    the American Statistical Association 50:1096-1121.
    """
    there = loadings != 0
    t = np.abs(statistics) if sides == 2 else statistics
    alone = np.ones_like(t)
    if there.any():
        alone[there] = shared_control_tail(t[there], loadings=loadings[there], df=df, sides=sides)

    def arithmetic(rank: int) -> str:
        if not there[rank]:
            return "no result"
        largest = "largest |T|" if sides == 2 else "largest T"
        tail = f"P({largest} of {there.sum()} > {short(t[rank], 6)}) with {short(df, 6)} df"
        times = ["doubled"] if doubled else []
        times += [] if there.all() else [f"times {there.size}/{there.sum()}, planned over computed"]
        return ", ".join([f"{tail} = {calculated(alone[rank])}", *times]) if times else tail

    def threshold(level: float) -> Vector:
        c = critical_values(level, statistics=t, loadings=loadings, df=df, sides=sides, doubled=doubled)
        return np.asarray((2 if sides == 2 or doubled else 1) * special.stdtr(df, -c), dtype=np.float64)

    tails = np.where(there, _times(loadings, doubled) * alone, 1.0)
    return by_largest(p, tails=tails, arithmetic=arithmetic, critical=threshold)


def _times(loadings: Vector, doubled: bool) -> float:
    """Give by how much a tail is multiplied: planned over computed, and 2 where the p of one side is doubled."""
    computed = np.count_nonzero(loadings)
    return (2 if doubled else 1) * len(loadings) / computed if computed else 1.0


def critical_values(
    level: float, *, statistics: Vector, loadings: Vector, df: float, sides: Sides, doubled: bool
) -> Vector:
    """Give the quantile of the largest statistic for each comparison with a result, NaN for the others."""
    loadings = np.asarray(loadings, dtype=np.float64)
    values = np.full(len(statistics), math.nan)
    there = loadings != 0
    if there.any():
        tail = level / _times(loadings, doubled)
        values[there] = shared_control_quantile(tail, loadings=loadings[there], df=df, sides=sides)
    return values


def tails_with(
    further: int,
    members: Sequence[int],
    *,
    statistics: Vector,
    loadings: Vector,
    df: float,
    sides: Sides,
    doubled: bool,
) -> Vector:
    """Give the tails of some members, times what they are multiplied by, when further groups without effect join in."""
    tails = []
    for i in members:
        if not loadings[i]:
            tails.append(1.0)
            continue
        every = np.concatenate([loadings, np.full(further, loadings[i])])
        t = abs(statistics[i]) if sides == 2 else statistics[i]
        tail = shared_control_tail(t, loadings=every[every != 0], df=df, sides=sides)[0]
        tails.append(min(1.0, _times(every, doubled) * float(tail)))
    return np.array(tails, dtype=np.float64)


def replay(
    p: list[float],
    level: float,
    *,
    statistics: list[float],
    loadings: list[float],
    df: float,
    sides: int,
    doubled: bool,
) -> dict[str, list[Any]]:
    """Dunnett by another rule of integration, in plain Python."""
    present = [i for i, loading in enumerate(loadings) if loading]
    t = [abs(statistics[i]) if sides == 2 else statistics[i] for i in present]
    tails = shared_control_tails(t, [loadings[i] for i in present], df, sides) if present else []
    adjusted = [1.0] * len(p)
    for i, tail in zip(present, tails):  # noqa: B905 -- read by Python 3.8 too
        adjusted[i] = min(1.0, max(p[i], tail * len(p) / len(present) * (2 if doubled else 1)))
    return {"adjusted": adjusted, "rejected": [value <= level * (1 + 1e-12) for value in adjusted]}
