"""Holm's step-down procedure with weights."""

import numpy as np

from beforehand.multiplicity.contract import (
    FWER,
    IMPLIED_BY_FWER,
    WHOLE,
    Ascending,
    Steps,
    Vector,
    Words,
    largest_so_far,
    procedure,
)
from beforehand.multiplicity.shares import NO_SHARE, per_share, product_of, shares_of


@procedure(
    title="Weighted Holm step-down",
    controls=FWER,
    strong=True,
    valid_under="any dependence",
    intervals=None,
    no_intervals_because=(
        "Simultaneous intervals that match step-down decisions end at the null value for every rejected hypothesis "
        "unless all are rejected, so only the unadjusted interval is printed."
    ),
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    reference="Holm (1979), Scandinavian Journal of Statistics 6:65-70",
)
def weighted_holm(p: Ascending, *, weights: Vector) -> Steps:
    """Adjust p-values by Holm's step-down procedure with unequal shares of the level.

    Hypotheses are taken in the order of p / weight; each has to meet its share of the level among those that are left.
    Keeps the family-wise error rate strongly under any dependence, and rejects whatever the weighted Bonferroni
    adjustment does. Only the ratios of the weights matter; with equal ones this is Holm's procedure. A hypothesis of
    weight 0 is rejected only if its p is 0.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.
    weights : ndarray, shape (m,)
        The weight of each, from 0 on.

    Returns
    -------
    Steps
        Per rank: factor (sum of the weights from this p / weight on) / weight, product, adjusted p (running maximum in
        the order of p / weight, capped at 1) and the rank it was taken from.

    Raises
    ------
    ValueError
        When a weight is negative or missing, or all are 0.

    References
    ----------
    Holm, S. (1979). A simple sequentially rejective multiple test procedure. Scandinavian Journal of Statistics
    6:65-70.
    Benjamini, Y. & Hochberg, Y. (1997). Multiple hypotheses testing with weights. Scandinavian Journal of Statistics
    24:407-418.
    """
    share = shares_of(weights)
    order = np.argsort(per_share(p, share), kind="stable")
    left, taken_from = np.empty(p.size), np.empty(p.size, dtype=np.intp)
    left[order] = np.cumsum(share[order][::-1])[::-1]
    factor = np.divide(left, share, out=np.full(p.size, np.nan), where=share > 0)
    product = product_of(p, factor)
    taken_from[order] = order[largest_so_far(product[order])]
    return Steps.of(
        factor=factor,
        product=product,
        taken_from=taken_from,
        arithmetic=Words(factor, lambda _: NO_SHARE),
        critical=lambda level: np.where(share > 0, level / factor, 0.0),
    )


def replay(
    p: list[float],
    level: float,
    weights: list[float],
) -> dict[str, list[float] | list[bool]]:
    """Weighted Holm by definition: the largest r x (sum of the weights not below r) over all r = p / weight up to its.

    Decisions walk down: each hypothesis in the order of p / weight has to meet level x weight / (sum of those left).
    """
    ratio = [0.0 if value == 0 else value / w if w > 0 else float("inf") for value, w in zip(p, weights)]  # noqa: B905
    together = dict.fromkeys(ratio, 0.0)
    for r, weight in zip(ratio, weights):  # noqa: B905 -- read by Python 3.8 too
        together[r] += weight
    not_below, adjusted = 0.0, {}
    for r in sorted(together, reverse=True):
        not_below += together[r]
        adjusted[r] = 1.0 if r == float("inf") else r * not_below
    largest = 0.0
    for r in sorted(together):
        largest = max(largest, adjusted[r])
        adjusted[r] = min(1.0, largest)

    walk = sorted(range(len(p)), key=lambda i: ratio[i])
    left = [0.0]
    for i in reversed(walk):
        left.append(left[-1] + weights[i])
    rejected = [False] * len(p)
    for i in walk:
        if p[i] > level * weights[i] / (left.pop() or 1.0) * (1 + 1e-12):
            break
        rejected[i] = True
    return {"adjusted": [adjusted[r] for r in ratio], "rejected": rejected}
