"""The second route of the relabelling tests: sums of the values as they are, each rounded once, one after the other.

Not shared with ``relabelling``: no grid and no centring (``math.fsum`` rounds the exact sum of doubles), how all
relabellings are listed (by what is exchanged), how the order of drawn words is found, the search for the ends of the
interval, and the moments. Shared: the words that are drawn, what counts as tied, and when relabellings are listed.
"""

import math
from collections.abc import Iterator
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction
from itertools import combinations

import numpy as np

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.location import Interval, Tails
from beforehand.hypothesis_tests.relabelling_rules import Chance, slack, slack_of_null
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student_again import FIFTY_DIGITS, exact_moments, exact_moments_of_differences


@dataclass(frozen=True)
class Moved:
    """What one relabelling moves: how many values out of the first group, and all values moved, those in negative."""

    count: int
    terms: tuple[float, ...]


@dataclass(frozen=True)
class Found:
    """The p-values of both sides, and the interval."""

    tails: Tails
    interval: Interval


def counted(relabellings: Iterator[Moved], asked: Asked, *, slack: float, drawn: bool) -> Found:
    """Count relabellings on both sides of the null value, and sort their critical values."""
    total = above = below = int(drawn)
    critical = []
    for moved in relabellings:
        total += 1
        away = math.fsum((*moved.terms, *[-asked.null_value] * moved.count))
        tied = slack + slack_of_null(moved.count, asked.null_value)
        above += away <= tied
        below += away >= -tied
        if moved.count:
            critical.append(math.fsum(moved.terms) / moved.count)
    critical.sort()
    always = total - len(critical)
    k = next(k for k in range(len(critical) + 1) if asked.keeps((always + k) / total))
    interval = Interval(critical[k - 1], critical[-k]) if k else Interval(-math.inf, math.inf)
    return Found(Tails(above / total, below / total), interval)


def groups(first: Values, second: Values, asked: Asked, chance: Chance) -> Found:
    """Relabel two groups, as ``relabelling.of_groups`` does."""
    one, two = sorted(first.tolist()), sorted(second.tolist())
    exchanged = (len(two), two) < (len(one), one)
    here, there = (two, one) if exchanged else (one, two)
    listed = chance.lists(math.comb(len(one) + len(two), len(one)))
    return counted(
        (
            _towards_first(moved, exchanged=exchanged)
            for moved in _exchanges(here, there, chance if not listed else None)
        ),
        asked,
        slack=slack(first, second),
        drawn=not listed,
    )


def _towards_first(moved: Moved, *, exchanged: bool) -> Moved:
    return Moved(moved.count, tuple(-term for term in moved.terms)) if exchanged else moved


def _exchanges(here: list[float], there: list[float], chance: Chance | None) -> Iterator[Moved]:
    """Exchange values of two groups: every set against every set of its size, or as drawn."""
    if chance is None:
        for count in range(min(len(here), len(there)) + 1):
            for leaving in combinations(here, count):
                for coming in combinations(there, count):
                    yield Moved(count, leaving + tuple(-value for value in coming))
        return
    pooled, size = np.array(here + there), len(here)
    places = np.arange(pooled.size)
    for words in chance.stream.words(pooled.size, chance.draws):
        for row in words:
            stays = np.zeros(pooled.size, dtype=bool)
            stays[np.lexsort((places, row))[:size]] = True
            out, into = pooled[:size][~stays[:size]], -pooled[size:][stays[size:]]
            yield Moved(out.size, (*out.tolist(), *into.tolist()))


def pairs(first: Values, second: Values, asked: Asked, chance: Chance) -> Found:
    """Reverse pairs, as ``relabelling.of_pairs`` does."""
    both = list(zip(first.tolist(), second.tolist(), strict=True))
    both.sort(key=lambda pair: Fraction(pair[0]) - Fraction(pair[1]))
    plain, mirrored = [one - two for one, two in both], sorted(two - one for one, two in both)
    if mirrored < plain:
        both.reverse()
    listed = chance.lists(2 ** len(both))
    return counted(
        _reversals(both, chance if not listed else None), asked, slack=slack(first, second), drawn=not listed
    )


def _reversals(both: list[tuple[float, float]], chance: Chance | None) -> Iterator[Moved]:
    """Reverse pairs: every set of them, or as drawn."""
    terms = [(one, -two) for one, two in both]
    if chance is None:
        for count in range(len(terms) + 1):
            for turned in combinations(terms, count):
                yield Moved(count, tuple(term for pair in turned for term in pair))
        return
    for words in chance.stream.words(len(terms), chance.draws):
        for row in words.tolist():
            turned = tuple(pair for pair, word in zip(terms, row, strict=True) if word >= 2**63)
            yield Moved(len(turned), tuple(term for pair in turned for term in pair))


def standardised_groups(first: Values, second: Values, null_value: float) -> float:
    """Give the same standardised difference from exact sums."""
    one, two = exact_moments(first), exact_moments(second)
    n, away = one.n + two.n, one.mean - two.mean - Fraction(null_value)
    between = away**2 * one.n * two.n / n
    return _root(between * (n - 1) / (one.squares + two.squares + between), negative=away < 0)


def standardised_pairs(first: Values, second: Values, null_value: float) -> float:
    """Give the same standardised sum from exact sums."""
    found = exact_moments_of_differences(first, second)
    mean = found.mean - Fraction(null_value)
    return _root(found.n**2 * mean**2 / (found.squares + found.n * mean**2), negative=mean < 0)


def _root(square: Fraction, *, negative: bool) -> float:
    root = FIFTY_DIGITS.sqrt(FIFTY_DIGITS.divide(Decimal(square.numerator), Decimal(square.denominator)))
    return float(-root if negative else root)
