"""Fallback: a written order in which every hypothesis has a share of its own, and inherits from the one before it."""

import heapq
import math

import numpy as np
from numpy.typing import NDArray

from beforehand.multiplicity.contract import (
    FWER,
    IMPLIED_BY_FWER,
    WHOLE,
    Ascending,
    Ranks,
    Steps,
    Vector,
    Words,
    procedure,
)
from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.shares import NO_SHARE, order_of, product_of, shares_of


@procedure(
    title="Fallback: in the written order, each with its own share and what a rejected one before it hands on",
    controls=FWER,
    strong=True,
    valid_under="any dependence",
    intervals=None,
    no_intervals_because=(
        "Simultaneous intervals that match these decisions end at the null value for most rejected hypotheses, so only "
        "the unadjusted interval is printed."
    ),
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    reference="Wiens (2003), Pharmaceutical Statistics 2:211-215",
)
def fallback(p: Ascending, *, weights: Vector, positions: NDArray[np.int64]) -> Steps:
    """Test hypotheses in the written order, each at its own share of the level and what is handed on to it.

    A rejected hypothesis hands its whole threshold on to the next one; one that is not rejected hands on nothing, and
    the next one falls back on its own share. Keeps the family-wise error rate strongly under any dependence (Wiens &
    Dmitrienko 2005). Only the ratios of the weights matter; all of them on the first hypothesis is the fixed sequence.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.
    weights : ndarray, shape (m,)
        The weight of each, from 0 on.
    positions : ndarray of int, shape (m,)
        The place of each in the written order; no two the same.

    Returns
    -------
    Steps
        Per rank: factor 1 / (its share and those of the hypotheses that hand on to it), product, adjusted p and the
        rank it was taken from: its own, or that of the last hypothesis to be rejected among those that hand on to it.

    Raises
    ------
    ValueError
        When a weight is negative or missing, all are 0, or two hypotheses have the same place.

    References
    ----------
    Bretz, F., Maurer, W., Brannath, W. & Posch, M. (2009). A graphical approach to sequentially rejective multiple test
    procedures. Statistics in Medicine 28:586-604.
    Wiens, B. L. (2003). A fixed sequence Bonferroni procedure for testing multiple endpoints. Pharmaceutical
    Statistics 2:211-215.
    Wiens, B. L. & Dmitrienko, A. (2005). The fallback procedure for evaluating a single family of hypotheses. Journal
    of Biopharmaceutical Statistics 15:929-942.
    """
    order, share = order_of(positions), shares_of(weights)
    fall = _Fall(p.tolist(), share.tolist(), order.tolist())
    fall.run()
    held = np.array(fall.held)
    factor = np.divide(1.0, held, out=np.full(p.size, np.nan), where=held > 0)
    product = product_of(p, factor)
    taken_from = np.array(fall.decided_by, dtype=np.intp)
    adjusted = np.minimum(product[taken_from], 1.0)
    return Steps(
        factor=factor,
        product=product,
        adjusted=adjusted,
        taken_from=taken_from,
        arithmetic=Words(factor, lambda _: NO_SHARE),
        critical=lambda level: level * _handed_on(order, share, is_rejected(adjusted, level)),
    )


class _Fall:
    """The order in which hypotheses fall as the level rises: a graph in which each hands its share on to the next.

    The smallest p / share falls first (Bretz, Maurer, Brannath & Posch 2009); what falls hands its share on to the next
    one that still stands, which may let that one fall at once.
    """

    def __init__(self, p: list[float], share: list[float], order: list[int]) -> None:
        self.p, self.held, self.decided_by = p, share, list(range(len(p)))
        self.next = dict(zip(order, [*order[1:], None], strict=True)) if order else {}
        self.fallen: set[int] = set()

    def run(self) -> None:
        """Let one after the other fall."""
        standing = [(self.falls_at(i), i) for i in self.next]
        heapq.heapify(standing)
        highest, last = 0.0, -1
        while standing:
            falls_at, i = heapq.heappop(standing)
            if i in self.fallen or falls_at != self.falls_at(i):
                continue  # it has inherited since
            self.fallen.add(i)
            if last < 0 or falls_at > highest:
                highest, last = falls_at, i
            self.decided_by[i] = last
            heir = self.heir(i)
            if heir is not None:
                self.held[heir] += self.held[i]
                heapq.heappush(standing, (self.falls_at(heir), heir))

    def falls_at(self, i: int) -> float:
        """Give the level at which it falls with what it holds."""
        p, held = self.p[i], self.held[i]
        return 0.0 if p == 0 else p / held if held > 0 else math.inf

    def heir(self, i: int) -> int | None:
        """Give the next one that stands, and remember it, so that no way is walked twice."""
        heir = self.next[i]
        while heir is not None and heir in self.fallen:
            heir = self.next[heir]
        self.next[i] = heir
        return heir


def _handed_on(order: Ranks, share: Vector, rejected: NDArray[np.bool_]) -> Vector:
    """Give the share that each hypothesis holds at its turn, its own and what is handed on to it."""
    held, handed_on = np.empty(share.size), 0.0
    for i in order:
        held[i] = share[i] + handed_on
        handed_on = held[i] if rejected[i] else 0.0
    return held


def replay(
    p: list[float], level: float, weights: list[float], positions: list[int]
) -> dict[str, list[float] | list[bool]]:
    """Fallback along the written order: each p over its own share and those of the runs before it that fall earlier.

    Decisions walk along the same order with the level at hand.
    """
    adjusted, rejected = [1.0] * len(p), [False] * len(p)
    walk = sorted(range(len(p)), key=lambda i: positions[i])
    whole, handed_on = sum(weights), 0.0
    runs: list[tuple[float, float]] = []  # neighbours that fall together: at which level, and what they hold

    def falls_at(value: float, share: float) -> float:
        return 0.0 if value == 0 else value / share if share > 0 else float("inf")

    for i in walk:
        share = weights[i] / whole
        at = falls_at(p[i], share)
        while runs and runs[-1][0] < at:
            before, held = runs.pop()
            share += held
            at = max(before, falls_at(p[i], share))
        runs.append((at, share))
        adjusted[i] = min(1.0, at)

        mine = level * weights[i] / whole + handed_on
        rejected[i] = p[i] <= mine * (1 + 1e-12)
        handed_on = mine if rejected[i] else 0.0
    return {"adjusted": adjusted, "rejected": rejected}
