"""Bonett and Seier's test against printed values, its formula written out, and simulated coverage."""

import math
from typing import Any

import numpy as np
import pytest
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.ratio_of_mean_absolute_deviations import ratio_of_mean_absolute_deviations


def test_printed_values(outcome: Any) -> None:
    # R package statpsych, ci.ratio.mad2 (for Bonett and Seier 2003): data and output read in its documentation
    first = np.array([32.0, 39, 26, 35, 43, 27, 40, 37, 34, 29])
    second = np.array([36.0, 44, 47, 42, 49, 39, 46, 31, 33, 48])
    found = outcome(ratio_of_mean_absolute_deviations(first, second))
    assert found.estimate == pytest.approx(5.111111 / 5.888889, rel=1e-6)
    assert (round(found.estimate, 7), round(found.lower, 7), round(found.upper, 6)) == (0.8679245, 0.4520879, 1.666253)


@pytest.mark.parametrize("seed", range(10))
def test_the_formula_written_out(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    samples = [random.gamma(2, scale, int(n)) for scale, n in zip((1, 3), random.integers(2, 40, 2), strict=True)]
    null = float(np.exp(random.normal(-1, 0.5)))
    logs, variances = [], []
    for values in samples:
        median, n = np.median(values), values.size
        tau = np.abs(values - median).mean()
        logs.append(math.log(tau * n / (n - 1)))
        variances.append((((values.mean() - median) / tau) ** 2 + values.var(ddof=1) / tau**2 - 1) / n)
    error = math.sqrt(sum(variances))
    z = (logs[0] - logs[1] - math.log(null)) / error
    above = outcome(ratio_of_mean_absolute_deviations(*samples, null_value=null, alternative="above"))
    assert (above.statistic, above.p) == pytest.approx((z, stats.norm.sf(z)), rel=1e-10)
    found = outcome(ratio_of_mean_absolute_deviations(*samples, confidence=0.9))
    ends = np.exp(logs[0] - logs[1] + np.array([0, -1, 1]) * stats.norm.ppf(0.95) * error)
    assert (found.estimate, found.lower, found.upper) == pytest.approx(tuple(ends), rel=1e-11)


def test_by_hand(outcome: Any) -> None:
    # 0, 2: median 1, deviations 1 and 1, times 2 / 1 = 2, variance of the logarithm (0 + 2 - 1) / 2 = 1/2
    # 0, 0, 6: median 0, deviations 0, 0, 6: 2, times 3 / 2 = 3; ((2 / 2)² + 12 / 4 - 1) / 3 = 1
    found = outcome(ratio_of_mean_absolute_deviations(np.array([0.0, 2.0]), np.array([0.0, 0.0, 6.0])))
    assert found.estimate == pytest.approx(2 / 3, rel=1e-15)
    assert found.statistic == pytest.approx(math.log(2 / 3) / math.sqrt(1.5), rel=1e-14)


def test_values_far_from_zero_keep_their_digits(outcome: Any) -> None:
    random = np.random.default_rng(3)
    first, second = (np.round(random.normal(0, 4, n) * 8) / 8 for n in (12, 9))
    here = outcome(ratio_of_mean_absolute_deviations(first, second))
    there = outcome(ratio_of_mean_absolute_deviations(first + 2.0**40, second - 2.0**40))
    assert (here.p, here.estimate) == (there.p, there.estimate)


@pytest.mark.thorough
@pytest.mark.parametrize(("n1", "n2", "ratio"), [(10, 10, 1.0), (10, 40, 3.0), (40, 10, 3.0)])
def test_coverage_for_normal_values(n1: int, n2: int, ratio: float) -> None:
    # 95 % intervals of 4,000 pairs of samples: standard error 0.34 %; the interval of a t-test of absolute deviations
    # covers 73 % in the second case
    random = np.random.default_rng(20310601)
    held = 0
    for _ in range(4_000):
        found = ratio_of_mean_absolute_deviations(random.normal(0, ratio, n1), random.normal(0, 1, n2))
        assert not isinstance(found, NotComputed)
        held += found.lower < ratio < found.upper
    assert 0.94 <= held / 4_000 <= 0.975


def test_no_result() -> None:
    reason = "all 3 values of the first group are equal"
    found = ratio_of_mean_absolute_deviations(np.full(3, 2.0), np.array([1.0, 2.0]))
    assert found == NotComputed(reason, (3, 2))


def test_refused_calls() -> None:
    with pytest.raises(ValueError, match="a ratio of deviations under the null hypothesis is above 0; found 0"):
        ratio_of_mean_absolute_deviations(np.arange(3.0), np.arange(4.0), null_value=0)
