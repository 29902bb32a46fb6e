"""Fixed sequence: one hypothesis after the other, each at the full level, until the first that is not rejected."""

import numpy as np
from numpy.typing import NDArray

from beforehand.multiplicity.contract import (
    FWER,
    IMPLIED_BY_FWER,
    WHOLE,
    Ascending,
    Steps,
    largest_so_far,
    procedure,
)
from beforehand.multiplicity.shares import order_of


@procedure(
    title="Fixed sequence: in the written order, each at the full level, up to the first that is not rejected",
    controls=FWER,
    strong=True,
    valid_under="any dependence",
    intervals=None,
    no_intervals_because=(
        "Stepwise intervals exist for one-sided tests, and end at the null value for every hypothesis that the "
        "sequence has passed, so only the unadjusted interval is printed."
    ),
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    reference="Maurer, Hothorn & Lehmacher (1995), in: Vollmar (ed.), Biometrie in der chemisch-pharmazeutischen "
    "Industrie 6:3-18",
)
def fixed_sequence(p: Ascending, *, positions: NDArray[np.int64]) -> Steps:
    """Test hypotheses in the order in which they were written, each at the full level, until one is not rejected.

    Keeps the family-wise error rate strongly under any dependence: an error needs that the first true null of the
    order is rejected, and that one is tested at the level. Nothing behind the first hypothesis that is not rejected can
    be claimed, however small its p.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.
    positions : ndarray of int, shape (m,)
        The place of each in the written order; no two the same.

    Returns
    -------
    Steps
        Per rank: factor 1, product p, adjusted p (running maximum along the written order) and the rank it was taken
        from.

    Raises
    ------
    ValueError
        When two hypotheses have the same place.

    References
    ----------
    Maurer, W., Hothorn, L. A. & Lehmacher, W. (1995). Multiple comparisons in drug clinical trials and preclinical
    assays: a-priori ordered hypotheses. In: Vollmar, J. (ed.), Biometrie in der chemisch-pharmazeutischen Industrie
    6:3-18.
    """
    order = order_of(positions)
    taken_from = np.empty(p.size, dtype=np.intp)
    taken_from[order] = order[largest_so_far(p[order])]
    return Steps.of(factor=np.ones(p.size), product=p, taken_from=taken_from)


def replay(p: list[float], level: float, positions: list[int]) -> dict[str, list[float] | list[bool]]:
    """Walk along the written order: the largest p so far, and rejections up to the first p above the level."""
    adjusted, rejected = [0.0] * len(p), [False] * len(p)
    largest, still = 0.0, True
    for i in sorted(range(len(p)), key=lambda i: positions[i]):
        largest = max(largest, p[i])
        adjusted[i] = largest
        still = still and p[i] <= level * (1 + 1e-12)
        rejected[i] = still
    return {"adjusted": adjusted, "rejected": rejected}
