"""The permutation test against base R, scipy, exact whole numbers and the enumeration of all relabellings."""

import math
from fractions import Fraction
from itertools import combinations, pairwise
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.permutation_difference import permutation_difference
from beforehand.resampling.streams import Stream
from beforehand.spelling import integer, percent

Numbers = NDArray[np.float64]


def enumerated(first: Any, second: Any, null_value: Any) -> tuple[float, float]:
    """p above and below: the shares of all ways to form the groups whose sum is as large, or as small."""
    pooled = [*(value - null_value for value in first), *second]
    sums = [sum(group) for group in combinations(pooled, len(first))]
    observed = sum(pooled[: len(first)])
    return sum(s >= observed for s in sums) / len(sums), sum(s <= observed for s in sums) / len(sums)


def whole(values: Any, decimals: int) -> list[int]:
    """Values as typed, in units of their last decimal."""
    return [int(Fraction(f"{value:.{decimals}f}") * 10**decimals) for value in values]


def test_base_r(r_case: Any) -> None:
    # shares of whole numbers; R counts in whole thousandths
    r_case.settings.update({"seed": 1, "draws": 300_000})  # lists all 293,930 relabellings
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-12), name


@pytest.mark.parametrize(("ours", "theirs"), [("above", "greater"), ("below", "less")])
def test_scipy(ours: Any, theirs: str, outcome: Any) -> None:
    def difference(x: Numbers, y: Numbers, axis: int) -> Any:
        return np.mean(x, axis=axis) - np.mean(y, axis=axis)

    random = np.random.default_rng(52)
    for n1, n2 in ((3, 4), (6, 5), (2, 9)):
        first, second = random.normal(0.6, 1, n1), random.normal(0, 2, n2)
        found = outcome(permutation_difference(first, second, alternative=ours, seed=1))
        again = stats.permutation_test(
            (first, second), difference, vectorized=True, n_resamples=np.inf, alternative=theirs
        )
        assert found.p == pytest.approx(again.pvalue, rel=1e-12)
        assert found.estimate == pytest.approx(again.statistic, rel=1e-12)


@pytest.mark.parametrize("offset", [0, 100, 10_000, 1_000_000])
def test_ties_on_paper_are_ties(offset: int, outcome: Any) -> None:
    # one-decimal data: floating-point sums of the same values in another order would be told apart
    random = np.random.default_rng(53)
    for _ in range(6):
        first, second = (np.round(random.normal(shift, 1, n), 1) + offset for shift, n in ((0.4, 6), (0.0, 7)))
        for null_value in (0.0, 0.3):
            above, below = enumerated(whole(first, 1), whole(second, 1), round(10 * null_value))
            settings: Any = {"null_value": null_value, "seed": 1}
            assert outcome(permutation_difference(first, second, alternative="above", **settings)).p == above
            assert outcome(permutation_difference(first, second, alternative="below", **settings)).p == below


@pytest.mark.parametrize("offset", [0, 100, 10_000, 1_000_000])
def test_drawn_relabellings_are_counted_exactly(offset: int, outcome: Any) -> None:
    # the same permutations, sums of whole tenths: (b + 1) / (B + 1), by the definition of places in the docstrings
    random = np.random.default_rng(54)
    orders = np.vstack(list(Stream(seed=8, name="permutation_difference").permutations(24, 1999)))
    for _ in range(6):
        first, second = (np.round(random.normal(shift, 1, n), 1) + offset for shift, n in ((0.3, 11), (0.0, 13)))
        tenths = np.array(whole([*np.sort(first), *np.sort(second)], 1))
        sums, observed = tenths[orders[:, :11]].sum(axis=1), tenths[:11].sum()
        found = permutation_difference(first, second, alternative="above", draws=1999, seed=8)
        assert outcome(found).p == (np.count_nonzero(sums >= observed) + 1) / 2000


@pytest.mark.parametrize("seed", range(5))
def test_interval_holds_the_shifts_that_are_kept(seed: int, outcome: Any) -> None:
    # every gap between two critical shifts, and beyond them, asked by enumeration
    random = np.random.default_rng(seed)
    first, second = random.integers(0, 9, 4).tolist(), random.integers(-2, 8, 5).tolist()
    found = outcome(permutation_difference(np.array(first), np.array(second), confidence=0.8, seed=1))
    critical = sorted(
        {
            Fraction(sum(out) - sum(into), count)
            for count in range(1, 5)
            for out in combinations(first, count)
            for into in combinations(second, count)
        }
    )
    gaps = [(a + b) / 2 for a, b in pairwise(critical)]
    for shift in (critical[0] - 1, *gaps, critical[-1] + 1):
        kept = min(enumerated(first, second, shift)) > 0.1 * (1 + 1e-12)
        assert (found.lower < shift < found.upper) == kept
    for end in (found.lower, found.upper):  # the ends themselves are kept
        assert min(enumerated(first, second, Fraction(end).limit_denominator(20))) > 0.1


def test_neither_rows_nor_names_of_groups_decide_what_is_drawn(outcome: Any) -> None:
    random = np.random.default_rng(55)
    for n1, n2 in ((14, 14), (12, 20)):
        first, second = random.normal(0.5, 1, n1), random.normal(0, 1, n2)
        here = outcome(permutation_difference(first, second, alternative="above", draws=999, seed=1))
        there = outcome(permutation_difference(second, first[::-1], alternative="below", draws=999, seed=1))
        assert (here.p, here.lower, here.upper) == (there.p, -there.upper, -there.lower)


