"""Values above and below a null value, counted: p at any null value, and the null values that are kept."""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from beforehand.hypothesis_tests import binomial
from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.location import Located, Tails, kept_by_count
from beforehand.hypothesis_tests.rank_signs import Differences
from beforehand.hypothesis_tests.refusals import count
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.ties import rounding
from beforehand.terms import Alternative

Zeros = Literal["dropped", "against"]

FAIR = binomial.Share(0.5, 0.5)


@dataclass(frozen=True)
class Signs:
    """How many values lie above the null value, how many below, and how many equal it but for rounding."""

    above: int
    below: int
    equal: int
    zeros: Zeros
    """Whether those that equal the null value are dropped, or count against either side."""

    def __post_init__(self) -> None:
        if self.zeros not in ("dropped", "against"):
            raise ValueError(f"zeros is dropped or against; found {self.zeros!r}")

    @classmethod
    def of(cls, sample: Differences, null_value: float, zeros: Zeros) -> "Signs":
        """Count the values on both sides of a null value."""
        away, equal = sample.values - null_value, at_null(sample, null_value)
        above = int(np.count_nonzero(~equal & (away > 0)))
        return cls(above, int(np.count_nonzero(~equal)) - above, int(np.count_nonzero(equal)), zeros)

    @property
    def trials(self) -> int:
        """How many values are counted."""
        return self.above + self.below + (self.equal if self.zeros == "against" else 0)

    def remark(self, noun: str) -> str:
        """Say from which distribution p is taken, and what became of the values that equal the null value."""
        one = self.equal == 1
        if not self.equal:
            return f"Exact binomial distribution; no {noun} equals the null value."
        treated = "dropped" if self.zeros == "dropped" else "counted against either side"
        return (
            f"Exact binomial distribution; {count(self.equal, noun)} {'equals' if one else 'equal'} the null value and "
            f"{'is' if one else 'are'} {treated}."
        )


def at_null(sample: Differences, null_value: float) -> np.ndarray[tuple[int], np.dtype[np.bool_]]:
    """Say which values equal the null value but for rounding."""
    equal: np.ndarray[tuple[int], np.dtype[np.bool_]] = np.abs(sample.values - null_value) <= sample.error + rounding(
        null_value
    )
    return equal


def located(sample: Differences, asked: Asked, *, zeros: Zeros) -> Located:
    """Judge the median of a sample by its signs.

    Parameters
    ----------
    sample : Differences
        Values of one unit.
    asked : Asked
        Null value, same unit, side and confidence.
    zeros : {"dropped", "against"}
        What becomes of values that equal the null value. It doesn't bear on the interval: between two neighbours among
        the ordered values no value equals the null value.

    Returns
    -------
    Located
        The sample median, the interval between two of the ordered values, how many values lie above the null value,
        and p.
    """
    n, ordered = sample.values.size, np.sort(sample.values)
    signs = Signs.of(sample, asked.null_value, zeros)
    equal = sample.values[at_null(sample, asked.null_value)]

    def above(larger: float) -> float:
        return binomial.at_least(int(larger), n, FAIR)

    def kth(k: int) -> float:
        return float(ordered[k - 1])

    return Located(
        estimate=float(np.median(ordered)),
        interval=kept_by_count(n, above, kth, asked),
        statistic=float(signs.above),
        tails=Tails(
            binomial.at_least(signs.above, signs.trials, FAIR), binomial.at_least(signs.below, signs.trials, FAIR)
        ),
        null_value=float(equal[0]) if equal.size else asked.null_value,
    )


def smallest_p(away: Values, *, alternative: Alternative, zeros: Zeros) -> float:
    """Give the smallest p that these distances from the null value, same unit, allow: all that have a sign share it."""
    signs = Signs.of(Differences(np.abs(away), rounding(away)), 0.0, zeros)
    one_sided = binomial.at_least(signs.above, signs.trials, FAIR)
    return min(1.0, 2 * one_sided) if alternative == "two_sided" else one_sided
