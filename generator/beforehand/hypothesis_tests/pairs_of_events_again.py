"""The second route for pairs of events: Pearson's chi-square of the fitted three counts, in 120-digit decimals.

The three are the pairs with the event on the first side alone, on the second alone, and the others. Nothing here is
shared with ``pairs_of_events``: no quadratic and no formula of a variance.
"""

from collections import Counter
from dataclasses import dataclass
from decimal import Decimal, localcontext

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.shares_again import DIGITS, FARTHEST, difference_end
from beforehand.hypothesis_tests.two_by_two_again import solve


@dataclass(frozen=True)
class ThreeCounts:
    """Pairs with the event on the first side alone, on the second alone, and all others."""

    first: int
    second: int
    others: int

    @classmethod
    def of(cls, first: NDArray[np.bool_], second: NDArray[np.bool_]) -> "ThreeCounts":
        """Count the pairs one by one."""
        sides = Counter(zip(first.tolist(), second.tolist(), strict=True))
        alone = sides[True, False], sides[False, True]
        return cls(*alone, sides.total() - sum(alone))

    @property
    def pairs(self) -> int:
        """All pairs."""
        return self.first + self.second + self.others

    def z(self, null: Decimal) -> Decimal:
        """Give the score statistic at a difference of shares."""
        if null < 0:
            return -ThreeCounts(self.second, self.first, self.others).z(-null)
        with localcontext(DIGITS):
            alone = self._fitted(null)
            expected = (alone + null, alone, 1 - null - 2 * alone)
            observed = (self.first, self.second, self.others)
            cells = [
                (count - self.pairs * share) ** 2 / (self.pairs * share)
                for count, share in zip(observed, expected, strict=True)
                if share
            ]
            side = (self.first - self.second - self.pairs * null).compare(0)
            return side * sum(cells, Decimal(0)).sqrt()

    def interval(self, critical: Decimal) -> Interval:
        """Give the differences at which z is the critical value on either side."""
        with localcontext(DIGITS):
            observed = Decimal(self.first - self.second) / self.pairs
            return Interval(
                -1.0 if observed == -1 else difference_end(self.z, observed, critical),
                1.0 if observed == 1 else difference_end(self.z, observed, -critical),
            )

    def _fitted(self, null: Decimal) -> Decimal:
        """Fit the share of pairs with the event on the second side alone, for a null value of 0 or more."""
        most = (1 - null) / 2

        def share(odds: Decimal) -> Decimal:
            return most * odds / (1 + odds)

        def falling(odds: Decimal) -> Decimal:
            # the derivative of the log likelihood, times the odds' own slope: bounded
            alone = share(odds)
            slope = self.first / (alone + null) + self.second / alone - 2 * self.others / (1 - null - 2 * alone)
            return -slope * odds / (1 + odds) ** 2

        if falling(1 / FARTHEST) >= 0:
            return Decimal(0)
        return most if falling(FARTHEST) <= 0 else share(solve(falling))
