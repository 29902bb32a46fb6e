"""The second route of the rank tests: ranks from sorted lists of exact fractions.

Not shared with ``rank_two_groups``, ``rank_signs`` and ``location``: how ranks are found, the search for the ends of
the interval, and the upper end (the lower end of the mirrored question); ``rank_sums_again`` says what else is not.
Shared: what counts as tied.
"""

import math
from bisect import bisect_left, bisect_right
from collections.abc import Callable, Sequence
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

Number = float | Fraction


def midranks(values: Sequence[Number]) -> list[int]:
    """Give doubled midranks: values below, plus values not above, plus 1."""
    ascending = sorted(values)
    return [bisect_left(ascending, value) + bisect_right(ascending, value) + 1 for value in values]


def lower_end(critical: Sequence[float], above: Callable[[Fraction], float], asked: Asked) -> float:
    """Give the lower end of the null values that are kept, by halving the list of critical values."""
    rejected, kept = -1, len(critical)
    while kept - rejected > 1:
        middle = (rejected + kept) // 2
        if asked.keeps(above(between(critical, middle))):
            kept = middle
        else:
            rejected = middle
    return critical[kept - 1] if kept else -math.inf


def between(critical: Sequence[float], gap: int) -> Fraction:
    """Give an exact value below all critical values, between two of them, or above all."""
    if gap == 0:
        return Fraction(critical[0]) - 1
    if gap == len(critical):
        return Fraction(critical[-1]) + 1
    return (Fraction(critical[gap - 1]) + Fraction(critical[gap])) / 2


def two_groups_exact(first: Values, second: Values, asked: Asked) -> Located:
    """Compare two groups exactly, as ``rank_two_groups.exact`` does."""
    x, y = (settled(group, rounding(group)).tolist() for group in (first, second))
    grid = [(a - b, rounding(a, b)) for a in x for b in y] + [(asked.null_value, rounding(asked.null_value))]
    *differences, null_value = settled(*np.array(grid).T).tolist()
    counted = cache(subsets)

    def above(upper: Sequence[Number], lower: Sequence[Number]) -> float:
        ranks, n = midranks([*upper, *lower]), len(upper)
        if n <= len(lower):
            return counted(tuple(sorted(ranks)), n).above(sum(ranks[:n]))
        return counted(tuple(sorted(ranks)), len(lower)).below(sum(ranks[n:]))

    critical = sorted(set(differences))
    lower = lower_end(critical, lambda shift: above(moved(x, shift), y), asked)
    upper = -lower_end(negated(critical), lambda shift: above(moved(y, shift), x), asked)
    left, right = at_null(first, second, asked.null_value)
    return Located(
        estimate=median(differences),
        interval=Interval(lower, upper),
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

    def above(values: Sequence[Number]) -> float:
        ranks = signed_ranks(values, zeros)
        return counted(tuple(sorted(map(abs, ranks)))).above(sum(rank for rank in ranks if rank > 0))

    critical = sorted(set(averages))
    away = distances(d, e, asked.null_value)
    return Located(
        estimate=median(averages),
        interval=Interval(
            lower_end(critical, lambda value: above(moved(d, value)), asked),
            -lower_end(negated(critical), lambda value: above(moved(negated(d), value)), asked),
        ),
        statistic=sum(rank for rank in signed_ranks(away, zeros) if rank > 0) / 2,
        tails=Tails(above(away), above(negated(away))),
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


def moved(values: Sequence[float], shift: Fraction) -> list[Fraction]:
    """Take a shift off each value, exactly."""
    return [Fraction(value) - shift for value in values]


def negated(values: Sequence[float]) -> list[float]:
    """Mirror values at 0; ascending ones stay ascending when they are sorted again."""
    return sorted(-value for value in values)


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


def signed_ranks(away: Sequence[Number], zeros: str) -> list[int]:
    """Give each difference that is not zero its doubled rank with its sign."""
    ranked: list[Number] = [value for value in away if value != 0 or zeros == "pratt"]
    ranks = midranks([max(value, -value) for value in ranked])
    return [rank if value > 0 else -rank for value, rank in zip(ranked, ranks, strict=True) if value != 0]
