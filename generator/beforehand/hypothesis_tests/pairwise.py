"""The k-th smallest of all sums of a row value and a column value, without writing them all down."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.refusals import UNIT

Places = NDArray[np.intp]


@dataclass(frozen=True)
class PairwiseSums:
    """All sums ``rows[i] + columns[j]`` with ``j >= start[i]``; columns ascending.

    Differences x - y are sums of x and -y; the sums of one sample with itself, each pair once, have ``start[i] = i``.
    """

    rows: Values
    columns: Values
    start: Places

    @classmethod
    def of_differences(cls, first: Values, second: Values) -> "PairwiseSums":
        """Form first[i] - second[j], all pairs."""
        return cls(first, np.sort(-second), np.zeros(first.size, dtype=np.intp))

    @classmethod
    def of_sample(cls, values: Values) -> "PairwiseSums":
        """Form values[i] + values[j], each pair once and each value with itself."""
        ascending = np.sort(values)
        return cls(ascending, ascending, np.arange(values.size))

    @property
    def size(self) -> int:
        """How many sums there are."""
        return int((self.columns.size - self.start).sum())

    def kth(self, k: int) -> float:
        """Give the k-th smallest sum, k from 1.

        Each round takes the weighted median of the row medians as pivot, and so leaves out at least a quarter of the
        sums still in question (Johnson and Mizoguchi 1978, SIAM Journal on Computing 7:147-153): about n log n each.
        """
        low, high = self.start.copy(), np.full_like(self.start, self.columns.size)
        while True:
            pivot = self._pivot(low, high)
            less = self._first_column(pivot, strictly=False)
            more = self._first_column(pivot, strictly=True)
            if k <= int((less - self.start).sum()):
                high = np.minimum(high, less)
            elif k > int((more - self.start).sum()):
                low = np.maximum(low, more)
            else:
                return self._smallest_like(pivot)

    def median(self) -> float:
        """Give the median of all sums."""
        middle = (self.size + 1) // 2
        if self.size % 2:
            return self.kth(middle)
        return (self.kth(middle) + self.kth(middle + 1)) / 2

    def _smallest_like(self, pivot: float) -> float:
        """Give the smallest of the sums that differ from the pivot by no more than rounding: one value for all."""
        size = float(np.abs(self.rows).max() + np.abs(self.columns).max())
        first = self._first_column(pivot - 8 * UNIT * size, strictly=False)
        there = first < self.columns.size
        return float((self.rows[there] + self.columns[first[there]]).min())

    def _pivot(self, low: Places, high: Places) -> float:
        left = np.flatnonzero(high > low)
        medians = self.rows[left] + self.columns[(low[left] + high[left] - 1) // 2]
        order = np.argsort(medians)
        weight = np.cumsum((high - low)[left][order])
        return float(medians[order][np.searchsorted(weight, weight[-1] / 2)])

    def _first_column(self, pivot: float, *, strictly: bool) -> Places:
        """Give for each row the first column whose sum is at least the pivot (strictly: above it), by halving."""
        low, high = self.start.copy(), np.full_like(self.start, self.columns.size)
        while (open_rows := low < high).any():
            middle = (low + high) // 2
            sums = self.rows + self.columns[np.minimum(middle, self.columns.size - 1)]
            short = (sums <= pivot if strictly else sums < pivot) & open_rows
            low = np.where(short, middle + 1, low)
            high = np.where(open_rows & ~short, middle, high)
        return low
