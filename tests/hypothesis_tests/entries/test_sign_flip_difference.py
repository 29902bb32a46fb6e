"""The sign-flip test against printed values, base R, scipy and the enumeration of all signs."""

import math
from fractions import Fraction
from itertools import combinations, pairwise, product
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.sign_flip_difference import sign_flip_difference
from beforehand.resampling.streams import Stream

Numbers = NDArray[np.float64]


def enumerated(differences: Any, null_value: Any) -> tuple[float, float]:
    """p above and below: the shares of all signs whose sum is as large, or as small."""
    away = [difference - null_value for difference in differences]
    sums = [sum(s * a for s, a in zip(signs, away, strict=True)) for signs in product((1, -1), repeat=len(away))]
    return sum(s >= sum(away) for s in sums) / len(sums), sum(s <= sum(away) for s in sums) / len(sums)


def test_heights(reference: Any, outcome: Any) -> None:
    heights = reference("perm-darwin")
    differences = heights.data("difference_eighths_inch")
    found = outcome(sign_flip_difference(differences, np.zeros(15), seed=1))
    assert heights.agrees("perm_p_two_sided", found.p)
    assert heights.agrees("sum", 15 * found.estimate)
    above = outcome(sign_flip_difference(differences, np.zeros(15), alternative="above", seed=1))
    assert heights.agrees("n_arrangements_ge", above.p * 2**15)


def test_base_r(r_case: Any) -> None:
    # shares of whole numbers; R counts in whole thousandths
    r_case.settings["seed"] = 1
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-12), name


@pytest.mark.parametrize(("ours", "theirs"), [("above", "greater"), ("below", "less")])
def test_scipy(ours: Any, theirs: str, outcome: Any) -> None:
    def difference(x: Numbers, y: Numbers, axis: int) -> Any:
        return np.mean(x - y, axis=axis)

    random = np.random.default_rng(60)
    for n in (3, 8):
        first, second = random.normal(0.6, 1, n), random.normal(0, 2, n)
        found = outcome(sign_flip_difference(first, second, alternative=ours, seed=1))
        again = stats.permutation_test(
            (first, second),
            difference,
            vectorized=True,
            permutation_type="samples",
            n_resamples=np.inf,
            alternative=theirs,
        )
        assert found.p == pytest.approx(again.pvalue, rel=1e-12)


@pytest.mark.parametrize("offset", [0, 100, 10_000, 1_000_000])
def test_ties_on_paper_are_ties(offset: int, outcome: Any) -> None:
    random = np.random.default_rng(61)
    for _ in range(6):
        first, second = (np.round(random.normal(shift, 1, 9), 1) + offset for shift in (0.4, 0.0))
        tenths = [round(10 * (a - b)) for a, b in zip(first.tolist(), second.tolist(), strict=True)]
        for null_value in (0.0, 0.3):
            above, below = enumerated(tenths, round(10 * null_value))
            settings: Any = {"null_value": null_value, "seed": 1}
            assert outcome(sign_flip_difference(first, second, alternative="above", **settings)).p == above
            assert outcome(sign_flip_difference(first, second, alternative="below", **settings)).p == below


@pytest.mark.parametrize("offset", [0, 100, 10_000, 1_000_000])
def test_drawn_signs_are_counted_exactly(offset: int, outcome: Any) -> None:
    # the same coins on whole tenths: (b + 1) / (B + 1); places from the largest difference downwards
    random = np.random.default_rng(62)
    coins = np.vstack(list(Stream(seed=8, name="sign_flip_difference").signs(24, 1999)))
    for _ in range(6):
        first, second = (np.round(random.normal(shift, 1, 24), 1) + offset for shift in (0.3, 0.0))
        differences = np.sort(first - second)
        turned = (-differences[::-1]).tolist() < differences.tolist()
        places = np.rint(10 * (differences[::-1] if turned else differences)).astype(int)
        signs = np.where(coins, -1, 1)
        found = sign_flip_difference(first, second, alternative="above", draws=1999, seed=8)
        assert outcome(found).p == (np.count_nonzero(signs @ places >= places.sum()) + 1) / 2000


