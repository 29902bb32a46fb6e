"""The sign test against printed values, base R, statsmodels and binomial sums."""

import math
from itertools import product
from typing import Any

import numpy as np
import pytest
from scipy import stats
from statsmodels.stats.descriptivestats import sign_test

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.sign import sign
from beforehand.hypothesis_tests.location import OPEN_END


def test_sleep(reference: Any, outcome: Any) -> None:
    sleep = reference("sign-sleep")
    found = outcome(sign(sleep.data("group2"), sleep.data("group1")))
    assert sleep.agrees("p_two", found.p)
    assert found.statistic == sleep.entry["expected"]["n_nonzero"]
    assert found.remarks == ("Exact binomial distribution; 1 difference equals the null value and is dropped.",)


def test_heights(reference: Any, outcome: Any) -> None:
    heights = reference("perm-darwin")
    differences = heights.data("difference_eighths_inch")
    assert heights.agrees("sign_test_p", outcome(sign(differences, np.zeros(15))).p)


def test_base_r(r_case: Any) -> None:
    # counts of whole numbers, and ends that are differences of the data
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-12, abs=1e-9), name


def test_statsmodels(outcome: Any) -> None:
    random = np.random.default_rng(41)
    for n in (3, 12, 200):
        first, second = np.round(random.normal(0.4, 1, n), 1), np.round(random.normal(0, 1, n), 1)
        differences = np.round(first - second, 1)
        for null_value in (0.0, 0.3):
            found = outcome(sign(first, second, null_value=null_value))
            assert found.p == pytest.approx(sign_test(differences, null_value)[1], rel=1e-12)


@pytest.mark.parametrize("zeros", ["dropped", "against"])
@pytest.mark.parametrize("seed", range(6))
def test_zeros(seed: int, zeros: Any, outcome: Any) -> None:
    # P(X >= k) of fair coins by scipy's binomial distribution, coins for all differences or for those with a sign
    differences = np.random.default_rng(seed).integers(-2, 4, 11) + 0.0
    for null_value in (0.0, 1.0, 0.5):
        above, below = int((differences > null_value).sum()), int((differences < null_value).sum())
        trials = 11 if zeros == "against" else above + below
        p = [float(stats.binom.sf(count - 1, trials, 0.5)) for count in (above, below)]
        settings: Any = {"null_value": null_value, "zeros": zeros}
        call = differences, np.zeros(11)
        assert outcome(sign(*call, alternative="above", **settings)).p == pytest.approx(p[0], rel=1e-12)
        assert outcome(sign(*call, alternative="below", **settings)).p == pytest.approx(p[1], rel=1e-12)
        assert outcome(sign(*call, **settings)).p == pytest.approx(min(1, 2 * min(p)), rel=1e-12)


def test_confidence_of_ordered_values(outcome: Any) -> None:
    # tables of the sign test interval for the median: n = 10, from the 2nd to the 9th value, 97.9 % (from memory);
    # n = 20, from the 6th to the 15th, 95.9 % (from memory). Recomputed here: 1 - 2 P(X < k)
    for n, k, confidence in ((10, 2, 0.979), (20, 6, 0.959)):
        assert 1 - 2 * stats.binom.cdf(k - 1, n, 0.5) == pytest.approx(confidence, abs=5e-4)
        found = outcome(sign(np.arange(1.0, n + 1), np.zeros(n)))
        assert (found.lower, found.upper) == (k, n + 1 - k)


def test_coverage_is_at_least_the_confidence_even_with_ties(outcome: Any) -> None:
    # all samples of 5 out of a distribution on 0, 1, 2 whose median is 1, weighted by their probability
    share = {0.0: 0.3, 1.0: 0.3, 2.0: 0.4}
    covered = 0.0
    for sample in product(share, repeat=5):
        found = sign(np.array(sample), np.full(5, 7.0), confidence=0.9, null_value=-100.0)
        result = outcome(found)
        covered += math.prod(share[value] for value in sample) * (result.lower <= 1 - 7 <= result.upper)
    assert covered >= 0.9


