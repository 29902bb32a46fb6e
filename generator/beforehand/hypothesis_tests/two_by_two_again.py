"""The second route of Fisher's exact test: 2 x 2 tables in 40-digit decimal arithmetic.

Nothing here is shared with ``two_by_two``: weights are products from the end of the distribution, polynomials in the
odds ratio; no weight has its logarithm taken, and no root finder of scipy is used.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass
from decimal import Context, Decimal
from itertools import accumulate

EXACT = Context(prec=40, Emin=-(10**15), Emax=10**15)
EQUALLY_PROBABLE = Decimal("1.000000001")


@dataclass(frozen=True)
class Weights:
    """C(first, x) C(second, all - x) up to a factor, from the fewest possible events to the most."""

    least: int
    weight: tuple[Decimal, ...]

    @classmethod
    def of(cls, first: int, second: int, all_events: int) -> "Weights":
        """Multiply from one end of the distribution to the other."""
        least, most = max(0, all_events - second), min(first, all_events)
        ratios = (
            EXACT.divide(Decimal((first - x) * (all_events - x)), Decimal((x + 1) * (second - all_events + x + 1)))
            for x in range(least, most)
        )
        return cls(least, tuple(accumulate(ratios, EXACT.multiply, initial=Decimal(1))))

    def terms(self, odds_ratio: Decimal) -> list[Decimal]:
        """Give weight times odds ratio to the power of x, up to a factor."""
        powers = accumulate((odds_ratio for _ in self.weight[1:]), EXACT.multiply, initial=Decimal(1))
        return [EXACT.multiply(weight, power) for weight, power in zip(self.weight, powers, strict=True)]

    def above(self, events: int, odds_ratio: Decimal) -> Decimal:
        """Give P(X >= events)."""
        terms = self.terms(odds_ratio)
        return EXACT.divide(total(terms[events - self.least :]), total(terms))

    def no_more_probable(self, events: int, odds_ratio: Decimal) -> Decimal:
        """Give P(a table no more probable than the one with these events)."""
        terms = self.terms(odds_ratio)
        most = EXACT.multiply(terms[events - self.least], EQUALLY_PROBABLE)
        return EXACT.divide(total([term for term in terms if term <= most]), total(terms))

    def estimate(self, events: int) -> float:
        """Give the odds ratio at which E(X) is the observed number of events."""
        if events in (self.least, self.least + len(self.weight) - 1):
            return 0.0 if events == self.least else math.inf
        return float(solve(lambda ratio: self._mean(ratio) - events))

    def lower(self, events: int, tail: float) -> float:
        """Give the odds ratio at which P(X >= events) is the tail."""
        if events == self.least:
            return 0.0
        log_tail = EXACT.ln(Decimal(tail))
        return float(solve(lambda ratio: EXACT.subtract(EXACT.ln(self.above(events, ratio)), log_tail)))

    def _mean(self, odds_ratio: Decimal) -> Decimal:
        terms = self.terms(odds_ratio)
        moments = [EXACT.multiply(term, Decimal(self.least + i)) for i, term in enumerate(terms)]
        return EXACT.divide(total(moments), total(terms))


def total(terms: list[Decimal]) -> Decimal:
    """Add decimals to 40 digits."""
    result = Decimal(0)
    for term in terms:
        result = EXACT.add(result, term)
    return result


def solve(increasing: Callable[[Decimal], Decimal]) -> Decimal:
    """Find the odds ratio at which an increasing function is 0, by false position on the logarithmic scale.

    By the Illinois rule the value at an end that stays twice is halved, so both ends move; it is over when a step
    changes the odds ratio by less than 1e-15 of itself.
    """
    low, high = Decimal(-1), Decimal(1)
    while increasing(EXACT.exp(low)) > 0:
        low *= 2
    while increasing(EXACT.exp(high)) < 0:
        high *= 2
    at_low, at_high = increasing(EXACT.exp(low)), increasing(EXACT.exp(high))
    here, moved_high = low, False
    for _ in range(300):
        before, here = here, (low * at_high - high * at_low) / (at_high - at_low)
        value = increasing(EXACT.exp(here))
        if value == 0 or abs(here - before) < Decimal("1e-15"):
            break
        if value > 0:
            at_low /= 2 if moved_high else 1
            high, at_high, moved_high = here, value, True
        else:
            at_high /= 1 if moved_high else 2
            low, at_low, moved_high = here, value, False
    return EXACT.exp(here)
