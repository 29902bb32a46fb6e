"""The one-sample t-test against printed values, base R, scipy and closed forms."""

import math
from typing import Any

import numpy as np
import pytest
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.one_sample_t import one_sample_t


def test_sleep(reference: Any, outcome: Any) -> None:
    sleep = reference("t1-sleep")
    found = outcome(one_sample_t(np.append(sleep.data("group1"), sleep.data("group2"))))
    for place, end in enumerate((found.lower, found.upper)):
        assert sleep.agrees("ci95", end, place)
    for name, value in (("t", found.statistic), ("p_two_sided", found.p), ("mean", found.estimate), ("df", found.df)):
        assert sleep.agrees(name, value), name


def test_particles(reference: Any, outcome: Any) -> None:
    particles = reference("t1-particles")
    two_sided = outcome(one_sample_t(particles.data("y"), null_value=50))
    above = outcome(one_sample_t(particles.data("y"), null_value=50, alternative="above"))
    assert particles.agrees("t", two_sided.statistic)
    assert particles.agrees("p_two_sided", two_sided.p)
    assert particles.agrees("p_greater", above.p)


def test_base_r(r_case: Any) -> None:
    # both compute Student's t to about 1e-12
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-11), name


@pytest.mark.parametrize(("ours", "theirs"), [("above", "greater"), ("below", "less"), ("two_sided", "two-sided")])
def test_scipy(ours: Any, theirs: str, outcome: Any) -> None:
    random = np.random.default_rng(11)
    for n in (2, 3, 8, 40, 300):
        values = random.gamma(2, 3, n) * 10.0 ** random.integers(-9, 9)
        null_value = float(values.mean() * random.uniform(0.5, 1.5))
        found = outcome(one_sample_t(values, null_value=null_value, alternative=ours, confidence=0.9))
        again = stats.ttest_1samp(values, null_value, alternative=theirs)
        # near a null value that is close to the mean, theirs loses digits in mean - null
        assert found.statistic == pytest.approx(again.statistic, rel=1e-10)
        assert found.p == pytest.approx(again.pvalue, rel=1e-10)
        if ours == "two_sided":
            interval = again.confidence_interval(0.9)
            assert (found.lower, found.upper) == pytest.approx(tuple(interval), rel=1e-10)


def test_two_values_follow_cauchy(outcome: Any) -> None:
    # df = 1 is the Cauchy distribution: P(|T| >= t) = 2/π arctan(1/t)
    found = outcome(one_sample_t(np.array([1.0, 1.5])))
    assert found.statistic == pytest.approx(5)
    assert found.p == pytest.approx(2 / math.pi * math.atan(1 / 5), rel=1e-13)


def test_three_values_far_out(outcome: Any) -> None:
    # df = 2: P(|T| >= t) = 1 - t/√(2 + t²) = 2 / (√(2 + t²) (√(2 + t²) + t)), by integrating the density
    values = np.array([-1.0, 0.0, 1.0]) * 2.0**-40
    found = outcome(one_sample_t(values, null_value=-(2.0**400)))
    t = 2.0**440 * math.sqrt(3)
    assert found.p == pytest.approx(1 / t**2, rel=1e-12)
    assert found.p < 1e-264


def test_offsets_cost_no_digits(outcome: Any) -> None:
    # quarters up to 2^52 are exact in a double: moving the data moves mean and interval and nothing else
    values = np.array([0.25, 1.5, 2.75, 0.5, 1.0, 3.25])
    here, there = outcome(one_sample_t(values, null_value=1)), outcome(one_sample_t(values + 1e14, null_value=1e14 + 1))
    assert there.p == here.p
    assert there.statistic == here.statistic
    assert there.standard_error == here.standard_error


def test_a_mean_on_the_null_value_is_exactly_there(outcome: Any) -> None:
    # 0.1 + 0.2 - 0.3 is 5.6e-17 in doubles, and the exact sum of these three doubles is 2.8e-17
    found = outcome(one_sample_t(np.array([0.1, 0.2, -0.3])))
    assert found.estimate == pytest.approx(2.0**-55 / 3, rel=1e-15)
    assert outcome(one_sample_t(np.array([-0.3, 0.0, 0.3]))).p == 1


@pytest.mark.parametrize(
    ("values", "reason"),
    [
        ([], "at least 2 values are needed; there are 0 values"),
        ([1.5], "at least 2 values are needed; there is 1 value"),
        ([7.2] * 12, "all 12 values are equal"),
        ([0.3 - 0.2, 0.2 - 0.1, 0.1], "all 3 values are equal"),
        ([1.0, math.inf], "a value is infinite or too large to compute with"),
    ],
)
def test_no_result(values: list[float], reason: str) -> None:
    assert one_sample_t(np.array(values)) == NotComputed(reason, (len(values),))


def test_a_missing_value_is_not_for_a_test() -> None:
    with pytest.raises(ValueError, match="holds no missing value"):
        one_sample_t(np.array([1.0, math.nan, 2.0]))
