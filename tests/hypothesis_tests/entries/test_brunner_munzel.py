"""The Brunner-Munzel test against printed values, base R, scipy and statsmodels; groups apart against enumeration."""

from fractions import Fraction
from itertools import product
from typing import Any

import numpy as np
import pytest
from scipy import stats
from statsmodels.stats.nonparametric import rank_compare_2indep

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.brunner_munzel import brunner_munzel


def test_ratings(reference: Any, outcome: Any) -> None:
    ratings = reference("bm-munzel-hauschke")
    levels = ratings.data("levels")
    new, active = (np.repeat(levels, ratings.data(name).astype(int)) for name in ("new", "active"))
    # the source asks how probable it is that the active treatment is rated higher
    found = outcome(brunner_munzel(active, new))
    assert ratings.agrees("prob", found.estimate)
    assert ratings.agrees("t", found.statistic)
    assert ratings.agrees("df", found.df)
    assert ratings.agrees("p", found.p)
    for place, end in enumerate((found.lower, found.upper)):
        assert ratings.agrees("ci95", end, place)


def test_base_r(r_case: Any) -> None:
    # both compute Student's t to about 1e-12
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-11), name


@pytest.mark.parametrize(
    ("ours", "theirs", "larger"),
    [("above", "greater", "larger"), ("below", "less", "smaller"), ("two_sided", "two-sided", "two-sided")],
)
def test_scipy_and_statsmodels(ours: Any, theirs: str, larger: str, outcome: Any) -> None:
    # scipy's statistic is positive when the second sample is larger; its alternatives speak of the first
    random = np.random.default_rng(66)
    for n1, n2 in ((7, 9), (30, 50)):
        first, second = np.round(random.normal(0.4, 1, n1), 1), np.round(random.normal(0, 2, n2), 1)
        found = outcome(brunner_munzel(first, second, alternative=ours))
        again = stats.brunnermunzel(first, second, alternative=theirs)
        assert (found.p, found.statistic) == pytest.approx((again.pvalue, -again.statistic), rel=1e-10)
        compare = rank_compare_2indep(first, second)
        assert found.estimate == pytest.approx(compare.prob1, rel=1e-12)
        moved = outcome(brunner_munzel(first, second, null_value=0.4, alternative=ours))
        assert moved.p == pytest.approx(compare.test_prob_superior(0.4, alternative=larger).pvalue, rel=1e-10)
        ends = compare.conf_int(alpha=0.05)
        assert (found.lower, found.upper) == pytest.approx((max(0, ends[0]), min(1, ends[1])), rel=1e-10)


def test_the_interval_stays_within_0_and_1(outcome: Any) -> None:
    found = outcome(brunner_munzel(np.array([1.0, 2, 3, 8]), np.array([0.0, 0.5, 1, 2, -1])))
    assert found.upper == 1
    assert 0 < found.lower < found.estimate < 1


def test_values_that_are_tied_on_paper(outcome: Any) -> None:
    first, second = np.array([0.1 + 0.2, 0.4, 0.1]), np.array([0.3, 0.7, 0.2])
    found, typed = outcome(brunner_munzel(first, second)), outcome(brunner_munzel(10 * first, np.array([3.0, 7, 2])))
    assert found.estimate == pytest.approx((1.5 + 2 + 0) / 9, rel=1e-15)
    assert found.p == typed.p


def test_groups_apart(outcome: Any) -> None:
    low, high = np.array([1.0, 2, 3]), np.array([4.0, 5, 6, 7])
    above = outcome(brunner_munzel(high, low, null_value=0.4, alternative="above"))
    assert above.p == pytest.approx(0.4**3, rel=1e-14)
    assert (above.estimate, above.upper) == (1, 1)
    assert above.lower == pytest.approx(0.025 ** (1 / 3), rel=1e-14)
    assert outcome(brunner_munzel(high, low, null_value=0.4, alternative="below")).p == 1
    below = outcome(brunner_munzel(low, high, null_value=0.4))
    assert below.p == pytest.approx(2 * 0.6**3, rel=1e-14)
    assert (below.estimate, below.lower) == (0, 0)
    assert below.upper == pytest.approx(1 - 0.025 ** (1 / 3), rel=1e-14)
    assert "to the power of 3" in below.remarks[0]


@pytest.mark.parametrize("seed", range(4))
def test_the_bound_for_groups_apart_holds_for_every_distribution(seed: int) -> None:
    # two distributions on 0 to 3 with shares in twelfths: the probability that 2 and 3 values are apart, by listing
    # all samples in exact fractions, against the bound with the larger value's probability
    random = np.random.default_rng(seed)
    shares = [[Fraction(int(w), 12) for w in random.multinomial(12, [0.25] * 4)] for _ in range(2)]
    larger = sum(p * q * (Fraction(x > y) + Fraction(x == y, 2)) for (x, p), (y, q) in product(*map(enumerate, shares)))
    apart = sum(
        np.prod([shares[0][x] for x in first]) * np.prod([shares[1][y] for y in second])
        for first in product(range(4), repeat=2)
        for second in product(range(4), repeat=3)
        if min(first) > max(second)
    )
    assert apart <= larger**2


def test_the_bound_is_attained_when_one_group_is_constant(outcome: Any) -> None:
    # the second group is always 0, the first 1 with probability 0.3 and else -1: P(apart above) = 0.3²
    found = outcome(brunner_munzel(np.array([1.0, 1]), np.zeros(5), null_value=0.3, alternative="above"))
    assert found.p == pytest.approx(0.3**2, rel=1e-14)


@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
@pytest.mark.parametrize("null_value", [0.5, 0.3])
def test_no_data_give_a_smaller_p(alternative: Any, null_value: float, outcome: Any) -> None:
    found = [
        brunner_munzel(
            np.array(values[:2]) + 0.0, np.array(values[2:]) + 0.0, alternative=alternative, null_value=null_value
        )
        for values in product(range(4), repeat=5)
        if len(set(values)) > 1
    ]
    smallest = brunner_munzel.smallest_p((2, 3), None, alternative=alternative, null_value=null_value)
    assert 0 < smallest <= min(outcome(one).p for one in found)
    assert brunner_munzel.smallest_p((1, 3), None, alternative=alternative, null_value=null_value) == 1


@pytest.mark.parametrize(
    ("first", "second", "reason"),
    [
        ([1.0], [1.0, 2.0], "at least 2 values of the first group are needed; there is 1 value"),
        ([1.0, 2.0], [], "at least 2 values of the second group are needed; there are 0 values"),
        ([3.0, 3.0], [3.0, 3.0], "all 4 values of both groups are equal"),
    ],
)
def test_no_result(first: list[float], second: list[float], reason: str) -> None:
    assert brunner_munzel(np.array(first), np.array(second)) == NotComputed(reason, (len(first), len(second)))


@pytest.mark.parametrize("null_value", [0.0, 1.0, -0.2, 1.5])
def test_null_values_that_are_no_probability(null_value: float) -> None:
    for ask in (brunner_munzel, brunner_munzel.again):
        with pytest.raises(ValueError, match=f"lies between 0 and 1; found {null_value}"):
            ask(np.arange(3.0), np.arange(4.0), null_value=null_value)
