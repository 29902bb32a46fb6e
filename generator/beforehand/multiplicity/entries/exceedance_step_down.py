"""Lehmann and Romano's step-down procedure for the share of false rejections: seldom more than so many per cent."""

from fractions import Fraction
from typing import Literal

import numpy as np

from beforehand.multiplicity.contract import WHOLE, Ascending, Steps, procedure, running_maximum


@procedure(
    title="Lehmann-Romano step-down for the share of false rejections",
    controls="false_discovery_exceedance",
    strong=True,
    valid_under="any dependence; with the option dependence: independence, independence",
    intervals=None,
    no_intervals_because=(
        "No simultaneous intervals that match these decisions are in general use, so only the unadjusted interval is "
        "printed."
    ),
    replays=WHOLE,
    reference="Lehmann & Romano (2005), Annals of Statistics 33:1138-1154",
)
def exceedance_step_down(
    p: Ascending, *, false_share: float, dependence: Literal["any", "independence"] = "any"
) -> Steps:
    """Adjust p-values by the step-down procedure for the probability that too large a share of rejections is false.

    Keeps the probability that more than the share g of the rejections are false strongly at the level: under any
    dependence with the thresholds divided by 1 + 1/2 + ... + 1/(floor(g m) + 1), and without that factor under
    independence or somewhat milder conditions (Lehmann & Romano 2005). Other than a false discovery rate this is a
    promise about the list at hand, not about the average list. With g = 0 it is Holm's procedure.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.
    false_share : float
        The share g of false rejections that may seldom be exceeded, from 0 to below 1.
    dependence : {"any", "independence"}
        Under which dependence the promise is to hold.

    Returns
    -------
    Steps
        Per rank, with j = floor(g i) + 1: factor (m + j - i) / j, times the factor for any dependence, product,
        adjusted p (running maximum, capped at 1) and the rank it was taken from.

    Raises
    ------
    ValueError
        When ``false_share`` isn't from 0 to below 1.

    References
    ----------
    Lehmann, E. L. & Romano, J. P. (2005). Generalizations of the familywise error rate. Annals of Statistics
    33:1138-1154.
    """
    if not 0 <= false_share < 1:
        raise ValueError(f"a share of false rejections is from 0 to below 1; found {false_share}")
    # as a fraction, so that 0.29 of 100 is 29: the product of the two doubles is below
    share = Fraction(false_share).limit_denominator(10**9)
    ranks = np.arange(1, p.size + 1)
    allowed = share.numerator * ranks // share.denominator + 1
    factor = (p.size + allowed - ranks) / allowed
    if dependence == "any" and p.size:
        factor *= np.sum(1 / np.arange(1.0, allowed[-1] + 1))
    return running_maximum(p, factor=factor)


def replay(
    p: list[float], level: float, false_share: float, dependence: str = "any"
) -> dict[str, list[float] | list[bool]]:
    """Lehmann-Romano by its thresholds: the largest p / (threshold at level 1) so far; decisions walk down them."""
    m = len(p)
    allowed = [int(false_share * i * (1 + 1e-12)) + 1 for i in range(1, m + 1)]
    price = sum(1 / j for j in range(allowed[-1], 0, -1)) if m and dependence == "any" else 1.0
    adjusted: dict[float, float] = {}
    met, largest, still = set(), 0.0, True
    for i, value in enumerate(sorted(p)):
        threshold = allowed[i] / (m + allowed[i] - i - 1) / price
        largest = max(largest, value / threshold)
        still = still and value <= level * threshold * (1 + 1e-12)
        if still:
            met.add(value)
        adjusted.setdefault(value, largest)
    return {"adjusted": [min(1.0, adjusted[value]) for value in p], "rejected": [value in met for value in p]}
