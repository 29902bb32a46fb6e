"""Hochberg's step-up procedure."""

import numpy as np

from beforehand.multiplicity.contract import FWER, IMPLIED_BY_FWER, WHOLE, Ascending, Steps, procedure, running_minimum
from beforehand.multiplicity.simes import VALID_UNDER


@procedure(
    title="Hochberg step-up",
    controls=FWER,
    strong=True,
    valid_under=VALID_UNDER,
    intervals=None,
    no_intervals_because=(
        "No simultaneous intervals that match Hochberg's decisions are in general use, so only the unadjusted interval "
        "is printed."
    ),
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    reference="Hochberg (1988), Biometrika 75:800-802",
)
def hochberg(p: Ascending) -> Steps:
    """Adjust p-values by Hochberg's step-up procedure.

    Keeps the family-wise error rate strongly where Simes' inequality holds for the true nulls: under independence and
    the usual forms of positive dependence (Sarkar 1998), not under negative correlation. Has Holm's thresholds, and
    starts from the largest p, so it rejects whatever Holm's procedure does.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.

    Returns
    -------
    Steps
        Per rank: factor m - i + 1, product, adjusted p (running minimum from the largest rank) and the rank it was
        taken from.

    References
    ----------
    Hochberg, Y. (1988). A sharper Bonferroni procedure for multiple tests of significance. Biometrika 75:800-802.
    Sarkar, S. K. (1998). Some probability inequalities for ordered MTP2 random variables: a proof of the Simes
    conjecture. Annals of Statistics 26:494-504.
    """
    return running_minimum(p, factor=np.arange(p.size, 0, -1, dtype=np.float64))


def replay(p: list[float], level: float) -> dict[str, list[float] | list[bool]]:
    """Hochberg by definition: the smallest (1 + number of values above q) x q over all values q from p on.

    Decisions walk up the staircase: the largest p that meets level / (1 + number above it) is rejected with all that
    are smaller.
    """
    adjusted = {}
    above, smallest = 0, 1.0
    equal = dict.fromkeys(p, 0)
    for value in p:
        equal[value] += 1
    for value in sorted(equal, reverse=True):
        smallest = min(smallest, (1 + above) * value)
        adjusted[value] = smallest
        above += equal[value]

    met = -1.0
    for step, value in enumerate(sorted(p, reverse=True)):
        if value <= level / (1 + step) * (1 + 1e-12):
            met = value
            break
    return {"adjusted": [adjusted[value] for value in p], "rejected": [value <= met for value in p]}