def test_the_seed_decides_and_more_draws_come_nearer(outcome: Any) -> None:
    random = np.random.default_rng(56)
    first, second = random.normal(0.7, 1, 10), random.normal(0, 1, 10)
    truth = outcome(permutation_difference(first, second, draws=200_000, seed=1))  # listed: 184,756 relabellings
    assert truth.p == pytest.approx(2 * min(enumerated(first, second, 0)), rel=1e-12)
    drawn = [outcome(permutation_difference(first, second, draws=9999, seed=seed)) for seed in (1, 1, 2)]
    assert drawn[0] == drawn[1]
    assert drawn[0].p != drawn[2].p
    for found in drawn:
        # five standard errors of a share of 9999 draws, doubled for two sides
        assert abs(found.p - truth.p) < 5 * 2 * math.sqrt(truth.p / 2 / 9999)
        assert (found.lower, found.upper) == pytest.approx((truth.lower, truth.upper), abs=0.1)


def test_the_level_is_kept_over_all_allocations(outcome: Any) -> None:
    # under the null hypothesis every way to form the groups is equally probable: P(p <= a) <= a for every a
    pooled = np.array([0.1, 0.1, 0.4, 0.5, 0.9, 1.3, 2.8, 2.8])
    for alternative in ("above", "two_sided"):
        p = []
        for places in combinations(range(8), 3):
            chosen = np.isin(np.arange(8), places)
            found = permutation_difference(pooled[chosen], pooled[~chosen], alternative=alternative, seed=1)
            p.append(outcome(found).p)
        assert all(np.mean(np.array(p) <= level) <= level * (1 + 1e-12) for level in p)


def test_the_statistic_is_monotone_in_students_t(outcome: Any) -> None:
    # z² = (N - 1) t² / (N - 2 + t²): algebra, for the pooled t-test at the same null value
    random = np.random.default_rng(58)
    first, second = random.normal(1, 1, 7), random.normal(0, 1, 5)
    for null_value in (0.0, 0.6):
        t = stats.ttest_ind(first - null_value, second).statistic
        found = outcome(permutation_difference(first, second, null_value=null_value, seed=1))
        assert found.statistic == pytest.approx(t * math.sqrt(11 / (10 + t**2)), rel=1e-12)


def test_what_is_printed(outcome: Any) -> None:
    random = np.random.default_rng(59)
    samples = random.normal(0, 1, 3), random.normal(0, 1, 4)
    listed = outcome(permutation_difference(*samples, confidence=0.99, seed=1))
    assert listed.remarks == (
        f"All 35 relabellings are counted (the rule for up to {integer(100_000)}).",
        f"So few relabellings allow no lower and no upper end of an interval with a confidence of {percent(0.99)}.",
    )
    drawn = outcome(permutation_difference(np.arange(20.0), np.arange(20.0) + 3, draws=999, seed=4))
    share = drawn.p / 2
    error = 2 * math.sqrt(share * (1 - share) / 999)
    assert drawn.remarks[0].startswith("999 relabellings are drawn with the seed 4 and counted with the observed one")
    assert drawn.remarks[0].endswith(f"by the draws alone p has a standard error of {error:.3f}.")


@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
def test_smallest_p_is_attained(alternative: Any, outcome: Any) -> None:
    pooled = np.array([1.0, 2, 2, 3, 5, 5, 5])
    found = []
    for places in combinations(range(7), 3):
        chosen = np.isin(np.arange(7), places)
        call = pooled[chosen], pooled[~chosen]
        found.append(outcome(permutation_difference(*call, alternative=alternative, seed=1)).p)
    smallest = permutation_difference.smallest_p((3, 4), pooled, alternative=alternative)
    assert smallest == pytest.approx(min(found), rel=1e-12)


def test_smallest_p_before_data() -> None:
    smallest = permutation_difference.smallest_p
    assert smallest((3, 4), None, alternative="above") == 1 / 35
    assert smallest((30, 40), None, alternative="two_sided") == 2 / 10_000
    assert smallest((30, 40), None, alternative="above", draws=999, seed=3) == 1 / 1000
    assert smallest((30, 40), None, alternative="above", draws=99, seed=3) == 1
    assert smallest((0, 4), None, alternative="above") == 1


@pytest.mark.parametrize(
    ("first", "second", "settings", "reason"),
    [
        ([], [1.0], {}, "at least 1 value of the first group is needed; there are 0 values"),
        ([2.0, 2], [2.0], {}, "all 3 values of both groups are equal"),
        (
            [0.3, 0.3],
            [0.2],
            {"null_value": 0.1},
            "all 3 values are equal once the null value is taken off the first group",
        ),
        ([1.0], [2.0], {"seed": -4}, "a seed is a whole number from 0 on; the option says -4"),
        (
            [1.0],
            [2.0],
            {"draws": 998},
            f"the number of draws lies between 999 and {integer(1_000_000)}; the option says 998",
        ),
    ],
)
def test_no_result(first: Any, second: Any, settings: dict[str, Any], reason: str) -> None:
    for ask in (permutation_difference, permutation_difference.again):
        found = ask(np.array(first), np.array(second), **{"seed": 1, **settings})
        assert found == NotComputed(reason, (len(first), len(second)))


def test_a_seed_is_needed() -> None:
    with pytest.raises(TypeError, match="seed"):
        permutation_difference(np.arange(3.0), np.ones(3))  # type: ignore[call-arg]
