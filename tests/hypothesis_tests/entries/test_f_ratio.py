"""The F-test of two variances against base R, scipy and closed forms."""

from typing import Any

import numpy as np
import pytest
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.f_ratio import NOT_ROBUST, f_ratio


def test_base_r(r_case: Any) -> None:
    # both by the incomplete beta function; R's variances are good to about 1e-14
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-10), name


@pytest.mark.parametrize("seed", range(10))
def test_scipy(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    first, second = (random.normal(0, sd, int(n)) for sd, n in zip((1, 2), random.integers(2, 60, 2), strict=True))
    null = float(np.exp(random.normal(-1, 1)))
    d1, d2, ratio = first.size - 1, second.size - 1, np.var(first, ddof=1) / np.var(second, ddof=1)
    above = outcome(f_ratio(first, second, null_value=null, alternative="above"))
    below = outcome(f_ratio(first, second, null_value=null, alternative="below"))
    assert (above.estimate, above.df, above.n) == (pytest.approx(ratio, rel=1e-12), d1, (first.size, second.size))
    assert above.p == pytest.approx(stats.f.sf(ratio / null, d1, d2), rel=1e-9)
    assert below.p == pytest.approx(stats.f.cdf(ratio / null, d1, d2), rel=1e-9)
    found = outcome(f_ratio(first, second, confidence=0.9))
    assert found.lower == pytest.approx(ratio / stats.f.isf(0.05, d1, d2), rel=1e-9)
    assert found.upper == pytest.approx(ratio / stats.f.ppf(0.05, d1, d2), rel=1e-9)
    assert found.remarks == (NOT_ROBUST,)


def test_two_of_each_by_hand(outcome: Any) -> None:
    # with 1 and 1 degrees of freedom P(F >= f) = 1 - (2 / pi) atan √f; variances 2 and 8
    found = outcome(f_ratio(np.array([0.0, 2.0]), np.array([1.0, 5.0]), alternative="above"))
    assert found.statistic == pytest.approx(0.25, rel=1e-15)
    assert found.p == pytest.approx(1 - 2 / np.pi * np.arctan(0.5), rel=1e-13)


def test_far_tail(outcome: Any) -> None:
    random = np.random.default_rng(4)
    first, second = random.normal(0, 1e6, 30), random.normal(0, 1, 40)
    found = outcome(f_ratio(first, second, alternative="above"))
    ratio = np.var(first, ddof=1) / np.var(second, ddof=1)
    assert found.p == pytest.approx(stats.f.sf(ratio, 29, 39), rel=1e-8)
    assert 0 < found.p < 1e-150


def test_offset_changes_nothing(outcome: Any) -> None:
    random = np.random.default_rng(6)
    first, second = (np.round(random.normal(0, 4, n) * 8) / 8 for n in (12, 9))
    here, there = outcome(f_ratio(first, second)), outcome(f_ratio(first + 2.0**40, second - 2.0**40))
    assert (here.p, here.lower, here.upper) == (there.p, there.lower, there.upper)


@pytest.mark.parametrize(
    ("first", "second", "reason"),
    [
        ([1.0], [2.0, 3.0], "at least 2 values of the first group are needed; there is 1 value"),
        ([1.0, 2.0], [0.3, 0.1 + 0.2], "all 2 values of the second group are equal"),
        (
            [4.0, 4.0],
            [3.0, 3.0],
            "all 2 values of the first group are equal; all 2 values of the second group are equal",
        ),
    ],
)
def test_no_result(first: list[float], second: list[float], reason: str) -> None:
    assert f_ratio(np.array(first), np.array(second)) == NotComputed(reason, (len(first), len(second)))


def test_refused_calls() -> None:
    with pytest.raises(ValueError, match="a ratio of variances under the null hypothesis is above 0; found 0"):
        f_ratio(np.arange(3.0), np.arange(4.0), null_value=0)
