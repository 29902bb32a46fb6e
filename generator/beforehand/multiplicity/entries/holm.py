"""Holm's step-down procedure."""

import numpy as np

from beforehand.multiplicity.contract import FWER, IMPLIED_BY_FWER, WHOLE, Ascending, Steps, procedure, running_maximum


@procedure(
    title="Holm step-down",
    controls=FWER,
    strong=True,
    valid_under="any dependence",
    intervals=None,
    no_intervals_because=(
        "Simultaneous intervals that match Holm's decisions end at the null value for every rejected hypothesis unless "
        "all are rejected, so only the unadjusted interval is printed."
    ),
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    reference="Holm (1979), Scandinavian Journal of Statistics 6:65-70",
)
def holm(p: Ascending) -> Steps:
    """Adjust p-values by Holm's step-down procedure.

    Keeps the family-wise error rate strongly under any dependence, and rejects whatever Bonferroni's adjustment does.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.

    Returns
    -------
    Steps
        Per rank: factor m - i + 1, product, adjusted p (running maximum, capped at 1) and the rank it was taken from.

    References
    ----------
    Holm, S. (1979). A simple sequentially rejective multiple test procedure. Scandinavian Journal of Statistics
    6:65-70.
    """
    return running_maximum(p, factor=np.arange(p.size, 0, -1, dtype=np.float64))


def replay(p: list[float], level: float) -> dict[str, list[float] | list[bool]]:
    """Holm by definition: the largest (number of values not below q) x q over all values q up to p.

    Decisions walk down the staircase: each p in ascending order has to meet level / (number not yet rejected).
    """
    adjusted = {}
    not_below, largest = len(p), 0.0
    equal = dict.fromkeys(p, 0)
    for value in p:
        equal[value] += 1
    for value in sorted(equal):
        largest = max(largest, not_below * value)
        adjusted[value] = min(1.0, largest)
        not_below -= equal[value]

    met = set()
    for step, value in enumerate(sorted(p)):
        if value > level / (len(p) - step) * (1 + 1e-12):
            break
        met.add(value)
    return {"adjusted": [adjusted[value] for value in p], "rejected": [value in met for value in p]}
