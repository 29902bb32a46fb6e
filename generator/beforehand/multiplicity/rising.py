"""A share of the level that never falls while the level rises, and the smallest level at which it is enough."""

from dataclasses import dataclass

import numpy as np

from beforehand.multiplicity.contract import Vector
from beforehand.multiplicity.decision import is_rejected


@dataclass(frozen=True)
class RisingShare:
    """A step function of the level; both arrays have shape (k,) and are ascending."""

    at: Vector
    """The levels from which on each share holds, the first of them 0."""
    share: Vector
    """The shares of the level."""

    @classmethod
    def fixed(cls, share: float) -> "RisingShare":
        """Give the same share at every level."""
        return cls(np.zeros(1), np.array([share]))

    def at_level(self, level: float) -> float:
        """Give the share that holds at a level.

        Parameters
        ----------
        level : float
            The level; whoever is rejected at it has been rejected.
        """
        return float(self.share[np.count_nonzero(is_rejected(self.at, level)) - 1])

    def first_level(self, p: Vector) -> Vector:
        """Give for each p the smallest level a with p <= share(a) x a, capped at 1.

        Parameters
        ----------
        p : ndarray, shape (m,)
            Adjusted p-values within a family that is tested at share(a) x a.

        Returns
        -------
        ndarray, shape (m,)
            The smallest of max(at_j, p / share_j) over all steps j: one of the two steps about the place where
            at_j x share_j reaches p. A share of 0 rejects nothing, whatever p is.
        """
        positive = self.share > 0
        at, share = self.at[positive], self.share[positive]
        if not share.size:
            return np.ones_like(p)
        first = np.searchsorted(at * share, p)
        from_the_step = np.append(at, np.inf)[first]
        before = np.where(first > 0, p / share[np.maximum(first - 1, 0)], np.inf)
        found: Vector = np.minimum(np.minimum(from_the_step, before), 1.0)
        return found

    def times(self, other: "RisingShare") -> "RisingShare":
        """Give the share of a share.

        Parameters
        ----------
        other : RisingShare
            The share that is passed on of this one.
        """
        at = np.union1d(self.at, other.at)
        parts = (one.share[np.searchsorted(one.at, at, side="right") - 1] for one in (self, other))
        return RisingShare(at, np.multiply(*parts))
