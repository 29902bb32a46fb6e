"""Simes' test of the sets that closed testing needs: the i largest p-values of a family, for every i at once."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import isotonic_regression

from beforehand.multiplicity.contract import Ascending, Ranks, Vector
from beforehand.multiplicity.decision import is_rejected

VALID_UNDER = "independence, or positive dependence under which Simes' inequality holds for the true nulls"


@dataclass(frozen=True)
class LargestSets:
    """Simes' test of the i largest p-values, item i - 1 for each i from 1 to m.

    Among all sets of one size the one with the largest p-values has the largest Simes p, so these m tests decide what
    closed testing with Simes' test rejects (Meijer, Krebs & Goeman 2019).
    """

    p: Vector
    """Simes p-values, never increasing with the size of the set."""
    rank: Ranks
    """The rank, from 0, of the p-value that gives each."""

    def unrejected(self, level: float) -> int:
        """Give the size of the largest set that Simes' test doesn't reject: h of Goeman and others (2019)."""
        return int(np.count_nonzero(~is_rejected(self.p, level)))


def largest_sets(p: Ascending) -> LargestSets:
    """Compute Simes' p-value of the i largest p-values, for all i in linear time.

    Parameters
    ----------
    p : ndarray, shape (m,)
        p-values, ascending.

    Returns
    -------
    LargestSets
        For each i the smallest i x p_(k) / (k - m + i) over k > m - i.

    Notes
    -----
    The quotient is i times the slope of the line from the point (m - i, 0) to the point (k, p_(k)); the smallest slope
    belongs to the tangent at the lower convex hull of the points (0, 0), (1, p_(1)), ..., (m, p_(m)). Each edge of the
    hull, drawn on, crosses 0 at one place, and these places ascend along the hull: the tangent from (m - i, 0) touches
    where the last edge ends that crosses at or before m - i. Where an edge crosses within rounding of a whole number,
    both neighbours are tried.

    References
    ----------
    Meijer, R. J., Krebs, T. J. P. & Goeman, J. J. (2019). Hommel's procedure in linear time. Biometrical Journal
    61:73-82.
    """
    m = p.size
    if m == 0:
        return LargestSets(p, np.zeros(0, dtype=np.intp))
    hull = _hull(p)
    places = np.arange(m)
    edge = np.repeat(np.arange(hull.last.size), np.diff(hull.first_place, append=m))
    last = hull.last[edge]
    simes = _simes(p, places, last)
    near = np.unique(np.clip([hull.first_place - 1, hull.first_place], 0, m - 1))
    for neighbour in (-1, 1):
        other = hull.last[np.clip(edge[near] + neighbour, 0, hull.last.size - 1)]
        other_simes = _simes(p, near, other)
        better = other_simes < simes[near]
        simes[near[better]], last[near[better]] = other_simes[better], other[better]
    # the place m - i belongs to the set of the i largest
    return LargestSets(np.minimum.accumulate(simes[::-1]), last[::-1] - 1)


@dataclass(frozen=True)
class _Hull:
    """The edges of the lower convex hull of (0, 0) and the points (k, p_(k)), from left to right."""

    last: NDArray[np.intp]
    """The rank, counted from 1, of the point at which each edge ends."""
    first_place: NDArray[np.intp]
    """The first whole number at or after the place where each edge, drawn on, crosses 0."""


def _hull(p: Ascending) -> _Hull:
    # the hull is the greatest convex minorant, whose slopes are the isotonic regression of the increments
    bounds = np.asarray(isotonic_regression(np.diff(p, prepend=0.0)).blocks, dtype=np.intp)
    first, last = bounds[:-1], bounds[1:]
    start = np.where(first > 0, p[first - 1], 0.0)
    rise = p[last - 1] - start
    crossing = first - np.divide(start * (last - first), rise, out=np.zeros(first.size), where=rise > 0)
    first_place = np.maximum.accumulate(np.ceil(np.clip(crossing, 0, p.size)).astype(np.intp))
    first_place[0] = 0
    return _Hull(last, first_place)


def _simes(p: Ascending, place: NDArray[np.intp], last: NDArray[np.intp]) -> Vector:
    """Give i x p_(last) / (last - place) for each place m - i; infinite where the point isn't beyond the place."""
    beyond = last > place
    factor = np.divide(p.size - place, last - place, out=np.ones(place.size), where=beyond)
    return np.where(beyond, factor * p[last - 1], np.inf)
