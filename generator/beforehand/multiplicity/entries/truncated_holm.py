"""Holm's step-down procedure, truncated: between Bonferroni and Holm, so that a rejection can pass on a part."""

from typing import Any

import numpy as np

from beforehand.multiplicity.contract import FWER, IMPLIED_BY_FWER, WHOLE, Ascending, Steps, procedure, running_maximum


@procedure(
    title="Truncated Holm step-down",
    controls=FWER,
    strong=True,
    valid_under="any dependence",
    intervals=None,
    no_intervals_because=(
        "No simultaneous intervals that match the decisions of a truncated procedure are in general use, so only the "
        "unadjusted interval is printed."
    ),
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    reference="Dmitrienko, Tamhane & Wiens (2008), Biometrical Journal 50:667-677",
)
def truncated_holm(p: Ascending, *, truncation: float) -> Steps:
    """Adjust p-values by Holm's step-down procedure, truncated.

    The threshold of rank i is a mixture of Holm's and Bonferroni's: (g / (m - i + 1) + (1 - g) / m) x level, with the
    truncation g. At g = 0 it is Bonferroni's; at 1 it would be Holm's, which leaves nothing to pass on while one
    hypothesis is not rejected. Keeps the family-wise error rate strongly under any dependence, and of the level a it
    needs at most (g + (1 - g) A/m) a for A hypotheses that it has not rejected: the rest can be passed on.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.
    truncation : float
        g, from 0 to below 1.

    Returns
    -------
    Steps
        Per rank: factor 1 / (g / (m - i + 1) + (1 - g) / m), product, adjusted p (running maximum, capped at 1) and
        the rank it was taken from.

    References
    ----------
    Dmitrienko, A., Tamhane, A. C. & Wiens, B. L. (2008). General multistage gatekeeping procedures. Biometrical
    Journal 50:667-677.
    """
    left = np.arange(p.size, 0, -1, dtype=np.float64)
    return running_maximum(p, factor=1 / (truncation / left + (1 - truncation) / max(p.size, 1)))


def replay(p: list[float], level: float, truncation: float) -> dict[str, list[Any]]:
    """Adjust by definition: the largest q / (share of the level for all values from q on), over all q up to p.

    Decisions walk down the staircase: each p in ascending order has to meet the share of those not yet rejected.
    """
    m = len(p)

    def share(left: int) -> float:
        return (truncation * m + (1 - truncation) * left) / (left * m)

    adjusted = {}
    not_below, largest = m, 0.0
    equal = dict.fromkeys(p, 0)
    for value in p:
        equal[value] += 1
    for value in sorted(equal):
        largest = max(largest, value / share(not_below))
        adjusted[value] = min(1.0, largest)
        not_below -= equal[value]

    met = set()
    for step, value in enumerate(sorted(p)):
        if value > level * share(m - step) * (1 + 1e-12):
            break
        met.add(value)
    return {"adjusted": [adjusted[value] for value in p], "rejected": [value in met for value in p]}
