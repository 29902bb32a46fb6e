"""The second route of the sign tests: exact fractions compared one by one, tails from 40-digit decimals.

Not shared with ``sign_counts``: the comparison with the null value, the binomial distribution (``binomial_again``
names what it does not share), the search for the ends of the interval, and how the ordered values are found. Shared:
what counts as equal.
"""

import math
from decimal import Decimal
from fractions import Fraction
from heapq import nlargest, nsmallest
from statistics import NormalDist, median

from beforehand.hypothesis_tests import binomial_again
from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.location import Interval, Located, Tails
from beforehand.hypothesis_tests.ranks_again import subtracted
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.ties import rounding


def at_least(events: int, n: int) -> float:
    """Give P(X >= events) of n fair coins."""
    return float(binomial_again.at_least(events, n, Decimal(1)))


def located(first: Values, second: Values, asked: Asked, *, zeros: str) -> Located:
    """Judge the median difference by signs, as ``sign_counts.located`` does."""
    differences, errors = subtracted(first, second)
    above = below = 0
    null_value = asked.null_value
    for difference, error in zip(differences, errors, strict=True):
        away = Fraction(difference) - Fraction(asked.null_value)
        if abs(away) <= Fraction(error) + Fraction(float(rounding(asked.null_value))):
            null_value = difference
        elif away > 0:
            above += 1
        else:
            below += 1
    trials = len(differences) if zeros == "against" else above + below
    return Located(
        estimate=median(differences),
        interval=_interval(differences, asked),
        statistic=float(above),
        tails=Tails(at_least(above, trials), at_least(below, trials)),
        null_value=null_value,
    )


def _interval(values: list[float], asked: Asked) -> Interval:
    """Walk from where a normal distribution puts the end to the first ordered value that is kept."""
    n = len(values)
    k = min(n, max(0, round(n / 2 + NormalDist().inv_cdf(asked.tail) * math.sqrt(n) / 2)))
    while k and asked.keeps(at_least(n - k + 1, n)):
        k -= 1
    while not asked.keeps(at_least(n - k, n)):
        k += 1
    if not k:
        return Interval(-math.inf, math.inf)
    return Interval(nsmallest(k, values)[-1], nlargest(k, values)[-1])
