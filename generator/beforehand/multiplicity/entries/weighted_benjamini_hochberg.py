"""Benjamini and Hochberg's step-up procedure with weights."""

import numpy as np

from beforehand.multiplicity.contract import (
    FDR,
    WHOLE,
    Ascending,
    Steps,
    Vector,
    Words,
    procedure,
    smallest_from_here,
)
from beforehand.multiplicity.shares import NO_SHARE, per_share, product_of, shares_of


@procedure(
    title="Weighted Benjamini-Hochberg step-up",
    controls=FDR,
    strong=True,
    valid_under="independence, or positive regression dependence on the true nulls; weights fixed before the data",
    intervals=None,
    no_intervals_because=(
        "A false discovery rate has no simultaneous intervals; the unadjusted interval is printed, and it is not "
        "adjusted for having been selected."
    ),
    replays=WHOLE,
    reference="Genovese, Roeder & Wasserman (2006), Biometrika 93:509-524",
)
def weighted_benjamini_hochberg(p: Ascending, *, weights: Vector) -> Steps:
    """Adjust p-values by Benjamini and Hochberg's step-up procedure on p / weight, where the weights have mean 1.

    Keeps the false discovery rate under independence and under positive regression dependence, for weights that were
    written down before the data. Only the ratios of the weights matter; with equal ones this is Benjamini and
    Hochberg's procedure. An adjusted p can be smaller than p where the weight is above the average. A hypothesis of
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
        Per rank: factor 1 / (share x its place in the order of p / weight), product, adjusted p (running minimum from
        the last place, capped at 1) and the rank it was taken from.

    Raises
    ------
    ValueError
        When a weight is negative or missing, or all are 0.

    References
    ----------
    Genovese, C. R., Roeder, K. & Wasserman, L. (2006). False discovery control with p-value weighting. Biometrika
    93:509-524.
    """
    share = shares_of(weights)
    ratio = per_share(p, share)
    order = np.argsort(ratio, kind="stable")
    place, taken_from = np.empty(p.size), np.empty(p.size, dtype=np.intp)
    place[order] = np.arange(1.0, p.size + 1)
    factor = np.divide(1.0, share * place, out=np.full(p.size, np.nan), where=share > 0)
    product = product_of(p, factor)
    taken_from[order] = order[smallest_from_here(np.where(np.isinf(ratio), np.inf, product)[order])]
    return Steps.of(
        factor=factor,
        product=product,
        taken_from=taken_from,
        arithmetic=Words(factor, lambda _: NO_SHARE),
        critical=lambda level: level * share * place,
    )


def replay(
    p: list[float],
    level: float,
    weights: list[float],
) -> dict[str, list[float] | list[bool]]:
    """Weighted Benjamini-Hochberg by definition on r = p / weight: the smallest W x s / (number up to s).

    W is the sum of the weights, and s is each r from its own on. Decisions walk up: the largest r that meets
    level x place / W is rejected with all that are smaller.
    """
    whole = sum(weights)
    ratio = [0.0 if value == 0 else value / w if w > 0 else float("inf") for value, w in zip(p, weights)]  # noqa: B905
    adjusted = {float("inf"): 1.0}
    not_above, smallest = len(p), 1.0
    equal = dict.fromkeys(ratio, 0)
    for r in ratio:
        equal[r] += 1
    for r in sorted(equal, reverse=True):
        smallest = min(smallest, whole * r / not_above)
        adjusted[r] = smallest
        not_above -= equal[r]

    ascending = sorted(ratio)
    met = [ascending[i] for i in range(len(p)) if ascending[i] <= level * (i + 1) / whole * (1 + 1e-12)]
    largest = met[-1] if met else -1.0
    return {"adjusted": [adjusted[r] for r in ratio], "rejected": [r <= largest for r in ratio]}
