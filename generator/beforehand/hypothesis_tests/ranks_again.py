"""The second route of the rank tests: ranks from sorted lists of whole numbers.

Not shared with ``rank_two_groups``, ``rank_signs`` and ``location``: how ranks are found, the search for the ends of
the interval, and the upper end (the lower end of the mirrored question); ``rank_sums_again`` says what else is not.
Shared: what counts as tied.
"""

import math
from bisect import bisect_left, bisect_right
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import cache
from itertools import chain
from statistics import median

import numpy as np

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.location import Interval, Located, Tails
from beforehand.hypothesis_tests.rank_sums_again import Sums, drawn, flipped, signs, subsets
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.ties import rounding, settled


def midranks(values: Sequence[float]) -> list[int]:
    """Give doubled midranks: values below, plus values not above, plus 1."""
    ascending = sorted(values)
    return [bisect_left(ascending, value) + bisect_right(ascending, value) + 1 for value in values]


def whole(*samples: Sequence[float]) -> list[list[int]]:
    """Write doubles as whole numbers of one unit, so small that the middle of any two is whole too."""
    ratios = [[value.as_integer_ratio() for value in sample] for sample in samples]
    unit = 2 * max(below for sample in ratios for _, below in sample)
    return [[above * (unit // below) for above, below in sample] for sample in ratios]


@dataclass(frozen=True)
class Marks:
    """The critical null values, ascending, as doubles and as whole numbers; ``far`` is beyond all of them."""

    values: Sequence[float]
    whole: Sequence[int]
    far: int

    def interval(self, above: Callable[[int], float], below: Callable[[int], float], asked: Asked) -> Interval:
        """Give the null values that are kept: ``above`` takes a null value, ``below`` the negative of one."""
        lower = self._first_kept(self.whole, above, asked)
        upper = self._first_kept([-mark for mark in reversed(self.whole)], below, asked)
        return Interval(self.values[lower - 1] if lower else -math.inf, self.values[-upper] if upper else math.inf)

    def _first_kept(self, marks: Sequence[int], above: Callable[[int], float], asked: Asked) -> int:
        """Count the marks below the first gap whose null values are kept, by halving the list of marks."""
        rejected, kept = -1, len(marks)
        while kept - rejected > 1:
            middle = (rejected + kept) // 2
            inside = (marks[middle - 1] + marks[middle]) // 2 if middle else -self.far
            if asked.keeps(above(inside)):
                kept = middle
            else:
                rejected = middle
        return kept


def two_groups_exact(first: Values, second: Values, asked: Asked) -> Located:
    """Compare two groups exactly, as ``rank_two_groups.exact`` does."""
    x, y = (settled(group, rounding(group)).tolist() for group in (first, second))
    grid = [(a - b, rounding(a, b)) for a in x for b in y] + [(asked.null_value, rounding(asked.null_value))]
    *differences, null_value = settled(*np.array(grid).T).tolist()
    counted = cache(subsets)

    def above(upper: Sequence[float], lower: Sequence[float]) -> float:
        ranks, n = midranks([*upper, *lower]), len(upper)
        if n <= len(lower):
            return counted(tuple(sorted(ranks)), n).above(sum(ranks[:n]))
        return counted(tuple(sorted(ranks)), len(lower)).below(sum(ranks[n:]))

    critical = sorted(set(differences))
    one, two, marks = whole(x, y, critical)
    interval = Marks(critical, marks, far=2 * max(map(abs, one + two)) + 1).interval(
        lambda shift: above([value - shift for value in one], two),
        lambda shift: above([value - shift for value in two], one),
        asked,
    )
    left, right = at_null(first, second, asked.null_value)
    return Located(
        estimate=median(differences),
        interval=interval,
        statistic=sum((a > b) + (a == b) / 2 for a in left for b in right),
        tails=Tails(above(left, right), above(right, left)),
        null_value=null_value,
    )


def two_groups_normal(first: Values, second: Values, asked: Asked, *, continuity: bool) -> Located:
    """Compare two groups by the normal distribution, as ``rank_two_groups.normal`` does."""
    n1, n2, correction = first.size, second.size, Fraction(continuity, 2)
    ranks = midranks([*chain(*at_null(first, second, asked.null_value))])
    won = Fraction(sum(ranks[:n1]) - n1 * (n1 + 1), 2)
    x, y = at_null(first, second, 0.0)
    apart = [rank + 2 * n2 for rank in midranks(x)] + midranks(y)
    sums = Sums(np.sort(x), np.sort(-np.array(y)), np.zeros(n1, dtype=np.intp))
    null = drawn(ranks, n1, correction)
    return Located(
        estimate=sums.median(),
        interval=sums.interval(drawn(apart, n1, correction), asked),
        statistic=float(won),
        tails=Tails(null.above(won), null.below(won)),
        null_value=asked.null_value,
    )


def signed_exact(first: Values, second: Values, asked: Asked, *, zeros: str) -> Located:
    """Judge differences exactly, as ``rank_signs.exact`` does."""
    d, e = subtracted(first, second)
    places = [(i, j) for i in range(len(d)) for j in range(i + 1)]
    grid = [(d[i] / 2 + d[j] / 2, e[i] / 2 + e[j] / 2 + rounding(d[i] / 2 + d[j] / 2)) for i, j in places]
    *averages, null_value = settled(*np.array([*grid, (asked.null_value, rounding(asked.null_value))]).T).tolist()
    counted = cache(signs)

    def above(values: Sequence[float]) -> float:
        ranks = signed_ranks(values, zeros)
        return counted(tuple(sorted(map(abs, ranks)))).above(sum(rank for rank in ranks if rank > 0))

    critical = sorted(set(averages))
    away = distances(d, e, asked.null_value)
    values, marks = whole(d, critical)
    return Located(
        estimate=median(averages),
        interval=Marks(critical, marks, far=2 * max(map(abs, values)) + 1).interval(
            lambda null_value: above([value - null_value for value in values]),
            lambda negative: above([-value - negative for value in values]),
            asked,
        ),
        statistic=sum(rank for rank in signed_ranks(away, zeros) if rank > 0) / 2,
        tails=Tails(above(away), above([-value for value in away])),
        null_value=null_value,
    )


def signed_normal(first: Values, second: Values, asked: Asked, *, zeros: str, continuity: bool) -> Located:
    """Judge differences by the normal distribution, as ``rank_signs.normal`` does."""
    d, e = subtracted(first, second)
    correction, ascending = Fraction(continuity, 2), np.sort(d)
    ranks = signed_ranks(distances(d, e, asked.null_value), zeros)
    observed = Fraction(sum(rank for rank in ranks if rank > 0), 2)
    null, between_values = flipped(ranks, correction), flipped(midranks(ascending.tolist()), correction)
    sums = Sums(ascending / 2, ascending / 2, np.arange(ascending.size))
    return Located(
        estimate=sums.median(),
        interval=sums.interval(between_values, asked),
        statistic=float(observed),
        tails=Tails(null.above(observed), null.below(observed)),
        null_value=asked.null_value,
    )


def at_null(first: Values, second: Values, null_value: float) -> tuple[list[float], list[float]]:
    """Take the null value off the first group, and make equal what differs by rounding only."""
    pooled = np.concatenate([first - null_value, second])
    values = settled(pooled, np.concatenate([rounding(first, null_value), rounding(second)])).tolist()
    return values[: first.size], values[first.size :]


def subtracted(first: Values, second: Values) -> tuple[list[float], list[float]]:
    """Give the differences within pairs, and by how much each may be off through rounding."""
    pairs = list(zip(first.tolist(), second.tolist(), strict=True))
    error = [float(rounding(a, b)) for a, b in pairs]
    return distances([a - b for a, b in pairs], error, 0.0), error


def distances(differences: list[float], error: list[float], null_value: float) -> list[float]:
    """Take the null value off; distances that are equal but for rounding become equal on either side of it."""
    away = [difference - null_value for difference in differences]
    allowed = np.array(error) + rounding(null_value)
    far = settled(np.abs(np.array(away)), allowed).tolist()
    return [math.copysign(distance, value) for distance, value in zip(far, away, strict=True)]


def signed_ranks(away: Sequence[float], zeros: str) -> list[int]:
    """Give each difference that is not zero its doubled rank with its sign."""
    ranked = [value for value in away if value != 0 or zeros == "pratt"]
    ranks = midranks([abs(value) for value in ranked])
    return [rank if value > 0 else -rank for value, rank in zip(ranked, ranks, strict=True) if value != 0]
