"""Benjamini and Hochberg's step-up procedure for the false discovery rate."""

import numpy as np

from beforehand.multiplicity.contract import FDR, WHOLE, Ascending, Steps, procedure, running_minimum


@procedure(
    title="Benjamini-Hochberg step-up",
    controls=FDR,
    strong=True,
    valid_under="independence, or positive regression dependence on the true nulls",
    intervals=None,
    no_intervals_because=(
        "A false discovery rate has no simultaneous intervals; the unadjusted interval is printed, and it is not "
        "adjusted for having been selected."
    ),
    replays=WHOLE,
    reference="Benjamini & Hochberg (1995), Journal of the Royal Statistical Society B 57:289-300",
)
def benjamini_hochberg(p: Ascending) -> Steps:
    """Adjust p-values by Benjamini and Hochberg's step-up procedure.

    Keeps the false discovery rate at (true nulls / m) x level under independence, and at most there under positive
    regression dependence on the true nulls (Benjamini & Yekutieli 2001). It doesn't keep the family-wise error rate,
    and promises nothing about a part of the rejections picked afterwards.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.

    Returns
    -------
    Steps
        Per rank: factor m / i, product, adjusted p (running minimum from the largest rank, capped at 1) and the rank
        it was taken from.

    References
    ----------
    Benjamini, Y. & Hochberg, Y. (1995). Controlling the false discovery rate: a practical and powerful approach to
    multiple testing. Journal of the Royal Statistical Society B 57:289-300.
    Benjamini, Y. & Yekutieli, D. (2001). The control of the false discovery rate in multiple testing under
    dependency. Annals of Statistics 29:1165-1188.
    """
    return running_minimum(p, factor=p.size / np.arange(1.0, p.size + 1))


def replay(p: list[float], level: float) -> dict[str, list[float] | list[bool]]:
    """Benjamini-Hochberg by definition: the smallest m x q / (number of values up to q) over all values q from p on.

    Decisions walk up the staircase: the largest p that meets level x rank / m is rejected with all that are smaller.
    """
    adjusted = {}
    not_above, smallest = len(p), 1.0
    equal = dict.fromkeys(p, 0)
    for value in p:
        equal[value] += 1
    for value in sorted(equal, reverse=True):
        smallest = min(smallest, len(p) * value / not_above)
        adjusted[value] = smallest
        not_above -= equal[value]

    ascending = sorted(p)
    met = [ascending[i] for i in range(len(p)) if ascending[i] <= level * (i + 1) / len(p) * (1 + 1e-12)]
    largest = met[-1] if met else -1.0
    return {"adjusted": [adjusted[value] for value in p], "rejected": [value <= largest for value in p]}
