"""The binomial distribution in double precision: what so many events of so many units say of a share, or of odds."""

import math
from dataclasses import dataclass

import numpy as np
from scipy import special

from beforehand.hypothesis_tests.two_by_two import EQUALLY_PROBABLE, log_sum


@dataclass(frozen=True)
class Share:
    """A share and what is missing from it to 1, each to its own last digit."""

    share: float
    rest: float

    @classmethod
    def of(cls, share: float) -> "Share":
        """Give a share its rest."""
        return cls(share, 1 - share)

    @classmethod
    def of_odds(cls, odds: float) -> "Share":
        """Give the share that has these odds."""
        return cls(odds / (1 + odds), 1 / (1 + odds))

    @property
    def other(self) -> "Share":
        """The share of what this one leaves out."""
        return Share(self.rest, self.share)

    @property
    def odds(self) -> float:
        """The share divided by the rest."""
        return self.share / self.rest if self.rest else math.inf


@dataclass(frozen=True)
class ShareInterval:
    """A two-sided interval for a share."""

    lower: Share
    upper: Share


def at_least(events: int, n: int, share: Share) -> float:
    """Give P(X >= events) of n units, by the incomplete beta function; small values to all their digits."""
    if events <= 0 or events > n:
        return float(events <= 0)
    if share.share <= share.rest:
        return float(special.betainc(events, n - events + 1, share.share))
    return float(special.betaincc(n - events + 1, events, share.rest))


def at_most(events: int, n: int, share: Share) -> float:
    """Give P(X <= events) of n units."""
    return at_least(n - events, n, share.other)


def no_more_probable(events: int, n: int, share: Share) -> float:
    """Give P(a number of events no more probable than the observed one), from logarithms relative to the observed."""
    x = np.arange(n, dtype=np.float64)
    steps = np.log((n - x) / (x + 1)) + (math.log(share.share) - math.log(share.rest))
    below, above = -np.cumsum(steps[:events][::-1])[::-1], np.cumsum(steps[events:])
    terms = np.concatenate([below, [0.0], above])
    return min(1.0, math.exp(log_sum(terms[terms <= math.log1p(EQUALLY_PROBABLE)]) - log_sum(terms)))


def exact_ends(events: int, n: int, tail: float) -> ShareInterval:
    """Give the shares at which each side of the exact test equals the tail (Clopper and Pearson 1934)."""
    others = n - events
    lower, upper = Share(0.0, 1.0), Share(1.0, 0.0)
    if events:
        at = float(special.betaincinv(events, others + 1, tail))
        lower = Share(at, float(special.betainccinv(others + 1, events, tail)))
    if others:
        at = float(special.betaincinv(others, events + 1, tail))
        upper = Share(float(special.betainccinv(events + 1, others, tail)), at)
    return ShareInterval(lower, upper)


def score_ends(events: int, n: int, critical: float) -> ShareInterval:
    """Give the shares from which the observed one lies a critical number of standard errors away (Wilson 1927)."""
    others, squared = n - events, critical**2
    half = critical * math.sqrt(squared + 4 * events * others / n)
    width = 2 * (n + squared)
    far, near = (2 * events + squared + half) / width, (2 * others + squared + half) / width
    # the product of the two ends is events² / (n (n + z²)): the small end keeps its digits
    lower = events**2 / (n * (n + squared)) / far if events else 0.0
    upper_rest = others**2 / (n * (n + squared)) / near if others else 0.0
    return ShareInterval(Share(lower, near), Share(far, upper_rest))
