"""The second route of the rank correlations: whole numbers of any length, and sums over pairs.

Not shared with ``rank_association``: how ranks are found, the exact distribution (the columns change places, the groups
are filled from the largest value down, all counts of one state stand packed in one long integer), and the variance of
Kendall's S (Daniels 1944, Biometrika 33:129-135, from the row sums of the signs). Shared: what counts as tied.
"""

import math
from bisect import bisect_left, bisect_right, insort
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property, lru_cache
from itertools import groupby

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.rank_sums_again import Whole, unpacked
from beforehand.hypothesis_tests.ties import rounding, settled

Sizes = tuple[int, ...]


@dataclass(frozen=True)
class Listed:
    """Two columns as plain lists, tied values made equal."""

    first: list[float]
    second: list[float]

    @classmethod
    def of(cls, first: Values, second: Values) -> "Listed":
        """Make tied values equal."""
        return cls(*(settled(column, rounding(column)).tolist() for column in (first, second)))

    @cached_property
    def ranks(self) -> tuple[list[int], list[int]]:
        """Twice the mean ranks: values below, plus values not above, plus 1."""
        return _ranks(self.first), _ranks(self.second)

    @cached_property
    def wins(self) -> int:
        """Concordant pairs twice, and once the pairs of rows that tie in either column: S and the number of pairs."""
        rows = sorted(zip(self.first, self.second, strict=True))
        s, earlier = 0, list[float]()
        for _, tied in groupby(rows, key=lambda row: row[0]):
            values = [value for _, value in tied]
            s += sum(bisect_left(earlier, v) - (len(earlier) - bisect_right(earlier, v)) for v in values)
            for value in values:
                insort(earlier, value)
        return s + len(rows) * (len(rows) - 1) // 2

    @property
    def tau(self) -> float:
        """Kendall's τ_b: S by the geometric mean of the pairs that are not tied."""
        n = len(self.first)
        pairs = n * (n - 1) // 2
        untied = math.prod(pairs - sum(math.comb(t, 2) for t in Counter(column).values()) for column in self.both)
        return (self.wins - pairs) / math.sqrt(untied)

    @property
    def rho(self) -> Fraction:
        """The squared correlation of the ranks, with its sign."""
        deviations = [[Fraction(rank) - (len(ranks) + 1) for rank in ranks] for ranks in self.ranks]
        xy = sum((a * b for a, b in zip(*deviations, strict=True)), Fraction(0))
        xx, yy = (sum((a * a for a in one), Fraction(0)) for one in deviations)
        return Fraction(xy * abs(xy) / (xx * yy))

    @property
    def both(self) -> tuple[list[float], list[float]]:
        """The two columns."""
        return self.first, self.second

    @property
    def ties(self) -> tuple[Sizes, Sizes]:
        """The sizes of the tied groups of each column, in ascending order of the values."""
        first, second = (tuple(Counter(sorted(column)).values()) for column in self.both)
        return first, second

    @property
    def products(self) -> int:
        """The sum of products of doubled ranks."""
        return sum(a * b for a, b in zip(*self.ranks, strict=True))

    @property
    def variance_of_pairs(self) -> Fraction:
        """The variance of S over all orders."""
        n = len(self.first)
        found = []
        for ranks in self.ranks:
            rows = sum((rank - (n + 1)) ** 2 for rank in ranks)  # of row sums: values below less values above
            signs = n * n - sum(t * t for t in Counter(ranks).values())
            found.append((rows, signs))
        (one, a), (two, b) = found
        sums = Fraction(4 * (one - a) * (two - b), n * (n - 1) * (n - 2)) + Fraction(2 * a * b, n * (n - 1))
        return sums / 4


def _ranks(values: list[float]) -> list[int]:
    ascending = sorted(values)
    return [bisect_left(ascending, value) + bisect_right(ascending, value) + 1 for value in values]


@lru_cache(maxsize=64)
def counted(score: str, first: Sizes, second: Sizes) -> Whole:
    """Count all orders by the ``products`` or by the ``wins`` of ``Listed``.

    The groups are those of the second column from its largest value down; each takes values of the first.
    """
    n = sum(first)
    total = math.factorial(n) // math.prod(map(math.factorial, second))
    width = total.bit_length() // 8 + 1
    ranks = [sum(first[:at]) * 2 + t + 1 for at, t in enumerate(first)]
    packed: dict[Sizes, int] = {first: 1}
    for group in range(len(second) - 1, -1, -1):
        size = second[group]
        rank = sum(second[:group]) * 2 + size + 1
        now: dict[Sizes, int] = {}
        for rest, ways in packed.items():
            for taken, each in _taken(size, rest):
                if score == "products":
                    shift = rank * sum(r * t for r, t in zip(ranks, taken, strict=True))
                else:
                    shift = _wins(first, rest, taken) + size * (size - 1) // 2
                key = tuple(r - t for r, t in zip(rest, taken, strict=True))
                now[key] = now.get(key, 0) + ((ways * each) << (8 * width * shift))
        packed = now
    (ways,) = packed.values()
    return Whole(unpacked(ways, width), total)


def _wins(first: Sizes, rest: Sizes, taken: Sizes) -> int:
    """Count the wins against the rows above: 2 for each whose first value is larger too, 1 where it is the same."""
    gone = [m - r for m, r in zip(first, rest, strict=True)]
    return sum(t * (gone[at] + 2 * sum(gone[at + 1 :])) for at, t in enumerate(taken) if t)


def _taken(size: int, rest: Sizes) -> Iterator[tuple[Sizes, int]]:
    """Give every way to take so many values, and in how many ways it can be done."""
    if not rest:
        if not size:
            yield (), 1
        return
    for here in range(min(size, rest[0]) + 1):
        for others, ways in _taken(size - here, rest[1:]):
            yield (here, *others), ways * math.comb(rest[0], here)
