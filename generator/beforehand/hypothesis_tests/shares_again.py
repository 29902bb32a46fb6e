"""The second route of the score tests of two shares: Pearson's chi-square of the fitted table, in 120-digit decimals.

The score statistic is the root of the sum, over both groups, of (observed - fitted events)² / (n p q). Nothing here is
shared with ``shares``: one fit by false position serves difference, ratio and odds ratio, and no formula of a variance.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass
from decimal import Context, Decimal, localcontext
from typing import Literal

from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.two_by_two_again import solve

Comparison = Literal["difference", "ratio", "odds"]

# A fitted share nearer to an end of its range than this, as odds within the range, lies on the end; digits enough to
# tell such a share from 1.
FARTHEST = Decimal("1e50")
DIGITS = Context(prec=120, Emin=-(10**15), Emax=10**15)


@dataclass(frozen=True)
class Group:
    """Events and units of one group."""

    events: int
    units: int

    @property
    def share(self) -> Decimal:
        """The observed share."""
        return Decimal(self.events) / self.units

    @property
    def spared(self) -> int:
        """The units without the event."""
        return self.units - self.events

    def away(self, share: Decimal) -> Decimal:
        """Give the observed events less those that a share expects."""
        return self.events - self.units * share

    def squared(self, share: Decimal) -> Decimal:
        """Give this group's part of Pearson's chi-square; none where the share leaves no choice."""
        variance = self.units * share * (1 - share)
        return self.away(share) ** 2 / variance if variance else Decimal(0)

    def limit(self, z: Decimal) -> Decimal:
        """Give the share p at which n (observed - p)² = z² p (1 - p), above the observed one for z > 0.

        In the root r of its odds this is a quadratic: spared × r² - z √n r - events = 0.
        """
        half = z * Decimal(self.units).sqrt() / 2
        if not self.spared and z > 0:
            return Decimal(1)
        width = (half * half + self.spared * self.events).sqrt()
        rooted = (half + width) / self.spared if self.spared else self.events / (-2 * half)
        return rooted * rooted / (1 + rooted * rooted)


@dataclass(frozen=True)
class TwoGroups:
    """The events of two groups, compared in one of three ways."""

    first: Group
    second: Group
    comparison: Comparison
    small_sample: bool

    def z(self, null: Decimal) -> Decimal:
        """Give the score statistic at a null value: a difference, a ratio or an odds ratio."""
        with localcontext(DIGITS):
            second = self._fitted(null)
            squared = self.first.squared(self._first(second, null)) + self.second.squared(second)
            if self.small_sample:
                units = self.first.units + self.second.units
                squared = squared * (units - 1) / units
            return (self.first.share - self._first(self.second.share, null)).compare(0) * squared.sqrt()

    def interval(self, critical: Decimal) -> Interval:
        """Give the null values at which z is the critical value on either side."""
        least, most = self._least(), self._most()
        return Interval(
            self._end(critical) if least is None else least,
            self._end(-critical) if most is None else most,
        )

    def added_squares(self, critical: Decimal) -> Interval:
        """Give Newcombe's interval: the distances of both shares from their score limits, squared and added."""
        with localcontext(DIGITS):
            p1, p2 = self.first.share, self.second.share
            down = (p1 - self.first.limit(-critical)) ** 2 + (self.second.limit(critical) - p2) ** 2
            up = (self.first.limit(critical) - p1) ** 2 + (p2 - self.second.limit(-critical)) ** 2
            return Interval(float(p1 - p2 - down.sqrt()), float(p1 - p2 + up.sqrt()))

    def _end(self, critical: Decimal) -> float:
        with localcontext(DIGITS):
            if self.comparison == "difference":
                return difference_end(self.z, self.first.share - self.second.share, critical)
            return float(solve(lambda null: critical - self.z(null)))

    def _least(self) -> float | None:
        """Give the lower end where no null value is too small for these counts."""
        if self.comparison == "difference":
            return -1.0 if not self.first.events and not self.second.spared else None
        return 0.0 if not self.first.events or (self.comparison == "odds" and not self.second.spared) else None

    def _most(self) -> float | None:
        """Give the upper end where no null value is too large."""
        if self.comparison == "difference":
            return 1.0 if not self.first.spared and not self.second.events else None
        return math.inf if not self.second.events or (self.comparison == "odds" and not self.first.spared) else None

    def _first(self, second: Decimal, null: Decimal) -> Decimal:
        """Give the share of the first group that belongs to one of the second."""
        match self.comparison:
            case "difference":
                return second + null
            case "ratio":
                return second * null
            case "odds":
                return null * second / (null * second + (1 - second))

    def _fitted(self, null: Decimal) -> Decimal:
        """Fit the share of the second group by maximum likelihood."""
        low, high = Decimal(0), Decimal(1)
        if self.comparison == "difference":
            low, high = max(low, -null), min(high, 1 - null)
        elif self.comparison == "ratio":
            high = min(high, 1 / null)

        def share(odds: Decimal) -> Decimal:
            return low + (high - low) * odds / (1 + odds)

        def falling(odds: Decimal) -> Decimal:
            # times the odds' own slope: bounded, so false position gets on
            return -self._excess(share(odds), null) * odds / (1 + odds) ** 2

        if falling(1 / FARTHEST) >= 0:
            return low
        return high if falling(FARTHEST) <= 0 else share(solve(falling))

    def _excess(self, second: Decimal, null: Decimal) -> Decimal:
        """Give the derivative of the log likelihood of both groups along the share of the second."""
        first = self._first(second, null)
        if self.comparison == "odds":  # the slope of the first share along the second is p1 q1 / (p2 q2)
            return (self.first.away(first) + self.second.away(second)) / (second * (1 - second))
        slope = null if self.comparison == "ratio" else Decimal(1)
        one, two = (group.away(at) / (at * (1 - at)) for group, at in ((self.first, first), (self.second, second)))
        return one * slope + two


def difference_end(z: Callable[[Decimal], Decimal], observed: Decimal, critical: Decimal) -> float:
    """Find the difference at which z, which falls along the null values, is the critical value.

    What is searched is the way from the observed difference to -1 or 1, so a near end keeps its digits.
    """
    side = -1 if critical > 0 else 1
    room = 1 - side * observed

    def null(odds: Decimal) -> Decimal:
        return observed + side * room * odds / (1 + odds)

    return float(null(solve(lambda odds: -side * z(null(odds)) - abs(critical))))
