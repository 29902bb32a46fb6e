"""Two groups relabelled, or pairs reversed: p at any null value, and the null values that are kept.

Take the null value d off the first group. A relabelling that moves k values out of the first group and k in leaves its
sum as large as observed, or larger, exactly when the values moved out sum to no more than those moved in, plus k d. So
each relabelling has one critical null value, the mean of what it moves out less the mean of what it moves in: p counts
the critical values on one side of the null value, and the interval runs from one of them to another. The same holds
for pairs: reversing k of them leaves the mean difference as large exactly when their own mean difference is at most d.
"""

import math
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from itertools import combinations, islice

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.location import Interval, Tails, kept_by_count
from beforehand.hypothesis_tests.relabelling_rules import Chance, slack, slack_of_null
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student import moments, moments_of_differences

Whole = NDArray[np.int64]

BITS = 61  # sums of all whole numbers stay below 2^61, so none of them overflows
FAR = 2**62
AT_ONCE = 2**20  # places of values that are held at a time


@dataclass(frozen=True)
class Grid:
    """Values as whole numbers of one unit, 2^``power``: their sums are exact, whatever the order.

    Floating-point sums differ with the order of summation: relabellings that are tied on paper would be told apart by
    chance, and differently on another machine.
    """

    whole: Whole
    power: int

    @classmethod
    def of(cls, *parts: Values) -> "Grid":
        """Write the sums of aligned parts on the finest grid on which all of them can be added up.

        Each part is off by half a unit at most, about 2^-57 of the largest value for ten values.
        """
        largest = float(np.sum([np.abs(part) for part in parts], axis=0).max())
        power = math.frexp(largest)[1] + parts[0].size.bit_length() + 1 - BITS
        on_grid = [np.rint(np.ldexp(part, -power)).astype(np.int64) for part in parts]
        return cls(np.sum(on_grid, axis=0), power)


@dataclass(frozen=True, kw_only=True)
class Changes:
    """What each relabelling changes.

    ``balance`` is the sum of the values moved out of the first group less the sum of those moved in, on a grid, each
    value moved out counted from ``offset`` (pairs: the sum of the differences that are reversed); ``moved`` says how
    many were moved out, none when a relabelling is the observed labelling.
    """

    balance: Whole
    moved: Whole
    power: int
    offset: Fraction
    slack: float
    """By how much sums that are equal on paper may seem apart, in the unit of the outcome."""
    drawn: bool
    """Whether the relabellings are draws; then the observed labelling is counted besides."""

    @property
    def total(self) -> int:
        """How many labellings are counted."""
        return self.moved.size + self.drawn

    def tails(self, null_value: float) -> Tails:
        """Give the share of labellings with a difference at least as large as observed, and of those as small."""
        sizes, place = np.unique(self.moved, return_inverse=True)
        bounds = np.array([self._bounds(size, null_value) for size in sizes.tolist()])
        above = int(np.count_nonzero(self.balance <= bounds[place, 1]))
        below = int(np.count_nonzero(self.balance >= bounds[place, 0]))
        return Tails((above + self.drawn) / self.total, (below + self.drawn) / self.total)

    def interval(self, asked: Asked) -> Interval:
        """Give the null values that neither side rejects: from one critical value to another."""
        changed = np.flatnonzero(self.moved)
        order = changed[np.argsort(self.balance[changed] / self.moved[changed], kind="stable")]

        def above(larger: float) -> float:
            return (self.total - larger) / self.total

        def kth(k: int) -> float:
            place = order[k - 1]
            mean = Fraction(int(self.balance[place]), int(self.moved[place]))
            return float(self.offset + mean * Fraction(2) ** self.power)

        return kept_by_count(order.size, above, kth, asked)

    def _bounds(self, moved: int, null_value: float) -> list[int]:
        """Give the smallest and the largest balance that count as tied with the observed labelling."""
        unit = Fraction(2) ** self.power
        tied = moved * (Fraction(null_value) - self.offset) / unit
        # besides the slack: half a unit for each of up to three parts of up to two values for each one moved
        near = Fraction(self.slack + slack_of_null(moved, null_value)) / unit + 3 * moved
        return [max(-FAR, math.ceil(tied - near)), min(FAR, math.floor(tied + near))]


