"""The paired t-test against printed values, base R, scipy and the one-sample test of the differences."""

from typing import Any

import numpy as np
import pytest
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.one_sample_t import one_sample_t
from beforehand.hypothesis_tests.entries.paired_t import paired_t


def test_sleep(reference: Any, outcome: Any) -> None:
    sleep = reference("t-paired-sleep")
    samples = sleep.data("group1"), sleep.data("group2")
    found = outcome(paired_t(*samples))
    for place, end in enumerate((found.lower, found.upper)):
        assert sleep.agrees("ci95", end, place)
    names = {"t": found.statistic, "df": found.df, "p_two_sided": found.p, "mean_diff": found.estimate}
    for name, value in names.items():
        assert sleep.agrees(name, value), name
    assert sleep.agrees("p_less", outcome(paired_t(*samples, alternative="below")).p)
    assert found.n == (10,)


def test_heights(reference: Any, outcome: Any) -> None:
    heights = reference("perm-darwin")
    differences = heights.data("difference_eighths_inch")
    found = outcome(paired_t(differences, np.zeros_like(differences)))
    assert heights.agrees("t", found.statistic)
    assert heights.agrees("t_p", found.p)


def test_base_r(r_case: Any) -> None:
    # both compute Student's t to about 1e-12
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-11), name


@pytest.mark.parametrize(("ours", "theirs"), [("above", "greater"), ("below", "less"), ("two_sided", "two-sided")])
def test_scipy(ours: Any, theirs: str, outcome: Any) -> None:
    random = np.random.default_rng(12)
    for n in (2, 5, 30, 200):
        first = random.normal(3, 2, n)
        second = first + random.normal(0.4, 1, n)
        found = outcome(paired_t(first, second, alternative=ours, confidence=0.99))
        again = stats.ttest_rel(first, second, alternative=theirs)
        assert (found.statistic, found.p) == pytest.approx((again.statistic, again.pvalue), rel=1e-10)
        if ours == "two_sided":
            assert (found.lower, found.upper) == pytest.approx(tuple(again.confidence_interval(0.99)), rel=1e-10)


def test_is_the_one_sample_test_of_differences(outcome: Any) -> None:
    random = np.random.default_rng(13)
    first, second = random.integers(0, 50, (2, 20)) / 4  # quarters: differences are exact
    settings: Any = {"null_value": 0.5, "alternative": "above", "confidence": 0.8}
    assert paired_t(first, second, **settings) == one_sample_t(first - second, **settings)


def test_rounded_differences_cost_no_digits(outcome: Any) -> None:
    # 2^30 - 1.1 keeps 22 of the binary digits of 1.1: the rounded differences have another variance
    second = np.array([1.1, 2.3, 4.2, 7.7])
    found = outcome(paired_t(np.full(4, 2.0**30), second, null_value=2.0**30))
    again = outcome(one_sample_t(-second))
    assert found.statistic == pytest.approx(again.statistic, rel=1e-15)


@pytest.mark.parametrize(
    ("first", "second", "reason"),
    [
        ([], [], "at least 2 pairs are needed; there are 0 pairs"),
        ([1.0], [2.0], "at least 2 pairs are needed; there is 1 pair"),
        ([1.0, 2.0, 3.0], [2.0, 3.0, 4.0], "the differences within all 3 pairs are equal"),
        ([0.3, 0.2, 0.8], [0.2, 0.1, 0.7], "the differences within all 3 pairs are equal"),
    ],
)
def test_no_result(first: list[float], second: list[float], reason: str) -> None:
    assert paired_t(np.array(first), np.array(second)) == NotComputed(reason, (len(first),))


def test_pairs_have_two_sides() -> None:
    with pytest.raises(ValueError, match="pairs have two values each; found 3 and 2 values"):
        paired_t(np.arange(3.0), np.arange(2.0))
