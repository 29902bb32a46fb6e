"""Student's two-sample t-test against printed values, base R, scipy and statsmodels."""

from typing import Any

import numpy as np
import pytest
from scipy import stats
from statsmodels.stats.weightstats import CompareMeans, DescrStatsW

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.student_t import student_t


def test_assembly(reference: Any, outcome: Any) -> None:
    assembly = reference("t-two-assembly")
    found = outcome(student_t(assembly.data("old"), assembly.data("new"), alternative="above"))
    assert assembly.agrees("pooled_p_greater", found.p)
    assert found.df == 18


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
    random = np.random.default_rng(14)
    for n1, n2 in ((1, 2), (4, 3), (30, 50)):
        first, second = random.normal(5, 2, n1), random.normal(4, 2, n2)
        found = outcome(student_t(first, second, alternative=ours, confidence=0.9))
        again = stats.ttest_ind(first, second, equal_var=True, alternative=scipys)
        assert (found.statistic, found.p, found.df) == pytest.approx(
            (again.statistic, again.pvalue, again.df), rel=1e-10
        )
        if ours == "two_sided":
            assert (found.lower, found.upper) == pytest.approx(tuple(again.confidence_interval(0.9)), rel=1e-10)
        if n1 > 1:
            compare = CompareMeans(DescrStatsW(first), DescrStatsW(second))
            moved = outcome(student_t(first, second, null_value=0.7, alternative=ours))
            t, p, _ = compare.ttest_ind(alternative=statsmodels, usevar="pooled", value=0.7)
            assert (moved.statistic, moved.p) == pytest.approx((t, p), rel=1e-9)
            assert moved.standard_error == pytest.approx(compare.std_meandiff_pooledvar, rel=1e-12)


def test_one_flat_group_is_remarked(outcome: Any) -> None:
    found = outcome(student_t(np.full(5, 2.0), np.array([1.0, 2.0, 4.0])))
    assert found.remarks == ("All values of the first group are equal, which speaks against equal variances.",)


@pytest.mark.parametrize(
    ("first", "second", "reason"),
    [
        ([], [1.0, 2.0], "at least 1 value of the first group is needed; there are 0 values"),
        ([1.0], [2.0], "at least 3 values of both groups together are needed; there are 2 values"),
        ([3.0] * 12, [2.0] * 5, "all 12 values of the first group are equal, and all 5 of the second"),
    ],
)
def test_no_result(first: list[float], second: list[float], reason: str) -> None:
    found = student_t(np.array(first), np.array(second))
    assert found == NotComputed(reason, (len(first), len(second)))
