"""Pairs whose two sides differ, in double precision: exactly, by mid-p, or by a normal approximation.

Given their number, those with the event on the first side alone are binomial, and the odds of that are the odds ratio
within pairs.
"""

import math
from typing import Literal

from beforehand.hypothesis_tests import binomial
from beforehand.hypothesis_tests.location import Interval, Tails
from beforehand.hypothesis_tests.normal import critical, upper_tail
from beforehand.hypothesis_tests.pairs_of_events import Discordant
from beforehand.hypothesis_tests.two_by_two import increasing_root

Method = Literal["exact", "mid_p", "normal"]


def tails(pairs: Discordant, odds: float, method: Method) -> Tails:
    """Give the p-values of both sides at an odds ratio."""
    swapped = Discordant(pairs.second, pairs.first, pairs.pairs)
    return Tails(above=_above(pairs, odds, method), below=_above(swapped, 1 / odds, method))


def ends(pairs: Discordant, tail: float, method: Method) -> Interval:
    """Give the odds ratios at which a side has the tail as its p; 0 and infinite where no pair speaks against them."""
    swapped = Discordant(pairs.second, pairs.first, pairs.pairs)
    lower = _lower(pairs, tail, method) if pairs.first else 0.0
    return Interval(lower, 1 / _lower(swapped, tail, method) if pairs.second else math.inf)


def _above(pairs: Discordant, odds: float, method: Method) -> float:
    share = binomial.Share.of_odds(odds)
    match method:
        case "exact":
            return binomial.at_least(pairs.first, pairs.total, share)
        case "mid_p":
            counts = (pairs.first, pairs.first + 1)
            return sum(binomial.at_least(count, pairs.total, share) for count in counts) / 2
        case "normal":
            return upper_tail((pairs.first - pairs.second * odds) / math.sqrt(pairs.total * odds))


def _lower(pairs: Discordant, tail: float, method: Method) -> float:
    match method:
        case "exact":
            return binomial.exact_ends(pairs.first, pairs.total, tail).lower.odds
        case "mid_p":
            return math.exp(increasing_root(lambda log: math.log(_above(pairs, math.exp(log), method) / tail)))
        case "normal":
            return binomial.score_ends(pairs.first, pairs.total, critical(tail)).lower.odds
