"""Hochberg's step-up procedure, truncated: between Bonferroni and Hochberg, so that a rejection can pass on a part."""

from typing import Any

import numpy as np

from beforehand.multiplicity.contract import FWER, IMPLIED_BY_FWER, WHOLE, Ascending, Steps, procedure, running_minimum


@procedure(
    title="Truncated Hochberg step-up",
    controls=FWER,
    strong=True,
    valid_under="independence, or positive dependence under which Simes' inequality holds for the true nulls",
    intervals=None,
    no_intervals_because=(
        "No simultaneous intervals that match the decisions of a truncated procedure are in general use, so only the "
        "unadjusted interval is printed."
    ),
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    reference="Dmitrienko, Tamhane & Wiens (2008), Biometrical Journal 50:667-677",
)
def truncated_hochberg(p: Ascending, *, truncation: float) -> Steps:
    """Adjust p-values by Hochberg's step-up procedure, truncated.

    The threshold of rank i is a mixture of Hochberg's and Bonferroni's: (g / (m - i + 1) + (1 - g) / m) x level, with
    the truncation g; the largest p that meets its threshold is rejected with all that are smaller. At g = 0 it is
    Bonferroni's. Keeps the family-wise error rate strongly where Simes' inequality holds for the true nulls, and of the
    level a it needs at most (g + (1 - g) A/m) a for A hypotheses that it has not rejected: the rest can be passed on.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.
    truncation : float
        g, from 0 to below 1.

    Returns
    -------
    Steps
        Per rank: factor 1 / (g / (m - i + 1) + (1 - g) / m), product, adjusted p (running minimum from the largest
        rank, capped at 1) and the rank it was taken from.

    References
    ----------
    Dmitrienko, A., Tamhane, A. C. & Wiens, B. L. (2008). General multistage gatekeeping procedures. Biometrical
    Journal 50:667-677.
    """
    left = np.arange(p.size, 0, -1, dtype=np.float64)
    return running_minimum(p, factor=1 / (truncation / left + (1 - truncation) / max(p.size, 1)))


def replay(p: list[float], level: float, truncation: float) -> dict[str, list[Any]]:
    """Adjust by definition: the smallest q / (share of the level at the last rank of q), over all q from p on.

    Decisions walk down from the largest p: the first that meets its threshold is rejected with all that are smaller.
    """
    m = len(p)

    def share(left: int) -> float:
        return (truncation * m + (1 - truncation) * left) / (left * m)

    adjusted = {}
    above, smallest = 0, 1.0
    equal = dict.fromkeys(p, 0)
    for value in p:
        equal[value] += 1
    for value in sorted(equal, reverse=True):
        smallest = min(smallest, value / share(above + 1))
        adjusted[value] = smallest
        above += equal[value]

    descending = sorted(p, reverse=True)
    met = [value for k, value in enumerate(descending, start=1) if value <= level * share(k) * (1 + 1e-12)]
    largest = met[0] if met else -1.0
    return {"adjusted": [adjusted[value] for value in p], "rejected": [value <= largest for value in p]}
