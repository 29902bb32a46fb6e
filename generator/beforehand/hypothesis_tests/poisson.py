"""The Poisson distribution in double precision: what so many events say of the number to be expected."""

import math
from dataclasses import dataclass

import numpy as np
from scipy import special

from beforehand.hypothesis_tests.beside import Exposure
from beforehand.hypothesis_tests.contract import Values
from beforehand.spelling import number

# Said only where it would happen to true Poisson counts once in a thousand samples.
RARE = 1e-3
FEWEST_ROWS = 10


@dataclass(frozen=True)
class Rate:
    """Events of one group, and the amount in which they were counted."""

    events: int
    exposure: float
    rows: int

    @classmethod
    def of(cls, counts: Values, exposure: Values) -> "Rate":
        """Add up the rows of a group."""
        return cls(int(counts.sum()), math.fsum(exposure), counts.size)


def at_least(events: int, expected: float) -> float:
    """Give P(X >= events), by the incomplete gamma function; small values to all their digits."""
    return float(special.gammainc(events, expected)) if events else 1.0


def at_most(events: int, expected: float) -> float:
    """Give P(X <= events)."""
    return float(special.gammaincc(events + 1, expected))


def expected_at_lower(events: int, tail: float) -> float:
    """Give the expected number at which P(X >= events) is the tail (Garwood 1936)."""
    return float(special.gammaincinv(events, tail)) if events else 0.0


def expected_at_upper(events: int, tail: float) -> float:
    """Give the expected number at which P(X <= events) is the tail."""
    return float(special.gammainccinv(events + 1, tail))


def scattered(counts: tuple[Values, ...], exposure: Exposure) -> tuple[str, ...]:
    """Say where the counts of single rows scatter more than Poisson counts with the rate of their group do."""
    groups = [(x, t) for x, t in zip(counts, exposure, strict=True) if x.sum()]
    df = sum(x.size - 1 for x, _ in groups)
    if df + len(groups) < FEWEST_ROWS:
        return ()
    squares = 0.0
    for x, t in groups:
        expected = t * (x.sum() / t.sum())
        squares += float(np.sum((x - expected) ** 2 / expected))
    if float(special.chdtrc(df, squares)) > RARE:
        return ()
    return (
        f"The counts of single rows scatter about {number(squares / df, 2)} times as much as Poisson counts do, which "
        "chance alone would bring about in less than 1 of 1000 samples: p and interval are then too small.",
    )
