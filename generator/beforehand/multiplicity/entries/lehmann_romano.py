"""Lehmann and Romano's step-down procedure for the probability of k or more false rejections."""

import numpy as np

from beforehand.multiplicity.contract import WHOLE, Ascending, Steps, procedure, running_maximum


@procedure(
    title="Lehmann-Romano step-down for k or more false rejections",
    controls="k_familywise_error_rate",
    strong=True,
    valid_under="any dependence",
    intervals=None,
    no_intervals_because=(
        "No simultaneous intervals that match these decisions are in general use, so only the unadjusted interval is "
        "printed."
    ),
    replays=WHOLE,
    reference="Lehmann & Romano (2005), Annals of Statistics 33:1138-1154",
)
def lehmann_romano(p: Ascending, *, false_rejections: int) -> Steps:
    """Adjust p-values by the step-down procedure that allows fewer than k false rejections.

    Keeps the probability of k or more false rejections strongly at the level, under any dependence (Lehmann & Romano
    2005). With k = 1 it is Holm's procedure. The promise says nothing about a single rejection: up to k - 1 of them may
    be false.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.
    false_rejections : int
        The number k of false rejections from which on it is an error, at least 1.

    Returns
    -------
    Steps
        Per rank: factor (m + k - max(i, k)) / k, at least 1, product, adjusted p (running maximum, capped at 1) and the
        rank it was taken from.

    Raises
    ------
    ValueError
        When ``false_rejections`` is below 1.

    References
    ----------
    Lehmann, E. L. & Romano, J. P. (2005). Generalizations of the familywise error rate. Annals of Statistics
    33:1138-1154.
    """
    k = false_rejections
    if k < 1:
        raise ValueError(f"the number of false rejections that counts as an error is at least 1; found {k}")
    left = np.maximum(p.size - np.maximum(np.arange(1.0, p.size + 1), k), 0.0)
    return running_maximum(p, factor=(left + k) / k)


def replay(p: list[float], level: float, false_rejections: int) -> dict[str, list[float] | list[bool]]:
    """Lehmann-Romano by its thresholds, k level / m up to rank k and k level / (m + k - i) from there on.

    The adjusted p is the largest p / (threshold at level 1) so far. Decisions walk down the thresholds.
    """
    k, m = false_rejections, len(p)
    share = [min(1.0, k / m) if i <= k else k / (m + k - i) for i in range(1, m + 1)]
    adjusted: dict[float, float] = {}
    met, largest, still = set(), 0.0, True
    for value, part in zip(sorted(p), share):  # noqa: B905 -- read by Python 3.8 too
        largest = max(largest, value / part)
        still = still and value <= level * part * (1 + 1e-12)
        if still:
            met.add(value)
        adjusted.setdefault(value, largest)
    return {"adjusted": [min(1.0, adjusted[value]) for value in p], "rejected": [value in met for value in p]}