@pytest.mark.parametrize("seed", range(5))
def test_interval_holds_the_null_values_that_are_kept(seed: int, outcome: Any) -> None:
    # every gap between two means of some of the differences, and beyond them, asked by enumeration
    differences = np.random.default_rng(seed).integers(-3, 9, 7).tolist()
    found = outcome(sign_flip_difference(np.array(differences), np.zeros(7), confidence=0.8, seed=1))
    critical = sorted({Fraction(sum(some), k) for k in range(1, 8) for some in combinations(differences, k)})
    gaps = [(a + b) / 2 for a, b in pairwise(critical)]
    for null_value in (critical[0] - 1, *gaps, critical[-1] + 1):
        kept = min(enumerated(differences, null_value)) > 0.1 * (1 + 1e-12)
        assert (found.lower < null_value < found.upper) == kept
    for end in (found.lower, found.upper):  # the ends themselves are kept
        assert min(enumerated(differences, Fraction(end).limit_denominator(20))) > 0.1


def test_first_and_second_exchanged_mirror_the_draws(outcome: Any) -> None:
    random = np.random.default_rng(63)
    first, second = random.normal(0.5, 1, 25), random.normal(0, 1, 25)
    here = outcome(sign_flip_difference(first, second, alternative="above", draws=999, seed=1))
    there = outcome(sign_flip_difference(second[::-1], first[::-1], alternative="below", draws=999, seed=1))
    assert (here.p, here.lower, here.upper) == (there.p, -there.upper, -there.lower)


def test_the_seed_decides_and_more_draws_come_nearer(outcome: Any) -> None:
    random = np.random.default_rng(64)
    first, second = random.normal(0.7, 1, 17), random.normal(0, 1, 17)
    truth = outcome(sign_flip_difference(first, second, draws=200_000, seed=1))  # listed: 131,072 ways
    drawn = [outcome(sign_flip_difference(first, second, seed=seed)) for seed in (1, 1, 2)]
    assert drawn[0] == drawn[1]
    assert drawn[0].p != drawn[2].p
    for found in drawn:
        # five standard errors of a share of 9999 draws, doubled for two sides
        assert abs(found.p - truth.p) < 5 * 2 * math.sqrt(truth.p / 2 / 9999)
        assert (found.lower, found.upper) == pytest.approx((truth.lower, truth.upper), abs=0.1)


def test_the_statistic_is_monotone_in_students_t(outcome: Any) -> None:
    # z² = n t² / (n - 1 + t²): algebra, for the paired t-test at the same null value
    differences = np.random.default_rng(65).normal(1, 1, 7)
    for null_value in (0.0, 0.6):
        t = stats.ttest_1samp(differences, null_value).statistic
        found = outcome(sign_flip_difference(differences, np.zeros(7), null_value=null_value, seed=1))
        assert found.statistic == pytest.approx(t * math.sqrt(7 / (6 + t**2)), rel=1e-12)


@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
def test_smallest_p_is_attained(alternative: Any, outcome: Any) -> None:
    sizes = np.array([0.0, 0, 1, 2, 2, 5])
    found = [
        outcome(sign_flip_difference(sizes * np.array(signs), np.zeros(6), alternative=alternative, seed=1)).p
        for signs in product((1.0, -1.0), repeat=6)
    ]
    smallest = sign_flip_difference.smallest_p((6,), sizes, alternative=alternative)
    assert smallest == pytest.approx(min(found), rel=1e-12)


def test_smallest_p_before_data() -> None:
    smallest = sign_flip_difference.smallest_p
    assert smallest((5,), None, alternative="above") == 1 / 32
    assert smallest((50,), None, alternative="two_sided") == 2 / 10_000
    assert smallest((50,), None, alternative="above", draws=999, seed=3) == 1 / 1000
    assert smallest((50,), None, alternative="above", draws=99, seed=3) == 1
    assert smallest((0,), None, alternative="above") == 1


@pytest.mark.parametrize(
    ("first", "second", "settings", "reason"),
    [
        ([], [], {}, "at least 1 pair is needed; there are 0 pairs"),
        ([0.3, 0.2], [0.2, 0.1], {"null_value": 0.1}, "all 2 differences within pairs equal the null value"),
        ([1.0], [2.0], {"seed": -4}, "a seed is a whole number from 0 on; the option says -4"),
    ],
)
def test_no_result(first: Any, second: Any, settings: dict[str, Any], reason: str) -> None:
    for ask in (sign_flip_difference, sign_flip_difference.again):
        found = ask(np.array(first), np.array(second), **{"seed": 1, **settings})
        assert found == NotComputed(reason, (len(first),))
