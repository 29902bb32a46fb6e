"""The t-test with the variance pooled over all groups against printed values, statsmodels and Student's own."""

from typing import Any

import numpy as np
import pytest
from statsmodels.regression.linear_model import OLS

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.student_t import student_t
from beforehand.hypothesis_tests.entries.t_contrast import t_contrast


@pytest.mark.parametrize("name", ["dunnett-1955", "dunnett-mucociliary"])
def test_with_a_control(name: str, reference: Any, outcome: Any) -> None:
    known = reference(name)
    control, *others = (known.data(group) for group in known.entry["data"])
    for place, group in enumerate(others):
        found = outcome(t_contrast(group, control, *(other for other in others if other is not group)))
        assert known.agrees("t", found.statistic, place)
        assert known.agrees("diff", found.estimate, place)
        assert known.agrees("df", found.df)


def test_handbook(reference: Any, outcome: Any) -> None:
    known = reference("scheffe-handbook")
    groups = [reference("tukey-handbook").data(f"group{i}") for i in (1, 2, 3, 4)]
    found = outcome(t_contrast(*groups))
    # variance of a difference of two means of 5 values: 2/5 of the mean squared error
    assert known.agrees("mse", found.standard_error**2 * 5 / 2)
    assert found.df == 16


@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
def test_no_other_groups_is_student(alternative: Any, outcome: Any) -> None:
    random = np.random.default_rng(41)
    for n1, n2 in ((1, 2), (5, 3), (30, 50)):
        samples = random.normal(0, 1, n1), random.normal(1, 1, n2)
        asked = {"null_value": 0.3, "alternative": alternative, "confidence": 0.9}
        here, there = outcome(t_contrast(*samples, **asked)), outcome(student_t(*samples, **asked))
        assert (here.estimate, here.df, here.n) == (there.estimate, there.df, there.n)
        for number in ("statistic", "p", "lower", "upper", "standard_error"):
            assert getattr(here, number) == pytest.approx(getattr(there, number), rel=1e-13)


def test_least_squares(outcome: Any) -> None:
    # a column for each group: the contrast of two coefficients, by statsmodels
    random = np.random.default_rng(42)
    groups = [random.normal(i, 2, n) for i, n in enumerate((4, 9, 1, 6))]
    design = np.repeat(np.eye(4), [group.size for group in groups], axis=0)
    again = OLS(np.concatenate(groups), design).fit().t_test([1, -1, 0, 0])
    found = outcome(t_contrast(*groups))
    assert found.statistic == pytest.approx(again.tvalue.item(), rel=1e-11)
    assert found.p == pytest.approx(again.pvalue.item(), rel=1e-10)
    assert (found.lower, found.upper) == pytest.approx(tuple(again.conf_int()[0]), rel=1e-10)
    assert found.n == (4, 9, 1, 6)


@pytest.mark.parametrize("kind", ["plain", "far", "tiny", "huge"])
def test_other_groups_are_computed_twice(kind: str, outcome: Any) -> None:
    random = np.random.default_rng(43)
    scale, offset = {"tiny": 1e-200, "huge": 1e200}.get(kind, 1.0), 1e6 if kind == "far" else 0.0
    for _ in range(10):
        groups = [(random.normal(offset, 1, int(n))) * scale for n in random.integers(1, 9, 5)]
        groups.append(np.empty(0))
        asked: Any = {"null_value": 0.2 * scale, "alternative": "below", "confidence": 0.99}
        first, again = outcome(t_contrast(*groups, **asked)), outcome(t_contrast.again(*groups, **asked))
        assert (first.n, first.remarks, first.df) == (again.n, again.remarks, again.df)
        for number in ("estimate", "lower", "upper", "statistic", "p", "standard_error"):
            assert getattr(first, number) == pytest.approx(getattr(again, number), rel=1e-9)


def test_other_groups_count_in_the_variance_alone(outcome: Any) -> None:
    one, two, other = np.array([1.0, 2, 3]), np.array([2.0, 4, 3]), np.array([0.0, 100])
    alone, beside = outcome(t_contrast(one, two)), outcome(t_contrast(one, two, other))
    assert alone.estimate == beside.estimate
    assert (alone.df, beside.df) == (4, 5)
    # sums of squares 2 and 2, and 5,000
    assert beside.standard_error == pytest.approx(np.sqrt(5004 / 5 * (2 / 3)), rel=1e-14)
    assert beside.remarks == ("The variance is pooled over 3 groups with 8 values.",)
    assert outcome(t_contrast(one, two, np.empty(0))).n == (3, 3, 0)


def test_a_flat_group_is_remarked(outcome: Any) -> None:
    found = outcome(t_contrast(np.array([1.0, 2]), np.array([3.0]), np.full(4, 7.0)))
    assert found.remarks[1] == "All values of 1 group are equal, which speaks against equal variances."


@pytest.mark.parametrize(
    ("groups", "reason"),
    [
        (([], [1.0, 2.0], [3.0, 1.0]), "at least 1 value of the first group is needed; there are 0 values"),
        (([1.0], [], [3.0, 1.0]), "at least 1 value of the second group is needed; there are 0 values"),
        (([1.0], [2.0], [5.0]), "at least 4 values of 3 groups together are needed; there are 3 values"),
        (([1.0, 1.0], [2.0] * 3, [5.0]), "all values of each of the 3 groups are equal"),
    ],
)
def test_no_result(groups: tuple[list[float], ...], reason: str) -> None:
    found = t_contrast(*(np.array(group) for group in groups))
    assert found == NotComputed(reason, tuple(len(group) for group in groups))
