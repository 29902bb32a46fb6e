"""Which values count as tied, and the ranks that tied values share. Both routes of a rank test ask here."""

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.refusals import UNIT

Ranks = NDArray[np.int64]


def settled(values: Values, error: Values) -> Values:
    """Make values equal that differ by no more than rounding.

    0.3 - 0.2 and 0.2 - 0.1 are the same difference to whoever typed these numbers, but not as doubles. Neighbours
    closer than the sum of their errors become one value, and what is as near to 0 becomes 0.

    Parameters
    ----------
    values : ndarray, shape (n,)
        Values in any unit.
    error : ndarray, shape (n,)
        By how much each may be off through rounding, same unit.

    Returns
    -------
    ndarray, shape (n,)
        The values in their order, each replaced by the one nearest to 0 of those it can't be told from, so that
        values and their negatives settle alike.
    """
    order = np.argsort(values, kind="stable")
    ascending, allowed = values[order], error[order]
    new = np.r_[True, np.diff(ascending) > allowed[1:] + allowed[:-1]]
    start = np.flatnonzero(new)
    smallest, largest = ascending[start], ascending[np.r_[start[1:], values.size] - 1]
    nearest = np.where(smallest > 0, smallest, largest)
    nearest[np.logical_or.reduceat(np.abs(ascending) <= allowed, start)] = 0.0
    result = np.empty_like(values)
    result[order] = nearest[np.cumsum(new) - 1]
    return result


def rounding(*parts: Values | float) -> Values:
    """Bound the rounding error of a sum or difference: each part, and the result, were rounded once."""
    return 2 * UNIT * np.asarray(sum(np.abs(part) for part in parts), dtype=np.float64)


def doubled_midranks(values: Values) -> Ranks:
    """Give twice the mean rank that tied values share: whole numbers, so sums of them are exact."""
    _, group, size = np.unique(values, return_inverse=True, return_counts=True)
    ranks: Ranks = (2 * np.cumsum(size) - size + 1)[group]
    return ranks
