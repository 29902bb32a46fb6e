"""Welch's t-test against printed values, base R, scipy and statsmodels."""

from typing import Any

import numpy as np
import pytest
from scipy import stats
from statsmodels.stats.weightstats import CompareMeans, DescrStatsW

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.welch_t import welch_t


@pytest.mark.parametrize("prefix", ["", "outlier_"])
def test_integers(prefix: str, reference: Any, outcome: Any) -> None:
    integers = reference("t-welch-integers")
    found = outcome(welch_t(integers.data("x"), integers.data("y_outlier" if prefix else "y")))
    for name, value in {"t": found.statistic, "df": found.df, "p": found.p}.items():
        assert integers.agrees(prefix + name, value), name
    for place, end in enumerate((found.lower, found.upper)):
        assert integers.agrees(prefix + "ci95", end, place)


def test_mileage(reference: Any, outcome: Any) -> None:
    mileage = reference("t-welch-mtcars")
    found = outcome(welch_t(mileage.data("am0"), mileage.data("am1")))
    for name, value in {"t": found.statistic, "df": found.df, "p": found.p}.items():
        assert mileage.agrees(name, value), name
    for place, end in enumerate((found.lower, found.upper)):
        assert mileage.agrees("ci95", end, place)


def test_assembly(reference: Any, outcome: Any) -> None:
    assembly = reference("t-two-assembly")
    found = outcome(welch_t(assembly.data("old"), assembly.data("new"), alternative="above"))
    assert assembly.agrees("welch_t", found.statistic)
    assert assembly.agrees("welch_df", found.df)
    assert assembly.agrees("welch_p_greater", found.p)


def test_base_r(r_case: Any) -> None:
    # both compute Student's t to about 1e-12
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-11), name


@pytest.mark.parametrize(
    ("ours", "scipys", "statsmodels"),
    [("above", "greater", "larger"), ("below", "less", "smaller"), ("two_sided", "two-sided", "two-sided")],
)
def test_scipy_and_statsmodels(ours: Any, scipys: str, statsmodels: str, outcome: Any) -> None:
    random = np.random.default_rng(15)
    for n1, n2 in ((2, 3), (4, 30), (60, 50)):
        first, second = random.normal(5, 2, n1), random.normal(4, 6, n2)
        found = outcome(welch_t(first, second, alternative=ours, confidence=0.9))
        again = stats.ttest_ind(first, second, equal_var=False, alternative=scipys)
        assert (found.statistic, found.p, found.df) == pytest.approx(
            (again.statistic, again.pvalue, again.df), rel=1e-10
        )
        if ours == "two_sided":
            assert (found.lower, found.upper) == pytest.approx(tuple(again.confidence_interval(0.9)), rel=1e-10)
        compare = CompareMeans(DescrStatsW(first), DescrStatsW(second))
        moved = outcome(welch_t(first, second, null_value=-0.7, alternative=ours))
        t, p, _ = compare.ttest_ind(alternative=statsmodels, usevar="unequal", value=-0.7)
        assert (moved.statistic, moved.p) == pytest.approx((t, p), rel=1e-9)
        assert moved.standard_error == pytest.approx(compare.std_meandiff_separatevar, rel=1e-12)


@pytest.mark.parametrize(
    ("first", "second", "reason"),
    [
        ([1.0], [1.0, 2.0], "at least 2 values of the first group are needed; there is 1 value"),
        ([1.0, 2.0], [], "at least 2 values of the second group are needed; there are 0 values"),
        ([3.0] * 12, [2.0, 4.0], "all 12 values of the first group are equal"),
        (
            [3.0] * 12,
            [2.0] * 2,
            "all 12 values of the first group are equal; all 2 values of the second group are equal",
        ),
    ],
)
def test_no_result(first: list[float], second: list[float], reason: str) -> None:
    assert welch_t(np.array(first), np.array(second)) == NotComputed(reason, (len(first), len(second)))
