"""Welch's t-test of logarithms against base R, scipy and the t-test that it is."""

import math
from typing import Any

import numpy as np
import pytest
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.ratio_of_geometric_means import ratio_of_geometric_means
from beforehand.hypothesis_tests.entries.welch_t import welch_t


def test_base_r(r_case: Any) -> None:
    # R's logarithms and sums lose a digit or two beside ours
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-10), name


@pytest.mark.parametrize("seed", range(10))
def test_scipy_and_welch(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    first, second = (
        np.exp(random.normal(m, 0.7, int(n))) for m, n in zip((3, 2), random.integers(2, 50, 2), strict=True)
    )
    null = float(np.exp(random.normal(1, 0.3)))
    found = outcome(ratio_of_geometric_means(first, second, null_value=null, confidence=0.9))
    logs = stats.ttest_ind(np.log(first / null), np.log(second), equal_var=False)
    # logarithms in double precision, here near 0 and there near 3
    assert (found.statistic, found.p, found.df) == pytest.approx((logs.statistic, logs.pvalue, logs.df), rel=1e-9)
    assert found.estimate == pytest.approx(stats.gmean(first) / stats.gmean(second), rel=1e-12)
    again = outcome(welch_t(np.log(first), np.log(second), confidence=0.9))
    ends = (math.exp(again.lower), math.exp(again.upper))
    assert (found.lower, found.upper) == pytest.approx(ends, rel=1e-12)
    assert math.isnan(found.standard_error)


def test_powers_of_two_by_hand(outcome: Any) -> None:
    # logarithms to base 2: 0, 2, 4 (mean 2, s² = 4) and -1, 1 (mean 0, s² = 2): t = 2 / √(4/3 + 2/2)
    found = outcome(ratio_of_geometric_means(np.array([1.0, 4, 16]), np.array([0.5, 2])))
    assert found.estimate == pytest.approx(4, rel=1e-14)
    assert found.statistic == pytest.approx(2 / math.sqrt(7 / 3), rel=1e-14)


@pytest.mark.parametrize("scale", [2.0**-1000, 1.0, 2.0**900])
def test_values_that_differ_in_their_last_digits_only(scale: float, outcome: Any) -> None:
    # 1 + k 2^-40: the logarithm is k 2^-40 to a share of 1e-11, so t is that of the whole numbers k
    steps = np.array([1.0, 5, 2, 9, 4]), np.array([3.0, 8, 11, 6])
    found = outcome(ratio_of_geometric_means(*(scale * (1 + step * 2.0**-40) for step in steps)))
    again = outcome(welch_t(*steps))
    assert (found.statistic, found.df) == pytest.approx((again.statistic, again.df), rel=1e-10)


def test_ends_without_bound(outcome: Any) -> None:
    # two values of each group, hundreds of powers of ten apart: the interval of the logarithm leaves the doubles
    found = outcome(ratio_of_geometric_means(np.array([1e-200, 1e200]), np.array([1.0, 2.0])))
    assert (found.lower, found.upper) == (0, math.inf)


@pytest.mark.parametrize(
    ("first", "second", "reason"),
    [
        ([1.0, 0.0, -2.0], [2.0, 3.0], "values of the first group that are not above 0 have no logarithm: 2 of 3"),
        ([1.0, 3.0], [2.0, 0.0], "values of the second group that are not above 0 have no logarithm: 1 of 2"),
        ([1.0], [2.0, 3.0], "at least 2 values of the first group are needed; there is 1 value"),
        ([1.0, 1.0], [2.0, 3.0], "all 2 values of the first group are equal"),
    ],
)
def test_no_result(first: list[float], second: list[float], reason: str) -> None:
    found = ratio_of_geometric_means(np.array(first), np.array(second))
    assert found == NotComputed(reason, (len(first), len(second)))


def test_refused_calls() -> None:
    with pytest.raises(ValueError, match="a ratio of geometric means under the null hypothesis is above 0; found 0"):
        ratio_of_geometric_means(np.arange(1.0, 4.0), np.arange(1.0, 5.0), null_value=0)
