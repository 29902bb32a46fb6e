"""A graph over which the level moves: weights, what a rejected node passes on, and the walk by which nodes fall.

Every node holds a share of the level; a node that is rejected leaves the graph and passes its share on along its
arrows, and the arrows that led through it are joined (Bretz et al. 2009, algorithm 1).
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from beforehand.multiplicity.contract import Vector, largest_so_far
from beforehand.multiplicity.decision import is_rejected

Truths = NDArray[np.bool_]
Numbers = NDArray[Any]
"""Floats, or ``Leading`` terms where a share is infinitesimal."""
ROUNDING = 1e-12
"""Shares given as floats that miss a sum of 1 by no more than this were meant to reach it."""


@dataclass(frozen=True, slots=True)
class Leading:
    """The leading term of a quantity above 0 that depends on an infinitesimal epsilon: coefficient x epsilon^order.

    Sums, products and quotients of such quantities have leading terms that follow from those of their parts, because
    nothing is ever subtracted: the limit for epsilon to 0 is exact.
    """

    coefficient: float
    order: int = 0

    def __bool__(self) -> bool:
        return self.coefficient > 0

    def __float__(self) -> float:
        return self.coefficient if self.order == 0 else 0.0

    def __add__(self, other: "Leading") -> "Leading":
        if not self or not other:
            return self or other
        if self.order != other.order:
            return min(self, other, key=lambda one: one.order)
        return Leading(self.coefficient + other.coefficient, self.order)

    def __mul__(self, other: "Leading") -> "Leading":
        return Leading(self.coefficient * other.coefficient, self.order + other.order)

    def __truediv__(self, other: "Leading") -> "Leading":
        return Leading(self.coefficient / other.coefficient, self.order - other.order)


@dataclass(frozen=True)
class Graph:
    """A state of the graph: what each of n nodes holds, and what it would pass on.

    Raises
    ------
    ValueError
        When the shares of the level, or those that one node passes on, are below 0 or sum to more than 1, or a node
        passes to itself.
    """

    weights: Numbers
    """Shape (n,): the share of the level that each node holds."""
    passes: Numbers
    """Shape (n, n + 1): the share that the node of the row passes to that of the column; last, what it passes to
    nobody. A row sums to 1."""

    @classmethod
    def of(cls, weights: ArrayLike, passes: ArrayLike) -> "Graph":
        """Take shares as floats.

        Parameters
        ----------
        weights : array_like, shape (n,)
            The shares of the level with which the nodes start.
        passes : array_like, shape (n, n)
            The share that the node of the row passes to that of the column.
        """
        start = np.array(weights, dtype=np.float64)
        shares = np.array(passes, dtype=np.float64).reshape(start.size, start.size)
        left = 1 - shares.sum(axis=1)
        left[np.abs(left) <= ROUNDING] = 0.0
        if np.any(left < 0) or np.any(shares < 0) or np.any(start < 0) or start.sum() > 1 + ROUNDING:
            raise ValueError("the shares that start, and those that one node passes on, are at least 0 and at most 1")
        if np.any(np.diagonal(shares)):
            raise ValueError("a node passes nothing to itself")
        return cls(start, np.column_stack([shares, left]))

    @classmethod
    def written(
        cls,
        nodes: Sequence[str],
        start: Mapping[str, float | str],
        passes: Iterable[Sequence[float | str]],
    ) -> "Graph":
        """Take shares as a spec writes them.

        Parameters
        ----------
        nodes : sequence of str
            All nodes, by id.
        start : mapping from id to number or text
            The shares of the level with which nodes start; a node that isn't named starts with none.
        passes : iterable of (from, to, share)
            A share is a number, a fraction as text, "epsilon" or "1 - epsilon".
        """
        at = {node: place for place, node in enumerate(nodes)}
        shares = {(at[str(sender)], at[str(receiver)]): polynomial(share) for sender, receiver, share in passes}
        left = [unpassed(share for (i, _), share in shares.items() if i == place) for place in range(len(nodes))]
        if any(rest < NONE for rest in left) or any(i == j for i, j in shares):
            raise ValueError("a node passes at most all that it holds, and nothing to itself")
        exact = [Fraction(str(start.get(node, 0))) for node in nodes]
        if sum(exact) > 1 or min(exact, default=0) < 0:
            raise ValueError("the shares with which nodes start are at least 0, and together at most 1")
        weights = [float(share) for share in exact]
        if not any(share[1] for share in shares.values()):
            plain = np.zeros((len(nodes), len(nodes)))
            for place, share in shares.items():
                plain[place] = share[0]
            return cls.of(weights, plain)
        table = np.full((len(nodes), len(nodes) + 1), Leading(0.0), dtype=object)
        for place, share in shares.items():
            table[place] = _leading(share)
        table[:, -1] = [_leading(rest) for rest in left]
        return cls(np.array([Leading(weight) for weight in weights], dtype=object), table)

    @property
    def held(self) -> Vector:
        """Shape (n,): the share of the level that each node holds, an infinitesimal one as 0."""
        return self.weights.astype(np.float64)

    def without(self, nodes: Iterable[int]) -> "Graph":
        """Reject nodes, in whatever order: give the graph of the others, in their order.

        Parameters
        ----------
        nodes : iterable of int
            The places of the nodes that leave.
        """
        left = Leaving(self)
        for node in nodes:
            left.leave(int(np.flatnonzero(left.nodes == node)[0]))
        order = np.argsort(left.nodes)
        return Graph(left.weights[order], left.passes[np.ix_(order, np.append(order, -1))])


class Leaving:
    """A graph while nodes leave it, in arrays that are used over again: new ones cost more than the arithmetic."""

    def __init__(self, graph: Graph) -> None:
        self.nodes = np.arange(graph.weights.size)
        """Which nodes are still there, in the order of the weights."""
        self.weights = graph.weights.copy()
        """The share of the level that each of them holds."""
        self._flow = np.roll(graph.passes, 1, axis=1)  # to nobody first, so that the last node can leave
        self._through = np.empty_like(self._flow)
        self._places = np.arange(graph.weights.size + 1)
        infinitesimal = graph.passes.dtype == object
        self._none, self._one = (Leading(float(value)) if infinitesimal else float(value) for value in (0, 1))

    @property
    def passes(self) -> Numbers:
        """What each of them passes to each of them, and last to nobody."""
        flow = self._flow.copy()
        flow[~flow.sum(axis=1).astype(bool), 0] = self._one
        return np.roll(flow / flow.sum(axis=1)[:, None], -1, axis=1)

    def leave(self, place: int) -> None:
        """Reject the node at a place of ``nodes``.

        With w_k + w_i g_ik, and (g_lk + g_li g_ik) / (1 - g_li g_il), where i is rejected (Bretz et al. 2009). The
        denominator is never computed: it would lose all digits near 0. Instead the way from l to i and back is taken
        out of row l, which then sums to less than 1, and a row counts in proportion to its sum, because whatever
        enters a node leaves it. Where the denominator is 0, all that a node could pass on comes back to it; it then
        passes to nobody.
        """
        last = self.nodes.size - 1
        weight, onward, into = self.weights[[place]], self._flow[place], self._flow[:, place + 1].copy()
        total = onward.sum()
        onward = onward / (total or self._one)
        onward[0] = onward[0] if total else self._one
        # the last node moves into the place
        self.nodes[place], self.weights[place] = self.nodes[last], self.weights[last]
        into[place], onward[place + 1] = into[last], onward[last + 1]
        self._flow[place] = self._flow[last]
        self._flow[:, place + 1] = self._flow[:, last + 1]
        flow = self._flow[:last, : last + 1]
        flow += np.multiply(into[:last, None], onward[: last + 1], out=self._through[:last, : last + 1])
        flow[self._places[:last], self._places[1 : last + 1]] = self._none
        self.nodes, self._flow = self.nodes[:last], flow
        self.weights = self.weights[:last] + weight * onward[1 : last + 1]


Polynomial = tuple[Fraction, Fraction]
"""c0 + c1 epsilon, which is compared as the pair is."""
NONE: Polynomial = (Fraction(0), Fraction(0))


def polynomial(share: float | str) -> Polynomial:
    """Give a written share exactly: a number, a fraction as text, "epsilon" or "1 - epsilon"."""
    if share == "epsilon":
        return Fraction(0), Fraction(1)
    if share == "1 - epsilon":
        return Fraction(1), Fraction(-1)
    return Fraction(str(share)), Fraction(0)


def unpassed(shares: Iterable[Polynomial]) -> Polynomial:
    """Give what one node passes to nobody; below ``NONE`` when its shares are too many."""
    constants, multiples = zip(NONE, *shares, strict=True)
    return 1 - sum(constants), -sum(multiples)


def _leading(share: Polynomial) -> Leading:
    return Leading(float(share[0])) if share[0] else Leading(float(share[1]), 1)


@dataclass(frozen=True, kw_only=True)
class Walk:
    """The nodes in the order in which they fall while the level rises; arrays by node unless they are by step."""

    order: tuple[int, ...]
    """By step: the node that falls. A node that no share of the level ever reaches has no step."""
    step: NDArray[np.int64]
    """Shape (n,): the step at which each node falls, from 1; 0 where it has none."""
    weight: Vector
    """Shape (n,): the share it holds at that moment; NaN where it has no step."""
    product: Vector
    """Shape (n,): p / weight; NaN where it has no step."""
    adjusted: Vector
    """Shape (n,): the smallest level at which it falls, capped at 1."""
    taken_from: NDArray[np.int64]
    """Shape (n,): the step whose product became the adjusted p; 0 where it has none."""
    held: Vector
    """Shape (steps + 1, n): what each node holds before the first step and after each; 0 once it has passed it on."""

    def steps_at(self, level: float) -> int:
        """Give the number of steps that are taken at a level."""
        adjusted = self.adjusted[list(self.order)]
        return int(np.count_nonzero(is_rejected(adjusted, level)))


def walk(graph: Graph, p: Vector, *, passing: Truths) -> Walk:
    """Raise the level from 0 and reject each node as soon as its p meets its share.

    The next node to fall is the one with the smallest p / weight, at the largest such ratio so far; in whatever order
    nodes fall, the same ones have fallen at a level (Bretz et al. 2009).

    Parameters
    ----------
    graph : Graph
        As it starts.
    p : ndarray, shape (n,)
        The p-value of each node.
    passing : ndarray of bool, shape (n,)
        Whether a node passes its share on when it falls; one that does not stays, and keeps what it holds.

    Returns
    -------
    Walk
        With every step.
    """
    left, waiting = Leaving(graph), np.full(p.size, True)
    falls, held = [], [graph.held]
    with np.errstate(over="ignore"):  # a ratio beyond all numbers is above every level
        while (fall := _next(left, waiting, p)) is not None:
            falls.append(fall)
            waiting[fall.node] = False
            if passing[fall.node]:
                left.leave(fall.place)
            held.append(np.zeros(p.size))
            held[-1][left.nodes] = left.weights.astype(np.float64)
    return _account(falls, np.array(held))


@dataclass(frozen=True)
class _Fall:
    node: int
    place: int
    """Where it stood among those left."""
    weight: float
    product: float


def _next(left: Leaving, waiting: Truths, p: Vector) -> _Fall | None:
    weights = left.weights.astype(np.float64)
    can_fall = np.flatnonzero(waiting[left.nodes] & (weights > 0))
    if not can_fall.size:
        return None
    ratios = p[left.nodes[can_fall]] / weights[can_fall]
    least = np.argmin(ratios)
    place = int(can_fall[least])
    return _Fall(int(left.nodes[place]), place, float(weights[place]), float(ratios[least]))


def _account(falls: list[_Fall], held: Vector) -> Walk:
    n = held.shape[1]
    order = [fall.node for fall in falls]
    products = np.array([fall.product for fall in falls])
    step, taken_from = np.zeros(n, dtype=np.int64), np.zeros(n, dtype=np.int64)
    weight, product, adjusted = np.full(n, np.nan), np.full(n, np.nan), np.ones(n)
    step[order] = np.arange(1, len(order) + 1)
    taken_from[order] = largest_so_far(products) + 1
    weight[order] = [fall.weight for fall in falls]
    product[order] = products
    adjusted[order] = np.minimum(np.maximum.accumulate(products), 1.0)
    return Walk(
        order=tuple(order), step=step, weight=weight, product=product, adjusted=adjusted, taken_from=taken_from,
        held=held,
    )  # fmt: skip
