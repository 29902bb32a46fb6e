"""How many hypotheses a family of comparisons could have had before a claim is lost: further groups without effect."""

import math
from typing import Any

import numpy as np
from numpy.typing import NDArray

from beforehand.multiplicity.contract import PROCEDURES, Procedure
from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.survival import LARGEST_TRIED

Counts = NDArray[np.int64]


def largest_with_further_groups(procedure: Procedure, *, level: float, **given: Any) -> Counts:
    """Give the largest number of hypotheses with which each claim survives when further groups without effect join in.

    The further groups are compared like the others: with the control, or each with every other one. Their size is that
    of the claim's own group, and the degrees of freedom stay as they are.

    Parameters
    ----------
    procedure : Procedure
        One that judges comparisons of groups; its file has ``tails_with(further, members, **ingredients)``.
    level : float
        The level at which the family is tested.
    **given
        The ingredients of the procedure.

    Returns
    -------
    ndarray of int, shape (m,)
        In the order of the ingredients; ``LARGEST_TRIED`` means "or more", 0 that the claim is not rejected at all.
    """
    m = len(given["statistics"])
    most = _most(procedure, m, given)
    kept, lost = np.zeros(m, dtype=np.int64), np.full(m, most + 1)
    rejected = _rejected(procedure, 0, np.arange(m), level, given)
    lost[~rejected] = 0
    members = np.flatnonzero(rejected)
    kept[members[_rejected(procedure, most, members, level, given)]] = most
    while (open_ones := np.flatnonzero(lost - kept > 1)).size:
        # doubling keeps to small families as long as they decide; then halving
        tried = np.minimum(2 * kept[open_ones] + 1, (kept[open_ones] + lost[open_ones]) // 2)
        for further in np.unique(tried):
            members = open_ones[tried == further]
            stands = _rejected(procedure, int(further), members, level, given)
            kept[members[stands]] = lost[members[~stands]] = further
    sizes = np.array([_hypotheses(procedure, m, int(further), given) for further in kept], dtype=np.int64)
    sizes[kept == most] = LARGEST_TRIED
    return np.where(rejected, sizes, 0)


def _rejected(
    procedure: Procedure, further: int, members: Counts, level: float, given: dict[str, Any]
) -> NDArray[np.bool_]:
    tails = PROCEDURES.module(procedure.name).tails_with(further, members, **given)
    return np.asarray(is_rejected(tails, level))


def _hypotheses(procedure: Procedure, m: int, further: int, given: dict[str, Any]) -> int:
    """Count the hypotheses of a family with further groups."""
    if procedure.compares == "control" or not further:
        return m + further
    groups = int(given["groups"]) + further
    return groups * (groups - 1) // 2


def _most(procedure: Procedure, m: int, given: dict[str, Any]) -> int:
    """Give the number of further groups at which the search ends."""
    if procedure.compares == "control":
        return max(0, LARGEST_TRIED - m)
    return max(0, math.isqrt(2 * LARGEST_TRIED) - int(given["groups"]))
