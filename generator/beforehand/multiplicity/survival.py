"""How many hypotheses a family could have had before a claim is lost."""

from collections.abc import Callable
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from beforehand.multiplicity.contract import Ordered, Procedure, Vector
from beforehand.multiplicity.decision import is_rejected

LARGEST_TRIED = 1_000_000
"""Larger families are not tried, unless the family itself is larger."""


def largest_family(procedure: Procedure, p: ArrayLike | Ordered, index: int, *, level: float, **options: Any) -> int:
    """Give the largest number of hypotheses with which a claim survives when all additional ones have p = 1.

    Parameters
    ----------
    procedure : Procedure
        The family's own procedure; it is run on each family size that is tried.
    p : array_like, shape (m,), or Ordered
        Unadjusted p-values of the family, in any order.
    index : int
        Position of the claim in ``p``.
    level : float
        The level of the promise that covers the family.
    **options
        Options of the procedure.

    Returns
    -------
    int
        From m on where the claim is rejected; ``LARGEST_TRIED``, or m if that is larger, means "or more". 0 where the
        claim is not rejected at all, or the procedure is not one for which this is computed (``can_grow``).
    """
    ordered = Ordered.of(p)
    m = ordered.order.size
    if not can_grow(procedure):
        return 0
    rank = int(np.flatnonzero(ordered.order == range(m)[index])[0])
    grown = _grown(procedure, ordered.ascending, options)
    return _largest(grown, rank, kept=m, level=level) if is_rejected(float(grown(m)[rank]), level) else 0


def largest_families(
    procedure: Procedure, p: ArrayLike | Ordered, *, level: float, **options: Any
) -> NDArray[np.int64]:
    """Give ``largest_family`` of every member of a family at once.

    Parameters
    ----------
    procedure, p, level, **options
        As for ``largest_family``.

    Returns
    -------
    ndarray of int, shape (m,)
        In the order of ``p``; 0 where a member is not rejected, and for every member where this is not computed.
    """
    ordered = Ordered.of(p)
    m = ordered.order.size
    by_rank = np.zeros(m, dtype=np.int64)
    if not can_grow(procedure):
        return by_rank
    grown = _grown(procedure, ordered.ascending, options)
    kept = m
    for rank in reversed(range(np.count_nonzero(is_rejected(grown(m), level)))):
        by_rank[rank] = kept = _largest(grown, rank, kept=kept, level=level)  # a smaller p survives at least as long
        if kept >= LARGEST_TRIED:
            by_rank[:rank] = kept
            break
    return ordered.unsorted(by_rank)


def can_grow(procedure: Procedure) -> bool:
    """Whether it is known what further hypotheses with p = 1 would do to a claim.

    The search rests on one fact: they never help it. And a procedure that asks for more than p would need what the plan
    says of hypotheses that it doesn't have.
    """
    return procedure.monotone and not procedure.needs


def _grown(procedure: Procedure, ascending: Vector, options: dict[str, Any]) -> Callable[[int], Vector]:
    """Give the function from a family size to the adjusted p of the hypotheses that are really there, by rank."""
    m = ascending.size

    @lru_cache(maxsize=8)
    def grown(size: int) -> Vector:
        family = np.concatenate([ascending, np.ones(size - m)])  # ones come last: nothing to sort
        adjusted: Vector = procedure.adjust(family, **options).adjusted[:m].copy()
        return adjusted

    return grown


def _largest(grown: Callable[[int], Vector], rank: int, *, kept: int, level: float) -> int:
    """Search from a size that keeps the claim, by straight line and, where that fails, by halving."""
    lost = max(kept, LARGEST_TRIED) + 1
    if kept < lost - 1 and is_rejected(float(grown(lost - 1)[rank]), level):
        return lost - 1
    while lost - kept > 1:
        here = float(grown(kept)[rank])
        slope = float(grown(kept + 1)[rank]) - here
        guess = kept + int((level - here) / slope) if slope > 0 else kept
        for size in (kept + 1, guess, guess + 1, (kept + lost) // 2):
            if kept < size < lost:
                kept, lost = (size, lost) if is_rejected(float(grown(size)[rank]), level) else (kept, size)
    return kept
