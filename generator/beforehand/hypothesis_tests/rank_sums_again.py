"""The second route of the rank tests, its distributions and pairwise sums: whole numbers, counting and halving.

Not shared with ``rank_sums`` and ``pairwise``: the exact distributions (whole numbers of any length, packed into one),
the normal distributions (moments of ranks drawn without replacement or given signs, the complementary error function),
and the k-th pairwise sum (halving the range of values).
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from statistics import NormalDist

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.sides import Asked


@dataclass(frozen=True)
class Whole:
    """An exact distribution as whole numbers: in ``ways[s]`` ways out of ``total`` the sum is s."""

    ways: tuple[int, ...]
    total: int

    def above(self, observed: int) -> float:
        """Give P(sum >= observed)."""
        return sum(self.ways[observed:]) / self.total

    def below(self, observed: int) -> float:
        """Give P(sum <= observed)."""
        return sum(self.ways[: observed + 1]) / self.total


def subsets(ranks: tuple[int, ...], size: int) -> Whole:
    """Multiply out the product of (1 + z q^rank) and take the coefficients of z^size.

    The polynomial in q is one whole number, the coefficient of q^s in the bytes from ``width * s`` on, so that
    multiplying by q^rank is a shift.
    """
    total = math.comb(len(ranks), size)
    width = total.bit_length() // 8 + 1
    chosen = [1] + [0] * size
    for rank in ranks:
        for j in range(size, 0, -1):
            chosen[j] += chosen[j - 1] << (8 * width * rank)
    return Whole(unpacked(chosen[size], width), total)


def signs(ranks: tuple[int, ...]) -> Whole:
    """Multiply out the product of (1 + q^rank), packed as in ``subsets``."""
    width = len(ranks) // 8 + 1
    product = 1
    for rank in ranks:
        product += product << (8 * width * rank)
    return Whole(unpacked(product, width), 2 ** len(ranks))


def unpacked(packed: int, width: int) -> tuple[int, ...]:
    """Split a whole number into its parts of so many bytes."""
    places = packed.bit_length() // (8 * width) + 1
    data = packed.to_bytes(places * width, "little")
    return tuple(int.from_bytes(data[i : i + width], "little") for i in range(0, len(data), width))


@dataclass(frozen=True)
class Bell:
    """A normal distribution, of which a half unit more than observed is taken into each tail when it is corrected."""

    mean: Fraction
    variance: Fraction
    correction: Fraction

    def above(self, observed: Fraction) -> float:
        """Give P(sum >= observed)."""
        return math.erfc(float(observed - self.correction - self.mean) / math.sqrt(2 * self.variance)) / 2

    def below(self, observed: Fraction) -> float:
        """Give P(sum <= observed)."""
        return self.above(2 * self.mean - observed)

    def fewest(self, pairs: int, asked: Asked) -> int:
        """Give the smallest k for which a null value above k of the pairwise values, and no more, is kept."""
        k = max(0, round(self.mean + Fraction(NormalDist().inv_cdf(asked.tail) * math.sqrt(self.variance))))
        while k and asked.keeps(self.above(Fraction(pairs - k + 1))):
            k -= 1
        while not asked.keeps(self.above(Fraction(pairs - k))):
            k += 1
        return k


def drawn(ranks: Sequence[int], size: int, correction: Fraction) -> Bell:
    """Give the normal distribution of the pairs won by a group whose ranks are drawn without replacement."""
    n, mean = len(ranks), Fraction(sum(ranks), len(ranks))
    spread = sum(((rank - mean) ** 2 for rank in ranks), Fraction(0)) / 4
    return Bell(Fraction(size * (n - size), 2), Fraction(size * (n - size), n * (n - 1)) * spread, correction)


def flipped(ranks: Sequence[int], correction: Fraction) -> Bell:
    """Give the normal distribution of the sum of the ranks that get a positive sign by chance."""
    return Bell(Fraction(sum(map(abs, ranks)), 4), Fraction(sum(rank * rank for rank in ranks), 16), correction)


@dataclass(frozen=True)
class Sums:
    """All sums of a row value and a column value, from column ``start[i]`` on; rows and columns ascending."""

    rows: Values
    columns: Values
    start: NDArray[np.intp]

    def median(self) -> float:
        """Give the median of all sums."""
        size = int((self.columns.size - self.start).sum())
        return (self.kth((size + 1) // 2) + self.kth(size // 2 + 1)) / 2

    def interval(self, null: Bell, asked: Asked) -> Interval:
        """Give the null values kept when p depends on how many sums lie above."""
        size = int((self.columns.size - self.start).sum())
        k = null.fewest(size, asked)
        return Interval(self.kth(k), self.kth(size + 1 - k)) if k else Interval(-math.inf, math.inf)

    def kth(self, k: int) -> float:
        """Find the k-th smallest sum by halving the range of values, then take the sum that stands there."""
        low, high = float(self.rows[0] + self.columns[0]), float(self.rows[-1] + self.columns[-1])
        smallest_step = 2.0**-50 * float(np.abs(self.rows).max() + np.abs(self.columns).max())
        while high - low > smallest_step:
            middle = low + (high - low) / 2
            if int((self._first_above(middle) - self.start).sum()) >= k:
                high = middle
            else:
                low = middle
        column = np.maximum(np.searchsorted(self.columns, low - 2 * smallest_step - self.rows), self.start)
        rows = self.rows[column < self.columns.size]
        return float((rows + self.columns[column[column < self.columns.size]]).min())

    def _first_above(self, value: float) -> NDArray[np.intp]:
        return np.maximum(np.searchsorted(self.columns, value - self.rows, side="right"), self.start)
