"""How many of any chosen hypotheses are false at least: simultaneous lower bounds by closed testing."""

from dataclasses import dataclass, field
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from beforehand.multiplicity.contract import Ascending, Ordered, Ranks
from beforehand.multiplicity.decision import TOLERANCE, is_rejected
from beforehand.multiplicity.entries.holm import holm
from beforehand.multiplicity.simes import VALID_UNDER, largest_sets

Local = Literal["simes", "bonferroni"]


@dataclass(frozen=True)
class TrueDiscoveries:
    """Lower bounds on the number of true discoveries, that is of false nulls, in any set of hypotheses.

    With probability at least 1 - level all of them hold together, so the sets may be chosen after looking, as many and
    as often as anybody likes.
    """

    level: float
    local: Local
    """The test of each intersection of nulls."""
    valid_under: str
    """The dependence between p-values under which the bounds hold."""
    unrejected: int
    """The size h of the largest set of hypotheses that the closed test doesn't reject."""
    category: NDArray[np.int64] = field(repr=False)
    """For each hypothesis, in the order of p, the smallest whole number u with h x p <= u x level; m + 1 if none."""
    order: Ranks = field(repr=False)
    """The ascending order of p."""

    def of(self, subset: ArrayLike) -> int:
        """Give the least number of true discoveries in one set.

        Parameters
        ----------
        subset : array_like
            The places of its hypotheses in p, counted from 0, or a truth for each hypothesis.

        Returns
        -------
        int
            From 0 to the size of the set.

        Raises
        ------
        ValueError
            When a place is none of p.

        Notes
        -----
        The largest 1 - u + (number in the set with h p <= u level) over u from 1 to the size of the set (Goeman,
        Meijer, Krebs & Solari 2019, theorem 1); for Bonferroni's test u = 1 alone.
        """
        category = self.category[self._places(subset)]
        size = category.size
        if size == 0:
            return 0
        up_to = np.cumsum(np.bincount(np.minimum(category, size + 1), minlength=size + 1)[1 : size + 1])
        if self.local == "bonferroni":
            return int(up_to[0])
        return int(np.max(up_to - np.arange(size)))

    def curve(self) -> NDArray[np.int64]:
        """Give the bound for the k hypotheses with the smallest p, for every k from 1 to m.

        Returns
        -------
        ndarray of int, shape (m,)
            Item k - 1 equals ``of`` the k first in ascending order; all of them in linear time.
        """
        m = self.category.size
        category = self.category[self.order]
        ranks = np.arange(1, m + 1)
        if self.local == "bonferroni":
            return np.minimum(ranks, np.count_nonzero(category <= 1))
        up_to = np.cumsum(np.bincount(category, minlength=m + 2)[1 : m + 1])
        # below the category of the k-th smallest p the set holds all that meet u, from there on all k
        below = np.append(0, np.maximum.accumulate(up_to - np.arange(m)))[np.minimum(category - 1, ranks)]
        bound: NDArray[np.int64] = np.maximum(below, ranks + 1 - category)
        return bound

    def _places(self, subset: ArrayLike) -> Ranks:
        chosen = np.asarray(subset)
        if chosen.dtype == bool and chosen.shape == self.category.shape:
            return np.flatnonzero(chosen)
        places = np.unique(chosen).astype(np.intp)
        if np.any(places != np.unique(chosen)) or np.any((places < 0) | (places >= self.category.size)):
            raise ValueError(f"a set names places from 0 to {self.category.size - 1}, or a truth for each hypothesis")
        return places


def true_discoveries(p: ArrayLike | Ordered, *, level: float, local: Local = "simes") -> TrueDiscoveries:
    """Bound from below how many nulls are false in any set of hypotheses, for all sets at once.

    Closed testing (Goeman & Solari 2011): of a set so many nulls are false at least as hypotheses have to be left out
    before the closed test no longer rejects what is left. With Simes' test a set can hold true discoveries although no
    single hypothesis is rejected. With Bonferroni's test the bound is the number that Holm's procedure rejects in the
    set, and holds under any dependence.

    Parameters
    ----------
    p : array_like, shape (m,), or Ordered
        Unadjusted p-values of one family, in any order.
    level : float
        The probability with which any bound may be wrong, between 0 and 1.
    local : {"simes", "bonferroni"}
        The test of each intersection of nulls.

    Returns
    -------
    TrueDiscoveries
        Bounds for one set (``of``) and for the k smallest p-values, each k (``curve``).

    Raises
    ------
    ValueError
        When a p is outside 0 to 1 or missing, or the level isn't between 0 and 1.

    References
    ----------
    Goeman, J. J. & Solari, A. (2011). Multiple testing for exploratory research. Statistical Science 26:584-597.
    Goeman, J. J., Meijer, R. J., Krebs, T. J. P. & Solari, A. (2019). Simultaneous control of all false discovery
    proportions in large-scale multiple hypothesis testing. Biometrika 106:841-856.
    """
    if not 0 < level < 1:
        raise ValueError(f"a level lies between 0 and 1; found {level}")
    ordered = Ordered.of(p)
    m = ordered.order.size
    unrejected = _unrejected(ordered.ascending, level, local)
    # the tolerance of the one comparison: h p <= u level (1 + 1e-12)
    quotient = np.minimum(unrejected * ordered.ascending / (level * (1 + TOLERANCE)), m + 1)
    category = np.maximum(np.ceil(quotient).astype(np.int64), 1)
    return TrueDiscoveries(
        level=level,
        local=local,
        valid_under=VALID_UNDER if local == "simes" else "any dependence",
        unrejected=unrejected,
        category=ordered.unsorted(category),
        order=ordered.order,
    )


def _unrejected(p: Ascending, level: float, local: Local) -> int:
    if local == "simes":
        return largest_sets(p).unrejected(level)
    return int(np.count_nonzero(~is_rejected(holm.adjust(p).adjusted, level)))
