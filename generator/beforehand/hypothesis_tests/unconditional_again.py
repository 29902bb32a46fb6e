"""The second route of Boschloo's test: its polynomial's largest value, enclosed by halving its range.

A polynomial in Bernstein form lies between its smallest and its largest coefficient, and de Casteljau's rule gives the
coefficients on either half of a range (Farouki 2012, Computer Aided Geometric Design 29:379-419). So every bound here
is proved, no peak can be missed, and no binomial probability, grid or derivative is used.
"""

import heapq
from decimal import Decimal
from itertools import accumulate, takewhile

import numpy as np

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.two_by_two_again import EQUALLY_PROBABLE, EXACT, Weights, total

# The enclosure is this narrow, relative to what it encloses.
WIDTH = 1e-11


def conditional_above(events: int, first: int, second: int, all_events: int) -> Decimal:
    """Give the one-sided p of Fisher's exact test."""
    return Weights.of(first, second, all_events).above(events, Decimal(1))


def coefficients(first: int, second: int, observed: Decimal) -> Values:
    """Give the conditional probabilities of the tables as extreme as the observed one, for each number of events."""
    limit = EXACT.multiply(observed, EQUALLY_PROBABLE)
    return np.array([_largest_tail(first, second, m, limit) for m in range(first + second + 1)])


def _largest_tail(first: int, second: int, all_events: int, limit: Decimal) -> float:
    weights = Weights.of(first, second, all_events).weight
    whole = EXACT.multiply(limit, total(list(weights)))
    small = list(takewhile(lambda tail: tail <= whole, accumulate(reversed(weights), EXACT.add)))
    return float(EXACT.divide(small[-1], total(list(weights)))) if small else 0.0


def largest_value(coefficient: Values) -> float:
    """Enclose the largest value of the polynomial on [0, 1], and give the lower bound, which is one of its values."""
    reached = float(max(coefficient[0], coefficient[-1]))
    ranges = [(-float(coefficient.max()), 0, coefficient)]
    numbered = 0
    while ranges and -ranges[0][0] > reached * (1 + WIDTH):
        _, _, widest = heapq.heappop(ranges)
        for half in halves(widest):
            reached = max(reached, float(half[0]), float(half[-1]))
            numbered += 1  # two ranges with the same bound are told apart by their number
            heapq.heappush(ranges, (-float(half.max()), numbered, half))
    return reached


def halves(coefficient: Values) -> list[Values]:
    """Give the coefficients on the lower and the upper half of a range, by de Casteljau's rule."""
    lower, upper = np.empty_like(coefficient), np.empty_like(coefficient)
    current, last = coefficient, coefficient.size - 1
    for place in range(coefficient.size):
        lower[place], upper[last - place] = current[0], current[-1]
        current = (current[1:] + current[:-1]) / 2
    return [lower, upper]