def of_groups(first: Values, second: Values, chance: Chance) -> Changes:
    """Relabel two groups.

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        Values of one unit, at least one each.
    chance : Chance
        Which relabellings.

    Returns
    -------
    Changes
        The draws say which places a group gets: the smaller group's, of two equally large ones the one with the
        smaller values. Places follow the values of each group, so that neither the order of rows, nor which group is
        called the first, nor the null value decides what is drawn.
    """
    here, there = np.sort(first), np.sort(second)
    swapped = (there.size, there.tolist()) < (here.size, here.tolist())
    if swapped:
        here, there = there, here
    pooled, size = np.concatenate([here, there]), here.size
    centres = float(np.median(here)), float(np.median(there))
    centre = np.repeat(centres, [size, there.size])
    grid = Grid.of(pooled - centre, lost(pooled, centre))
    observed, balance, moved = grid.whole[:size].sum(), [], []
    for places in _groups(pooled.size, size, chance):
        balance.append(observed - grid.whole[places].sum(axis=1))
        moved.append(np.count_nonzero(places >= size, axis=1))
    sign = -1 if swapped else 1
    return Changes(
        balance=sign * np.concatenate(balance),
        moved=np.concatenate(moved),
        power=grid.power,
        offset=sign * (Fraction(centres[0]) - Fraction(centres[1])),
        slack=slack(first, second),
        drawn=not chance.lists(math.comb(pooled.size, size)),
    )


def of_pairs(first: Values, second: Values, chance: Chance) -> Changes:
    """Reverse pairs.

    Parameters
    ----------
    first, second : ndarray, shape (n,)
        The two values of each pair, at least one pair, one unit.
    chance : Chance
        Which pairs are reversed.

    Returns
    -------
    Changes
        The draws say for each place whether its pair is reversed. Places follow the ordered differences, from the end
        that is the same one when first and second are exchanged in all pairs: neither that nor the order of rows nor
        the null value decides what is drawn.
    """
    difference = first - second
    centre = float(np.median(difference))
    grid = Grid.of(difference - centre, lost(difference, np.full_like(difference, centre)), lost(first, second))
    ascending = np.sort(grid.whole)
    turned = np.sort(-difference).tolist() < np.sort(difference).tolist()
    whole, balance, moved = ascending[::-1] if turned else ascending, [], []
    for reversal in _reversals(whole.size, chance):
        balance.append(reversal @ whole)
        moved.append(np.count_nonzero(reversal, axis=1))
    return Changes(
        balance=np.concatenate(balance),
        moved=np.concatenate(moved),
        power=grid.power,
        offset=Fraction(centre),
        slack=slack(first, second),
        drawn=not chance.lists(2**whole.size),
    )


def lost(first: Values, second: Values) -> Values:
    """Give what the rounding of first - second took, which is a double itself.

    Knuth (1997), The Art of Computer Programming, volume 2, section 4.2.2, theorem B.
    """
    difference = first - second
    taken = difference - first
    rest: Values = (first - (difference - taken)) - (second + taken)
    return rest


def _groups(n: int, size: int, chance: Chance) -> Iterator[NDArray[np.intp]]:
    """Give the places of a group of a size, one relabelling a row."""
    if chance.lists(math.comb(n, size)):
        every = combinations(range(n), size)
        while rows := list(islice(every, AT_ONCE // size)):
            yield np.array(rows)
    else:
        for order in chance.stream.permutations(n, chance.draws):
            yield order[:, :size]


def _reversals(n: int, chance: Chance) -> Iterator[NDArray[np.bool_]]:
    """Give which pairs are reversed, one relabelling a row."""
    if chance.lists(2**n):
        rows = AT_ONCE // n
        for start in range(0, 2**n, rows):
            yield np.arange(start, min(start + rows, 2**n))[:, np.newaxis] >> np.arange(n) & 1 == 1
    else:
        yield from chance.stream.signs(n, chance.draws)


def standardised_groups(first: Values, second: Values, null_value: float) -> float:
    """Give the difference in means from the null value, over its standard deviation under relabelling.

    With the null value taken off the first group, that is s √(1 / n1 + 1 / n2), with s the standard deviation (divisor
    N - 1) of all N values about their common mean (Pitman 1937).
    """
    one, two = moments(first), moments(second)
    n = one.n + two.n
    away = float(one.mean - two.mean - Fraction(null_value))
    between = away * math.sqrt(one.n * two.n / n)
    spread = math.hypot(one.sd * math.sqrt(one.n - 1), two.sd * math.sqrt(two.n - 1), between)
    return between / spread * math.sqrt(n - 1)


def standardised_pairs(first: Values, second: Values, null_value: float) -> float:
    """Give the sum of the differences from the null value, over its standard deviation under random signs.

    That is the root of the sum of their squares (Fisher 1935).
    """
    pairs = moments_of_differences(first, second)
    mean = float(pairs.mean - Fraction(null_value)) * math.sqrt(pairs.n)
    return mean / math.hypot(pairs.sd * math.sqrt(pairs.n - 1), mean) * math.sqrt(pairs.n)
