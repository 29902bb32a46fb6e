"""What independence buys: the probability that at least one of several p-values is small."""

from collections.abc import Callable

import numpy as np

from beforehand.multiplicity.contract import Ascending, Ranks, Steps, Vector, Words
from beforehand.spelling import exact

VALID_UNDER = "independence, or two-sided tests of normal statistics with any correlation"


def at_least_one(p: Vector, count: Vector) -> Vector:
    """Give the probability that at least one of ``count`` independent uniform values is as small as p.

    It is 1 - (1 - p)^count, written so that no digit of a small p is lost; p <= it <= count x p, to the last digit.
    """
    with np.errstate(divide="ignore"):  # the logarithm of 0, where p = 1
        probability = -np.expm1(count * np.log1p(-p))
    return np.clip(probability, p, count * p)


def steps_of(p: Ascending, count: Vector, *, taken: Callable[[Vector], Ranks]) -> Steps:
    """Adjust each p by ``at_least_one`` of as many tests as ``count`` says; ``taken`` makes the products monotone.

    The thresholds are 1 - (1 - level)^(1/count).
    """
    factor = np.full(p.size, np.nan)
    product = at_least_one(p, count)
    return Steps.of(
        factor=factor,
        product=product,
        taken_from=taken(product),
        arithmetic=Words(factor, lambda rank: f"1 − (1 − {exact(p[rank])})^{count[rank]:.0f}"),
        critical=lambda level: -np.expm1(np.log1p(-level) / count),
    )
