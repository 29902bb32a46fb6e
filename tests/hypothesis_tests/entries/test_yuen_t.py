"""Yuen's t-test against printed values, base R and scipy."""

from typing import Any

import numpy as np
import pytest
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.welch_t import welch_t
from beforehand.hypothesis_tests.entries.yuen_t import yuen_t


def test_printed_with_interval(outcome: Any) -> None:
    # printed by another program (R, package PairedData, yuen.t.test) as kept in scipy/stats/tests/test_stats.py of
    # scipy 1.17.1, Test_ttest_trim.test_ttest_compare_r; all digits that are printed there
    found = outcome(yuen_t(np.array([1.0, 2, 3]), np.array([1.1, 2.9, 4.2])))
    assert found.statistic == pytest.approx(-0.68649512735573, abs=5e-15)
    assert found.df == pytest.approx(3.4104431643464, abs=5e-14)
    assert found.p == pytest.approx(0.5361949075313, abs=5e-14)
    assert found.lower == pytest.approx(-3.912777195645217, abs=1e-12)
    assert found.upper == pytest.approx(2.446110528978550, abs=1e-12)


# the same place; parameters a, b, pr, tr, trim
WIDE = [56, 128.6, 12, 123.8, 64.34, 78, 763.3]
CRAMPED = [2.7, 2.7, 1.1, 3.0, 1.9, 3.0, 3.8, 3.8, 0.3, 1.9, 1.9]
LOOSE = [6.5, 5.4, 8.1, 3.5, 0.5, 3.8, 6.8, 4.9, 9.5, 6.2, 4.1]


@pytest.mark.parametrize(
    ("samples", "trim", "p", "t"),
    [
        ((WIDE, [1.1, 2.9, 4.2]), 0.2, 0.00998909252078421, 4.591598691181999),
        ((WIDE, [1.1, 2.9, 4.2]), 0.32, 0.10512380092302633, 2.832256715395378),
        ((CRAMPED, LOOSE), 0.2, 0.002878909511344, -4.2461168970325),
    ],
)
def test_printed(samples: Any, trim: float, p: float, t: float, outcome: Any) -> None:
    found = outcome(yuen_t(*map(np.array, samples), trim=trim))
    assert (found.p, found.statistic) == pytest.approx((p, t), rel=1e-12)


def test_base_r(r_case: Any) -> None:
    # both compute Student's t to about 1e-12
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-11), name


@pytest.mark.parametrize(("ours", "theirs"), [("above", "greater"), ("below", "less"), ("two_sided", "two-sided")])
@pytest.mark.parametrize("trim", [0.0, 0.1, 0.25, 0.4])
def test_scipy(ours: Any, theirs: str, trim: float, outcome: Any) -> None:
    random = np.random.default_rng(48)
    for n1, n2 in ((9, 14), (60, 50)):
        first, second = random.standard_t(3, n1), random.normal(0.5, 2, n2)
        found = outcome(yuen_t(first, second, trim=trim, alternative=ours, confidence=0.9))
        again = stats.ttest_ind(first, second, trim=trim, equal_var=False, alternative=theirs)
        assert (found.statistic, found.p, found.df) == pytest.approx(
            (again.statistic, again.pvalue, again.df), rel=1e-10
        )
        if ours == "two_sided":
            assert (found.lower, found.upper) == pytest.approx(tuple(again.confidence_interval(0.9)), rel=1e-9)


def test_without_trimming_it_is_welchs(outcome: Any) -> None:
    random = np.random.default_rng(49)
    first, second = random.normal(5, 2, 12), random.normal(4, 6, 9)
    found, welch = outcome(yuen_t(first, second, trim=0.0)), outcome(welch_t(first, second))
    for name in ("estimate", "lower", "upper", "statistic", "df", "p", "standard_error"):
        assert getattr(found, name) == pytest.approx(getattr(welch, name), rel=1e-12)


def test_a_share_counts_as_it_is_written(outcome: Any) -> None:
    # as doubles 0.29 x 100 is below 29, and 0.1 x 3 x 10 above 3
    values = np.random.default_rng(50).normal(0, 1, 100)
    assert outcome(yuen_t(values, values[:50], trim=0.29)).remarks == (
        "At each end 29 values of the first group and 14 values of the second are trimmed.",
    )


def test_outliers_change_nothing(outcome: Any) -> None:
    random = np.random.default_rng(51)
    first, second = np.sort(random.normal(5, 2, 20)), random.normal(4, 3, 20)
    wild = np.r_[first[:-4], first[-4:] + np.array([10, 1e3, 1e6, 1e9])]
    assert outcome(yuen_t(first, second)) == outcome(yuen_t(wild, second))


@pytest.mark.parametrize(
    ("first", "second", "trim", "reason"),
    [
        ([1.0], [1.0, 2], 0.2, "at least 2 values of the first group are needed; there is 1 value"),
        (
            np.arange(5.0),
            np.arange(9.0),
            0.4,
            "at least 2 values of the first group, once trimmed, are needed; there is 1 value",
        ),
        ([1.0, 3, 3, 3, 9], np.arange(9.0), 0.2, "all 3 values of the first group, once trimmed, are equal"),
        ([1.0, 2], [3.0, 3], 0.2, "all 2 values of the second group are equal"),
        (np.arange(5.0), np.arange(9.0), 0.5, "trim lies between 0 and 1/2; the option says 0.5"),
        (np.arange(5.0), np.arange(9.0), -0.1, "trim lies between 0 and 1/2; the option says -0.1"),
    ],
)
def test_no_result(first: Any, second: Any, trim: float, reason: str) -> None:
    for ask in (yuen_t, yuen_t.again):
        found = ask(np.array(first), np.array(second), trim=trim)
        assert found == NotComputed(reason, (len(first), len(second)))
