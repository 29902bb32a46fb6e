"""The second route of the binomial distribution: sums outwards from the observed count in 40-digit decimals.

Nothing here is shared with ``binomial``: no beta function, no logarithm of a term, no inverse function.
"""

from collections.abc import Iterator
from decimal import Decimal

from beforehand.hypothesis_tests.two_by_two_again import EQUALLY_PROBABLE, EXACT, solve, total

# Terms that have become so small, relative to the observed one, change no digit of a sum.
NEGLIGIBLE = Decimal("1e-45")
HALF = Decimal("0.5")


def upwards(events: int, n: int, odds: Decimal) -> Iterator[Decimal]:
    """Give the probabilities of events, events + 1, ... relative to that of events, as long as they matter."""
    term = Decimal(1)
    for x in range(events, n + 1):
        yield term
        ratio = EXACT.divide(EXACT.multiply(Decimal(n - x), odds), Decimal(x + 1))
        term = EXACT.multiply(term, ratio)
        if ratio < 1 and term < NEGLIGIBLE:
            return


def downwards(events: int, n: int, odds: Decimal) -> Iterator[Decimal]:
    """Give the probabilities of events, events - 1, ... relative to that of events."""
    return upwards(n - events, n, EXACT.divide(Decimal(1), odds))


def at_least(events: int, n: int, odds: Decimal, *, counted: Decimal = Decimal(1)) -> Decimal:
    """Give P(X >= events); of the observed count itself only a part is ``counted`` (a half: mid-p)."""
    above, below = list(upwards(events, n, odds)), list(downwards(events, n, odds))
    return EXACT.divide(total([counted, *above[1:]]), total([*above, *below[1:]]))


def no_more_probable(events: int, n: int, odds: Decimal) -> Decimal:
    """Give P(a number of events no more probable than the observed one)."""
    terms = [*upwards(events, n, odds), *list(downwards(events, n, odds))[1:]]
    return EXACT.divide(total([term for term in terms if term <= EQUALLY_PROBABLE]), total(terms))


def odds_at(events: int, n: int, tail: float, *, counted: Decimal = Decimal(1)) -> Decimal:
    """Give the odds at which P(X >= events) is the tail, for one event or more.

    The odds are searched in steps of a few standard errors of their logarithm: far away, the sums would be long.
    """
    log_tail, centre = EXACT.ln(Decimal(tail)), Decimal(2 * events + 1) / Decimal(2 * (n - events) + 1)
    step = 4 / EXACT.sqrt(1 + Decimal(events) * Decimal(n - events) / n)

    def odds(factor: Decimal) -> Decimal:
        return EXACT.multiply(centre, EXACT.exp(EXACT.multiply(step, EXACT.ln(factor))))

    def excess(factor: Decimal) -> Decimal:
        return EXACT.subtract(EXACT.ln(at_least(events, n, odds(factor), counted=counted)), log_tail)

    return odds(solve(excess))
