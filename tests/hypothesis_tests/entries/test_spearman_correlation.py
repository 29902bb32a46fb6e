"""Spearman's rank correlation against printed values, scipy and the counting of all orders."""

import math
from itertools import permutations
from typing import Any

import numpy as np
import pytest
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.spearman_correlation import spearman_correlation
from beforehand.hypothesis_tests.rank_correlation import APPROXIMATE


def test_judges(reference: Any, outcome: Any) -> None:
    judges = reference("cor-judge")
    found = outcome(spearman_correlation(judges.data("CONT"), judges.data("INTG")))
    assert judges.agrees("spearman_rho", found.estimate)
    assert judges.agrees("spearman_p_ties", found.p)
    assert found.df == 41


@pytest.mark.parametrize("seed", range(8))
def test_scipy(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    x = np.round(random.normal(0, 1, 30) * (3 if seed % 2 else 1e6))  # with ties, and without
    y = np.round(0.4 * x + random.normal(0, 1, 30) * (3 if seed % 2 else 1e6))
    for ours, theirs in (("above", "greater"), ("below", "less"), ("two_sided", "two-sided")):
        again = stats.spearmanr(x, y, alternative=theirs)
        found = outcome(spearman_correlation(x, y, alternative=ours))
        assert (found.estimate, found.p) == pytest.approx((again.statistic, again.pvalue), rel=1e-9)


@pytest.mark.parametrize(
    ("x", "y"),
    [
        ([1, 2, 3, 4, 5, 6], [2, 1, 4, 3, 6, 5]),
        ([1, 1, 3, 4, 5, 5], [2, 1, 4, 4, 6, 5]),
        ([1, 1, 1, 2, 2, 3], [5, 5, 6, 6, 6, 7]),
        ([1, 2, 2, 2, 2], [3, 1, 1, 0, 0]),
        ([1, 2, 3, 4, 5, 6, 7], [7, 5, 6, 4, 3, 2, 1]),
    ],
)
def test_all_orders(x: list[int], y: list[int], outcome: Any) -> None:
    ranks = stats.rankdata(x), stats.rankdata(y)
    scores = np.array([float(ranks[0] @ np.array(order)) for order in permutations(ranks[1])])
    observed = float(ranks[0] @ ranks[1])
    columns = np.array(x, dtype=float), np.array(y, dtype=float)
    above = outcome(spearman_correlation(*columns, alternative="above"))
    below = outcome(spearman_correlation(*columns, alternative="below"))
    assert above.p == pytest.approx(np.mean(scores >= observed), rel=1e-12)
    assert below.p == pytest.approx(np.mean(scores <= observed), rel=1e-12)
    pooled = np.sort(np.stack(columns))
    smallest = spearman_correlation.smallest_p((len(x),), pooled, alternative="below", null_value=0.0)
    assert smallest == pytest.approx(np.mean(scores == scores.min()), rel=1e-12)


def test_interval_by_hand(outcome: Any) -> None:
    # artanh r plus and minus 1.959964 √((1 + r²/2) / (n - 3)); p for another null value inverts it
    x, y = np.arange(20.0), np.arange(20.0) + 9 * np.cos(np.arange(20.0))
    found = outcome(spearman_correlation(x, y))
    r = stats.spearmanr(x, y).statistic
    half = stats.norm.isf(0.025) * math.sqrt((1 + r * r / 2) / 17)
    assert (found.lower, found.upper) == pytest.approx(tuple(np.tanh(np.arctanh(r) + np.array([-half, half]))))
    at_end = outcome(spearman_correlation(x, y, null_value=found.upper, alternative="below"))
    assert at_end.p == pytest.approx(0.025, rel=1e-9)
    assert at_end.remarks == (APPROXIMATE,)


def test_a_perfect_order_has_the_p_of_its_share(outcome: Any) -> None:
    # Student's t would be infinite; the one most extreme of 13! orders is what it is
    x = np.arange(13.0)
    found = outcome(spearman_correlation(x, np.exp(x), alternative="above"))
    assert found.p == pytest.approx(1 / math.factorial(13), rel=1e-12)
    assert (found.estimate, found.statistic) == (1, math.inf)
    assert math.isnan(found.lower)
    assert outcome(spearman_correlation(x, -x, alternative="above")).p == 1
    # with groups of 3 and 2 tied in both columns 3! 2! orders are the same
    tied = np.array([0, 0, 0, 3, 4, 5, 6, 7, 8, 9, 10, 11, 11.0])
    assert outcome(spearman_correlation(tied, tied, alternative="above")).p == pytest.approx(12 / math.factorial(13))


def test_the_approximation_is_near_where_both_exist(outcome: Any) -> None:
    x = np.arange(12.0)
    for seed in range(6):
        y = np.random.default_rng(seed).permutation(12).astype(float)
        exact, near = (outcome(spearman_correlation(x, y, method=method)).p for method in ("exact", "student"))
        assert near == pytest.approx(exact, abs=0.02)  # of common practice: Student's t serves from ten rows on


@pytest.mark.parametrize(
    ("first", "method", "reason"),
    [
        ([1.0, 2.0], "by_size", "at least 3 rows are needed; there are 2 rows"),
        ([3.0] * 5, "by_size", "all 5 values of the first column are equal"),
        (
            list(range(13)),
            "exact",
            "the exact distribution is counted for up to 12 rows; there are 13. Use method: student",
        ),
    ],
)
def test_no_result(first: list[float], method: Any, reason: str) -> None:
    samples = np.array(first, dtype=float), np.arange(float(len(first)))
    assert spearman_correlation(*samples, method=method) == NotComputed(reason, (len(first),))


def test_refused_calls() -> None:
    samples: Any = (np.arange(6.0), np.arange(6.0) ** 2)
    with pytest.raises(ValueError, match="a correlation under the null hypothesis lies between -1 and 1; found 2"):
        spearman_correlation(*samples, null_value=2.0)
    with pytest.raises(ValueError, match="method is by_size, exact or student; found 'normal'"):
        spearman_correlation(*samples, method="normal")