def test_dropped_zeros_reject_a_median_that_is_there_and_zeros_against_dont(outcome: Any) -> None:
    # 60 of 100 differences are 0, so 0 is the median; of the rest 32 are above
    differences = np.r_[np.zeros(60), np.ones(32), -np.ones(8)]
    assert outcome(sign(differences, np.zeros(100))).p < 0.001
    against = outcome(sign(differences, np.zeros(100), zeros="against"))
    assert against.p == 1
    assert against.remarks[0].endswith("60 differences equal the null value and are counted against either side.")


def test_an_end_that_is_rejected_is_named(outcome: Any) -> None:
    # the lower end is 0; dropped there, the ten zeros leave twenty differences above it and one below
    differences = np.r_[-1.0, np.zeros(10), np.arange(1.0, 21)]
    found = outcome(sign(differences, np.zeros(31)))
    assert found.lower == 0
    assert found.p < 0.05
    assert OPEN_END in found.remarks
    assert OPEN_END not in outcome(sign(differences, np.zeros(31), zeros="against")).remarks


def test_differences_that_equal_the_null_value_on_paper(outcome: Any) -> None:
    # on paper all but the last are 0.1
    first, second = np.array([0.3, 0.2, 1.1, 0.8]), np.array([0.2, 0.1, 1.0, 0.2])
    found = outcome(sign(first, second, null_value=0.1, alternative="above"))
    assert (found.statistic, found.p) == (1, 0.5)


def test_far_tail_and_many_pairs(outcome: Any) -> None:
    assert outcome(sign(np.ones(900), np.zeros(900), alternative="above")).p == pytest.approx(0.5**900, rel=1e-12)
    many = np.random.default_rng(42).normal(0.01, 1, 20_000)
    first, again = (outcome(ask(many, np.zeros(20_000))) for ask in (sign, sign.again))
    assert first.p == pytest.approx(again.p, rel=1e-9)
    assert (first.lower, first.upper) == (again.lower, again.upper)


@pytest.mark.parametrize("zeros", ["dropped", "against"])
@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
def test_smallest_p_is_attained(alternative: Any, zeros: Any, outcome: Any) -> None:
    sizes = np.array([0.0, 0, 1, 2, 2, 5])
    settings: Any = {"alternative": alternative, "zeros": zeros}
    found = [
        outcome(sign(sizes * np.array(signs), np.zeros(6), **settings)).p for signs in product((1.0, -1.0), repeat=6)
    ]
    assert sign.smallest_p((6,), sizes, **settings) == pytest.approx(min(found), rel=1e-12)


def test_smallest_p_before_data() -> None:
    assert sign.smallest_p((5,), None, alternative="above") == pytest.approx(1 / 32, rel=1e-14)
    assert sign.smallest_p((5,), None, alternative="two_sided") == pytest.approx(1 / 16, rel=1e-14)
    assert sign.smallest_p((5,), np.zeros(5), alternative="above") == 1
    assert sign.smallest_p((0,), None, alternative="above") == 1


@pytest.mark.parametrize(
    ("first", "second", "null_value", "reason"),
    [
        ([], [], 0.0, "at least 1 pair is needed; there are 0 pairs"),
        ([0.3, 0.2], [0.3, 0.2], 0.0, "all 2 differences within pairs equal the null value"),
        ([0.3, 0.2], [0.2, 0.1], 0.1, "all 2 differences within pairs equal the null value"),
    ],
)
def test_no_result(first: Any, second: Any, null_value: float, reason: str) -> None:
    found = sign(np.array(first), np.array(second), null_value=null_value)
    assert found == NotComputed(reason, (len(first),))


def test_refused_calls() -> None:
    for ask in (sign, sign.again):
        with pytest.raises(ValueError, match="zeros is dropped or against; found 'split'"):
            ask(np.arange(3.0), np.ones(3), zeros="split")  # type: ignore[arg-type]
