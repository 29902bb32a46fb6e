"""Kendall's rank correlation against printed values, scipy and the counting of all orders."""

import math
from itertools import permutations
from typing import Any

import numpy as np
import pytest
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.kendall_correlation import kendall_correlation
from beforehand.hypothesis_tests.rank_correlation import APPROXIMATE, DIFFER


def test_judges(reference: Any, outcome: Any) -> None:
    judges = reference("cor-judge")
    found = outcome(kendall_correlation(judges.data("CONT"), judges.data("INTG"), continuity=False))
    assert judges.agrees("kendall_tau_b", found.estimate)
    assert judges.agrees("kendall_p_ties", found.p)


@pytest.mark.parametrize("seed", range(12))
def test_scipy(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    x = np.round(random.normal(0, 1, 40) * (3 if seed % 2 else 1e6))  # with ties, and without
    y = np.round(0.4 * x + random.normal(0, 1, 40) * (3 if seed % 2 else 1e6))
    for ours, theirs in (("above", "greater"), ("below", "less"), ("two_sided", "two-sided")):
        again = stats.kendalltau(x, y, method="asymptotic", alternative=theirs)
        found = outcome(kendall_correlation(x, y, alternative=ours, continuity=False))
        assert (found.estimate, found.p) == pytest.approx((again.statistic, again.pvalue), rel=1e-9)
    small = x[:9] + np.arange(9) / 100
    exact = stats.kendalltau(small, y[:9] + np.arange(9) / 1000, method="exact", alternative="greater")
    found = outcome(kendall_correlation(small, y[:9] + np.arange(9) / 1000, alternative="above"))
    assert (found.estimate, found.p) == pytest.approx((exact.statistic, exact.pvalue), rel=1e-10)


@pytest.mark.parametrize(
    ("x", "y"),
    [
        ([1, 2, 3, 4, 5, 6], [2, 1, 4, 3, 6, 5]),
        ([1, 1, 3, 4, 5, 5], [2, 1, 4, 4, 6, 5]),
        ([1, 1, 1, 2, 2, 3], [5, 5, 6, 6, 6, 7]),
        ([1, 2, 2, 2, 2], [3, 1, 1, 0, 0]),
    ],
)
def test_all_orders(x: list[int], y: list[int], outcome: Any) -> None:
    def s(order: Any) -> int:
        pairs = [(i, j) for i in range(len(x)) for j in range(i)]
        return int(sum(np.sign(x[i] - x[j]) * np.sign(order[i] - order[j]) for i, j in pairs))

    scores = np.array([s(order) for order in permutations(y)])
    columns = np.array(x, dtype=float), np.array(y, dtype=float)
    above = outcome(kendall_correlation(*columns, alternative="above"))
    below = outcome(kendall_correlation(*columns, alternative="below"))
    assert above.statistic == s(y)
    assert above.p == pytest.approx(np.mean(scores >= s(y)), rel=1e-12)
    assert below.p == pytest.approx(np.mean(scores <= s(y)), rel=1e-12)
    # the smallest p is that of the order that agrees most, and all orders have the variance of the approximation
    pooled = np.sort(np.stack(columns))
    smallest = kendall_correlation.smallest_p((len(x),), pooled, alternative="above", null_value=0.0)
    assert smallest == pytest.approx(np.mean(scores == scores.max()), rel=1e-12)
    normal = outcome(kendall_correlation(*columns, alternative="above", method="normal", continuity=False))
    assert normal.p == pytest.approx(stats.norm.sf(s(y) / scores.std()), rel=1e-10)


def test_interval_by_hand(outcome: Any) -> None:
    # artanh τ plus and minus 1.644854 √(0.437 / (n - 4)); p for another null value inverts it
    x, y = np.arange(20.0), np.arange(20.0) + 9 * np.cos(np.arange(20.0))
    found = outcome(kendall_correlation(x, y, confidence=0.9))
    tau = stats.kendalltau(x, y).statistic
    half = stats.norm.isf(0.05) * math.sqrt(0.437 / 16)
    assert (found.lower, found.upper) == pytest.approx(tuple(np.tanh(np.arctanh(tau) + np.array([-half, half]))))
    at_end = outcome(kendall_correlation(x, y, null_value=found.lower, alternative="above"))
    assert at_end.p == pytest.approx(0.05, rel=1e-9)
    assert at_end.remarks == (APPROXIMATE,)


def test_where_p_and_interval_contradict_each_other_they_say_so(outcome: Any) -> None:
    x, y = np.arange(10.0), np.array([2.0, 0, 4, 5, 1, 3, 6, 9, 8, 7])
    found = outcome(kendall_correlation(x, y))
    level = 1 - found.p * 1.0001  # just above p the test rejects; the interval holds 0 or not as it happens
    near = outcome(kendall_correlation(x, y, confidence=level))
    assert (DIFFER in near.remarks) == (near.lower <= 0 <= near.upper)


def test_no_interval_where_it_has_none(outcome: Any) -> None:
    x = np.arange(6.0)
    perfect = outcome(kendall_correlation(x, x**3))
    assert math.isnan(perfect.lower)
    assert math.isnan(perfect.upper)
    assert perfect.p == pytest.approx(2 / math.factorial(6), rel=1e-12)
    assert perfect.remarks[-1] == (
        "There is no interval: the approximation that it rests on has none at a correlation of 1 or -1."
    )
    few = outcome(kendall_correlation(x[:4], np.array([1.0, 0, 3, 2])))
    assert few.remarks[-1] == "There is no interval: the approximation that it rests on has none at fewer than 5 rows."
    assert kendall_correlation(x, x**3, null_value=0.3) == NotComputed(
        "for a null value other than 0, p rests on an approximation that has none at a correlation of 1 or -1", (6,)
    )


def test_values_that_differ_by_rounding_are_tied(outcome: Any) -> None:
    x = np.array([0.3 - 0.2, 0.2 - 0.1, 1.0, 2.0])
    tied = np.array([1.0, 1.0, 2.0, 3.0])
    y = np.array([1.0, 4.0, 2.0, 3.0])
    assert outcome(kendall_correlation(x, y)) == outcome(kendall_correlation(tied, y)) or repr(
        kendall_correlation(x, y)
    ) == repr(kendall_correlation(tied, y))


def test_many_rows(outcome: Any) -> None:
    random = np.random.default_rng(4)
    x, y = random.integers(0, 50, 20_000).astype(float), random.integers(0, 900, 20_000).astype(float)
    again = stats.kendalltau(x, y, method="asymptotic")
    found, second = kendall_correlation(x, y, continuity=False), kendall_correlation.again(x, y, continuity=False)
    assert (outcome(found).estimate, outcome(found).p) == pytest.approx((again.statistic, again.pvalue), rel=1e-8)
    assert outcome(second).statistic == outcome(found).statistic


@pytest.mark.parametrize(
    ("first", "method", "reason"),
    [
        ([1.0, 2.0], "by_size", "at least 3 rows are needed; there are 2 rows"),
        ([3.0] * 5, "by_size", "all 5 values of the first column are equal"),
        (
            list(range(13)),
            "exact",
            "the exact distribution is counted for up to 12 rows; there are 13. Use method: normal",
        ),
    ],
)
def test_no_result(first: list[float], method: Any, reason: str) -> None:
    samples = np.array(first, dtype=float), np.arange(float(len(first)))
    assert kendall_correlation(*samples, method=method) == NotComputed(reason, (len(first),))


def test_refused_calls() -> None:
    samples: Any = (np.arange(6.0), np.arange(6.0) ** 2)
    with pytest.raises(ValueError, match="a correlation under the null hypothesis lies between -1 and 1; found -1"):
        kendall_correlation(*samples, null_value=-1.0)
    with pytest.raises(ValueError, match="a method is by_size, exact or normal; found 'auto'"):
        kendall_correlation(*samples, method="auto")
