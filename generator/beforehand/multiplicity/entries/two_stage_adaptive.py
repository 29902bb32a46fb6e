"""The two-stage adaptive procedure: the false discovery rate with an estimate of how many nulls are true."""

import numpy as np

from beforehand.multiplicity.contract import FDR, WHOLE, Ascending, Steps, Vector, Words, procedure, running_minimum
from beforehand.multiplicity.decision import is_rejected
from beforehand.spelling import exact


@procedure(
    title="Two-stage adaptive step-up",
    controls=FDR,
    strong=True,
    valid_under="independence",
    intervals=None,
    no_intervals_because=(
        "A false discovery rate has no simultaneous intervals; the unadjusted interval is printed, and it is not "
        "adjusted for having been selected."
    ),
    replays=WHOLE,
    reference="Benjamini, Krieger & Yekutieli (2006), Biometrika 93:491-507",
)
def two_stage_adaptive(p: Ascending) -> Steps:
    """Adjust p-values by the two-stage adaptive procedure for the false discovery rate.

    At level q, stage 1 is Benjamini and Hochberg's procedure at t = q / (1 + q). If it rejects r hypotheses, neither
    none nor all, stage 2 is the same at t x m / (m - r). Keeps the false discovery rate at q under independence
    (Benjamini, Krieger & Yekutieli 2006); under positive dependence this is known from simulation only.

    The adjusted p is the smallest q at which the two stages reject, so it can be smaller than p. Software that fixes
    stage 1 at one q prints other numbers, which hold for that q alone.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.

    Returns
    -------
    Steps
        Per rank: no factor, product t / (1 - t), where t is the smallest level of stage 1 at which stage 2 rejects,
        adjusted p (the product, capped at 1) and the rank that the Benjamini-Hochberg adjustment takes it from.

    Notes
    -----
    With a the p-values adjusted by Benjamini and Hochberg and r(t) the number of them up to t, a hypothesis is rejected
    when a <= t m / (m - r(t)). So t is the smallest max(a_(k), a (m - k) / m) over k from 0 to m - 1, with a_(0) = 0:
    the first grows with k and the second falls.

    References
    ----------
    Benjamini, Y., Krieger, A. M. & Yekutieli, D. (2006). Adaptive linear step-up procedures that control the false
    discovery rate. Biometrika 93:491-507.
    """
    m = p.size
    ranks = np.arange(1.0, m + 1)
    first_stage = running_minimum(p, factor=m / ranks)
    a = first_stage.adjusted
    reached = np.append(0.0, a)[:m]  # a_(k) for k = 0 ... m - 1
    k = np.searchsorted(reached * (m / (m - np.arange(m))), a)  # the first k at which a_(k) >= a (m - k) / m
    at_a_step = np.append(reached, np.inf)[k]
    between = np.where(k > 0, a * ((m - k + 1) / m), np.inf)
    t = np.minimum(at_a_step, between)
    product = np.divide(t, 1 - t, out=np.ones(m), where=t < 0.5)

    def words(rank: int) -> str:
        if between[rank] <= at_a_step[rank]:
            return f"t = {exact(a[rank])} × {m - k[rank] + 1}/{m}; t / (1 − t)"
        return f"t = {exact(t[rank])}, from which stage 1 rejects {k[rank]}; t / (1 − t)"

    factor = np.full(m, np.nan)
    return Steps.of(
        factor=factor,
        product=product,
        taken_from=first_stage.taken_from,
        arithmetic=Words(factor, words),
        critical=lambda level: _thresholds(a, level),
    )


def _thresholds(a: Vector, level: float) -> Vector:
    """Give the thresholds of stage 2, given the Benjamini-Hochberg adjusted p-values; 1 where stage 1 rejects all."""
    t = level / (1 + level)
    left = a.size - np.count_nonzero(is_rejected(a, t))
    return t * np.arange(1, a.size + 1) / left if left else np.ones(a.size)


def replay(p: list[float], level: float) -> dict[str, list[float] | list[bool]]:
    """Two stages by raising the level t of stage 1 from 0, noting when stage 2 first rejects each hypothesis.

    While stage 1 rejects k hypotheses, stage 2 has the level t x m / (m - k). Decisions walk up the staircase twice.
    """
    m, ascending = len(p), sorted(p)
    stage_1, smallest = [0.0] * m, 1.0
    for i in range(m - 1, -1, -1):
        smallest = min(smallest, m * ascending[i] / (i + 1))
        stage_1[i] = smallest

    adjusted, i = {}, 0
    for k in range(m):
        from_t, to_t = stage_1[k - 1] if k else 0.0, stage_1[k]
        while i < m and stage_1[i] * (m - k) / m <= to_t:
            t = max(from_t, stage_1[i] * (m - k) / m)
            adjusted[ascending[i]] = t / (1 - t) if t < 0.5 else 1.0
            i += 1

    def rejected_at(step: float) -> int:
        return max([i + 1 for i in range(m) if ascending[i] <= step * (i + 1) * (1 + 1e-12)], default=0)

    t = level / (1 + level)
    count = rejected_at(t / m) if m else 0
    if 0 < count < m:
        count = rejected_at(t / (m - count))
    largest = ascending[count - 1] if count else -1.0
    return {"adjusted": [adjusted[value] for value in p], "rejected": [value <= largest for value in p]}
