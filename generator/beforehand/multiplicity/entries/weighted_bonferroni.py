"""Weighted Bonferroni adjustment: every hypothesis gets its own share of the level."""

import numpy as np

from beforehand.multiplicity.contract import FWER, IMPLIED_BY_FWER, WHOLE, Ascending, Steps, Vector, Words, procedure
from beforehand.multiplicity.shares import NO_SHARE, product_of, shares_of


@procedure(
    title="Weighted Bonferroni",
    controls=FWER,
    strong=True,
    valid_under="any dependence",
    intervals=None,
    no_intervals_because=(
        "Intervals at confidence 1 − weight × level each would match the decisions; this version prints only the "
        "unadjusted interval."
    ),
    replays=WHOLE,
    implies=("per_family_error_rate", *IMPLIED_BY_FWER),
    reference="Rosenthal & Rubin (1983), Psychological Bulletin 94:540-541",
)
def weighted_bonferroni(p: Ascending, *, weights: Vector) -> Steps:
    """Adjust p-values by unequal shares of the level: p divided by the weight, where the weights sum to 1.

    Keeps the family-wise error rate strongly, and the expected number of errors, under any dependence, whichever
    weights were written down before the data (Boole's inequality). Weights are divided by their sum; with equal ones
    this is Bonferroni's adjustment. A hypothesis of weight 0 is rejected only if its p is 0.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.
    weights : ndarray, shape (m,)
        The weight of each, from 0 on.

    Returns
    -------
    Steps
        Per rank: factor 1 / share, product, adjusted p (the product, capped at 1).

    Raises
    ------
    ValueError
        When a weight is negative or missing, or all are 0.

    References
    ----------
    Rosenthal, R. & Rubin, D. B. (1983). Ensemble-adjusted p values. Psychological Bulletin 94:540-541.
    """
    share = shares_of(weights)
    factor = np.divide(1.0, share, out=np.full(p.size, np.nan), where=share > 0)
    return Steps.of(
        factor=factor,
        product=product_of(p, factor),
        taken_from=np.arange(p.size),
        arithmetic=Words(factor, lambda _: NO_SHARE),
        critical=lambda level: level * share,
    )


def replay(
    p: list[float],
    level: float,
    weights: list[float],
) -> dict[str, list[float] | list[bool]]:
    """Weighted Bonferroni by shares of the level: p meets level x weight / (sum of the weights)."""
    whole = sum(weights)
    adjusted, rejected = [], []
    for value, weight in zip(p, weights):  # noqa: B905 -- read by Python 3.8 too
        scaled = value * whole
        adjusted.append(min(1.0, scaled / weight) if weight > 0 else float(value > 0))
        rejected.append(value <= level * weight / whole * (1 + 1e-12))
    return {"adjusted": adjusted, "rejected": rejected}
