"""Hommel's procedure: closed testing with Simes' test."""

import numpy as np

from beforehand.multiplicity.contract import (
    FWER,
    IMPLIED_BY_FWER,
    WHOLE,
    Ascending,
    Steps,
    Words,
    largest_so_far,
    procedure,
)
from beforehand.multiplicity.simes import VALID_UNDER, largest_sets
from beforehand.spelling import exact


@procedure(
    title="Hommel, closed testing with Simes' test",
    controls=FWER,
    strong=True,
    valid_under=VALID_UNDER,
    intervals=None,
    no_intervals_because=(
        "No simultaneous intervals that match Hommel's decisions are in general use, so only the unadjusted interval "
        "is printed."
    ),
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    reference="Hommel (1988), Biometrika 75:383-386",
)
def hommel(p: Ascending) -> Steps:
    """Adjust p-values by Hommel's procedure: closed testing with Simes' test.

    Keeps the family-wise error rate strongly where Simes' inequality holds for the true nulls: under independence and
    the usual forms of positive dependence (Sarkar 1998), not under negative correlation. Rejects whatever Hochberg's
    procedure does.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.

    Returns
    -------
    Steps
        Per rank either factor j and product j x p, or, without a factor, the Simes p of the j largest p-values: the
        smaller of the two, where j is the smallest number for which the Simes p of the j + 1 largest is at most j x p.
        At a level every rank has the threshold level / h, with h the size of the largest set that Simes' test doesn't
        reject.

    References
    ----------
    Hommel, G. (1988). A stagewise rejective multiple test procedure based on a modified Bonferroni test. Biometrika
    75:383-386.
    Meijer, R. J., Krebs, T. J. P. & Goeman, J. J. (2019). Hommel's procedure in linear time. Biometrical Journal
    61:73-82.
    Sarkar, S. K. (1998). Some probability inequalities for ordered MTP2 random variables: a proof of the Simes
    conjecture. Annals of Statistics 26:494-504.
    """
    m = p.size
    sets = largest_sets(p)
    # adjusted p = min over j of max(Simes p of the j + 1 largest, j p); Meijer, Krebs & Goeman (2019)
    turns = np.append(sets.p[1:], 0.0)[:m] / np.arange(1, m + 1)
    size = 1 + m - np.searchsorted(turns[::-1], p, side="right")
    own, of_set = size * p, sets.p[size - 1]
    factor = np.where(own <= of_set, size.astype(np.float64), np.nan)
    product = np.minimum(own, of_set)

    def simes(rank: int) -> str:
        j, taken = size[rank], sets.rank[size[rank] - 1]
        return f"Simes p of the {j} largest: {j} × {exact(p[taken])} / {taken + 1 - (m - j)}"

    return Steps.of(
        factor=factor,
        product=product,
        taken_from=largest_so_far(product),
        arithmetic=Words(factor, simes),
        critical=lambda level: np.full(m, level / max(sets.unrejected(level), 1)),
    )


def replay(p: list[float], level: float) -> dict[str, list[float] | list[bool]]:
    """Hommel by search: the rank that gives the Simes p of the i largest values never falls as i falls.

    So the middle set narrows the search for all larger and all smaller ones. Decisions by Hommel's own definition: h is
    the largest i for which each p_(m - i + j) is above j x level / i, and whatever meets level / h is rejected.
    """
    m, ascending = len(p), sorted(p)
    simes = [0.0] * (m + 2)
    to_search = [(1, m, 1, m)]
    while to_search:
        fewest, most, first, last = to_search.pop()
        if fewest > most:
            continue
        i = (fewest + most) // 2
        best, rank = min((i / (k - m + i) * ascending[k - 1], k) for k in range(max(first, m - i + 1), last + 1))
        simes[i] = best
        to_search += [(fewest, i - 1, rank, last), (i + 1, most, first, rank)]

    adjusted, j = {}, m
    for value in ascending:
        while j > 1 and simes[j] <= (j - 1) * value:
            j -= 1
        adjusted[value] = min(j * value, simes[j])

    def not_rejected(i: int) -> bool:
        return all(ascending[m - i + j] > (j + 1) * level / i * (1 + 1e-12) for j in range(i))

    low, high = 0, m  # the sets that aren't rejected are those up to a size
    while low < high:
        middle = (low + high + 1) // 2
        low, high = (middle, high) if not_rejected(middle) else (low, middle - 1)
    threshold = level / max(low, 1)
    return {"adjusted": [adjusted[value] for value in p], "rejected": [value <= threshold * (1 + 1e-12) for value in p]}
