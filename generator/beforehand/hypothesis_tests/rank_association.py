"""Rank correlations under independence: how they are distributed when any order of one column is as likely as another.

The exact distribution is that of all n! orders, ties included: the groups of tied values of the first column are filled
one after the other with values of the second; what counts is only how many of each tied group are used up.
"""

import math
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.ties import Ranks, doubled_midranks, rounding, settled

Counts = NDArray[np.int64]
Score = Literal["products", "pairs"]
Sizes = tuple[int, ...]


@dataclass(frozen=True)
class RankPairs:
    """Two columns as twice the mean ranks that tied values share."""

    first: Ranks
    second: Ranks

    @classmethod
    def of(cls, first: Values, second: Values) -> "RankPairs":
        """Rank both columns."""
        return cls(*(doubled_midranks(settled(column, rounding(column))) for column in (first, second)))

    @property
    def ties(self) -> tuple[Sizes, Sizes]:
        """The sizes of the groups of tied values of each column, in ascending order of the values."""
        return tied(self.first), tied(self.second)

    @property
    def products(self) -> int:
        """The sum of products of the doubled ranks, on which Spearman's correlation rests."""
        return int((self.first * self.second).sum())

    @property
    def pairs(self) -> int:
        """Concordant less discordant pairs of rows: Kendall's S."""
        order = np.lexsort((self.second, self.first))
        ascents = _ascents(self.second[order])
        # rows tied in the first column stand in ascending order: each such pair was counted, unless tied in both
        alike = np.unique(np.stack([self.first, self.second]), axis=1, return_counts=True)[1]
        return ascents - sum(math.comb(t, 2) for t in self.ties[0]) + sum(math.comb(t, 2) for t in alike.tolist())


def _ascents(values: Ranks) -> int:
    """Count the pairs in which the later value is larger, less those in which it is smaller; half and half."""
    if values.size <= 2:
        return int(np.sign(np.diff(values)).sum())
    early, late = np.sort(values[: values.size // 2]), values[values.size // 2 :]
    larger = np.searchsorted(early, late, "left") - (early.size - np.searchsorted(early, late, "right"))
    return _ascents(values[: values.size // 2]) + _ascents(late) + int(larger.sum())


def tied(ranks: Ranks) -> Sizes:
    """Count equal ranks, in ascending order."""
    return tuple(np.unique(ranks, return_counts=True)[1].tolist())


@dataclass(frozen=True)
class Orders:
    """How many of all orders give each score, from ``least`` on."""

    least: int
    ways: Counts

    def above(self, score: int) -> float:
        """Give P(score >= the observed one)."""
        return float(self.ways[max(0, score - self.least) :].sum() / self.ways.sum())

    def below(self, score: int) -> float:
        """Give P(score <= the observed one)."""
        return float(self.ways[: score - self.least + 1].sum() / self.ways.sum())

    @property
    def most(self) -> int:
        """The largest score that some order has."""
        return self.least + int(np.flatnonzero(self.ways)[-1])


@lru_cache(maxsize=64)
def orders(score: Score, first: Sizes, second: Sizes) -> Orders:
    """Count all orders by their score, for columns with tied groups of these sizes."""
    n = sum(first)
    reach = n * (n - 1) // 2 if score == "pairs" else n * (n + 1) * (2 * n + 1) // 6 * 4
    width = 2 * reach + 1 if score == "pairs" else reach + 1
    start = np.zeros(width, dtype=np.int64)
    start[reach if score == "pairs" else 0] = 1
    reached: dict[Sizes, Counts] = {(0,) * len(second): start}
    ranks = _midranks(first), _midranks(second)
    for group, size in enumerate(first):
        filled: dict[Sizes, Counts] = {}
        for used, ways in reached.items():
            for taken in _choices(size, tuple(m - u for m, u in zip(second, used, strict=True))):
                now = tuple(u + t for u, t in zip(used, taken, strict=True))
                each = math.prod(math.comb(m - u, t) for m, u, t in zip(second, used, taken, strict=True))
                shift = _pairs(used, taken) if score == "pairs" else _products(ranks[0][group], ranks[1], taken)
                filled.setdefault(now, np.zeros(width, dtype=np.int64))
                _add(filled[now], ways * each, shift)
        reached = filled
    (ways,) = reached.values()
    return Orders(-reach if score == "pairs" else 0, ways)


def _midranks(sizes: Sizes) -> list[int]:
    ends = np.cumsum(sizes)
    return [int(2 * end - size + 1) for end, size in zip(ends, sizes, strict=True)]


def _choices(size: int, left: Sizes) -> list[Sizes]:
    """Give every way to take so many values from the tied groups that are left."""
    if len(left) == 1 or size == 0:
        return [(size, *(0 for _ in left[1:]))] if size <= left[0] else []
    if size == 1:
        return [tuple(int(place == at) for place in range(len(left))) for at, room in enumerate(left) if room]
    most, least = min(size, left[0]), max(0, size - sum(left[1:]))
    return [(here, *others) for here in range(least, most + 1) for others in _choices(size - here, left[1:])]


def _pairs(used: Sizes, taken: Sizes) -> int:
    """Count the pairs with earlier rows: those above less those below."""
    below = np.cumsum([0, *used])
    return sum(t * int(2 * below[at] + used[at] - below[-1]) for at, t in enumerate(taken) if t)


def _products(rank: int, ranks: list[int], taken: Sizes) -> int:
    return rank * sum(r * t for r, t in zip(ranks, taken, strict=True))


def _add(to: Counts, ways: Counts, shift: int) -> None:
    if shift > 0:
        to[shift:] += ways[:-shift]
    elif shift < 0:
        to[:shift] += ways[-shift:]
    else:
        to += ways


def variance_of_pairs(first: Sizes, second: Sizes) -> float:
    """Give the variance of Kendall's S over all orders, for 3 rows or more (Kendall 1947, Biometrika 34:297)."""
    n = sum(first)
    squares = [sum(t * (t - 1) * (2 * t + 5) for t in sizes) for sizes in (first, second)]
    twos = [sum(t * (t - 1) for t in sizes) for sizes in (first, second)]
    threes = [sum(t * (t - 1) * (t - 2) for t in sizes) for sizes in (first, second)]
    return (
        (n * (n - 1) * (2 * n + 5) - sum(squares)) / 18
        + math.prod(twos) / (2 * n * (n - 1))
        + math.prod(threes) / (9 * n * (n - 1) * (n - 2))
    )
