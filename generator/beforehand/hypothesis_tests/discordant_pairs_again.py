"""The second route for pairs whose two sides differ: binomial sums in decimals, and Wilson's limits another way."""

import math
from decimal import Decimal

from beforehand.hypothesis_tests import binomial_again
from beforehand.hypothesis_tests.discordant_pairs import Method
from beforehand.hypothesis_tests.location import Interval, Tails
from beforehand.hypothesis_tests.normal_again import critical, upper_tail
from beforehand.hypothesis_tests.two_by_two_again import EXACT

COUNTED: dict[Method, Decimal] = {"exact": Decimal(1), "mid_p": Decimal("0.5")}


def tails(first: int, second: int, odds: Decimal, method: Method) -> Tails:
    """Give the p-values of both sides at an odds ratio."""
    inverse = EXACT.divide(Decimal(1), odds)
    return Tails(above=_above(first, second, odds, method), below=_above(second, first, inverse, method))


def ends(first: int, second: int, tail: float, method: Method) -> Interval:
    """Give the odds ratios at which a side has the tail as its p."""
    lower = float(_lower(first, second, tail, method)) if first else 0.0
    return Interval(lower, float(1 / _lower(second, first, tail, method)) if second else math.inf)


def _above(first: int, second: int, odds: Decimal, method: Method) -> float:
    if method != "normal":
        return float(binomial_again.at_least(first, first + second, odds, counted=COUNTED[method]))
    rooted = odds.sqrt()
    return upper_tail(float((first / rooted - second * rooted) / Decimal(first + second).sqrt()))


def _lower(first: int, second: int, tail: float, method: Method) -> Decimal:
    if method != "normal":
        return binomial_again.odds_at(first, first + second, tail, counted=COUNTED[method])
    # with r the root of the odds ratio: second × r² + z √(first + second) r - first = 0
    half = critical(tail) * Decimal(first + second).sqrt() / 2
    rooted = first / (half + (half * half + first * second).sqrt())
    return rooted * rooted
