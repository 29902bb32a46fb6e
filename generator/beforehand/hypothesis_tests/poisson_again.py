"""The second route of the Poisson distribution: sums outwards from the observed count in 40-digit decimals.

Nothing here is shared with ``poisson``: no gamma function, no inverse function.
"""

from collections.abc import Iterator
from decimal import Decimal
from fractions import Fraction
from typing import Any

from beforehand.hypothesis_tests.binomial_again import NEGLIGIBLE
from beforehand.hypothesis_tests.two_by_two_again import EXACT, solve, total


def exact_total(values: Any) -> Decimal:
    """Add up doubles without any rounding, then round to 40 digits."""
    whole = sum((Fraction(value) for value in values.tolist()), Fraction(0))
    return EXACT.divide(Decimal(whole.numerator), Decimal(whole.denominator))


def at_least(events: int, expected: Decimal) -> Decimal:
    """Give P(X >= events)."""
    above, below = list(_upwards(events, expected)), list(_downwards(events, expected))
    return EXACT.divide(total(above), total([*above, *below[1:]]))


def at_most(events: int, expected: Decimal) -> Decimal:
    """Give P(X <= events)."""
    above, below = list(_upwards(events, expected)), list(_downwards(events, expected))
    return EXACT.divide(total(below), total([*above[1:], *below]))


def _upwards(events: int, expected: Decimal) -> Iterator[Decimal]:
    """Give the probabilities of events, events + 1, ... relative to that of events, as long as they matter."""
    term, x = Decimal(1), events
    while True:
        yield term
        x += 1
        ratio = EXACT.divide(expected, Decimal(x))
        term = EXACT.multiply(term, ratio)
        if ratio < 1 and term < NEGLIGIBLE:
            return


def _downwards(events: int, expected: Decimal) -> Iterator[Decimal]:
    term = Decimal(1)
    for x in range(events, -1, -1):
        yield term
        ratio = EXACT.divide(Decimal(x), expected)
        term = EXACT.multiply(term, ratio)
        if ratio < 1 and term < NEGLIGIBLE:
            return


def expected_at(events: int, tail: float, *, upper: bool) -> Decimal:
    """Give the expected number at which P(X <= events) (upper) or P(X >= events) is the tail.

    It is searched in steps of a few standard errors of its logarithm: far away, the sums would be long.
    """
    log_tail, centre = EXACT.ln(Decimal(tail)), Decimal(events) + Decimal("0.5")
    step = 4 / EXACT.sqrt(centre)

    def expected(factor: Decimal) -> Decimal:
        return EXACT.multiply(centre, EXACT.exp(EXACT.multiply(step, EXACT.ln(factor))))

    def excess(factor: Decimal) -> Decimal:
        if upper:
            return EXACT.subtract(log_tail, EXACT.ln(at_most(events, expected(factor))))
        return EXACT.subtract(EXACT.ln(at_least(events, expected(factor))), log_tail)

    return expected(solve(excess))
