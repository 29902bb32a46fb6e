"""The Mann-Whitney test against printed values, base R, scipy and the enumeration of all groupings."""

import math
from itertools import combinations
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.mann_whitney import mann_whitney
from beforehand.hypothesis_tests.location import OPEN_END

Numbers = NDArray[np.float64]


def enumerated(first: Numbers, second: Numbers, shift: float) -> tuple[float, float]:
    """p above and below: the shares of all groupings whose rank sum is as large, or as small."""
    ranks = stats.rankdata(np.append(first - shift, second))
    sums = np.array([ranks[list(chosen)].sum() for chosen in combinations(range(ranks.size), first.size)])
    observed = ranks[: first.size].sum()
    return float(np.mean(sums >= observed)), float(np.mean(sums <= observed))


def test_permeability(reference: Any, outcome: Any) -> None:
    membranes = reference("mwu-permeability")
    samples = membranes.data("x"), membranes.data("y")
    found = outcome(mann_whitney(*samples))
    for name, value in {"W": found.statistic, "p_two_exact": found.p, "hodges_lehmann_shift": found.estimate}.items():
        assert membranes.agrees(name, value), name
    for place, end in enumerate((found.lower, found.upper)):
        assert membranes.agrees("ci95", end, place)
    assert membranes.agrees("p_greater_exact", outcome(mann_whitney(*samples, alternative="above")).p)
    normal = outcome(mann_whitney(*samples, alternative="above", method="normal", continuity=False))
    assert membranes.agrees("p_greater_asym_nocc", normal.p)


def test_ages(reference: Any, outcome: Any) -> None:
    ages = reference("mwu-scipydoc")
    samples = ages.data("males"), ages.data("females")
    found = outcome(mann_whitney(*samples))
    assert ages.agrees("U", found.statistic)
    assert ages.agrees("p_exact", found.p)
    assert ages.agrees("p_asym_cc", outcome(mann_whitney(*samples, method="normal")).p)


def test_base_r(r_case: Any) -> None:
    # counts and normal tails: both to about 1e-14; ends and estimates are differences of the data
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-12), name


@pytest.mark.parametrize(("ours", "theirs"), [("above", "greater"), ("below", "less"), ("two_sided", "two-sided")])
def test_scipy(ours: Any, theirs: Any, outcome: Any) -> None:
    random = np.random.default_rng(16)
    for n1, n2 in ((2, 3), (7, 9), (20, 4), (50, 50)):
        first, second = random.normal(0.5, 1, n1), random.normal(0, 1, n2)
        found = outcome(mann_whitney(first, second, alternative=ours))
        again = stats.mannwhitneyu(first, second, alternative=theirs, method="exact")
        assert (found.statistic, found.p) == pytest.approx((again.statistic, again.pvalue), rel=1e-11)
    for continuity in (True, False):
        first, second = random.integers(0, 9, 60) + 0.0, random.integers(0, 12, 80) + 0.0
        found = outcome(mann_whitney(first, second, alternative=ours, continuity=continuity))
        again = stats.mannwhitneyu(first, second, alternative=theirs, method="asymptotic", use_continuity=continuity)
        assert (found.statistic, found.p) == pytest.approx((again.statistic, again.pvalue), rel=1e-12)


@pytest.mark.parametrize("seed", range(12))
def test_enumeration_with_ties(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    first, second = random.integers(0, 5, 4) + 0.0, random.integers(0, 6, 5) + 0.0
    if np.ptp(np.append(first, second)) == 0:
        return
    for null_value in (0.0, 1.0, 0.5):
        above, below = enumerated(first, second, null_value)
        settings: Any = {"null_value": null_value}
        assert outcome(mann_whitney(first, second, alternative="above", **settings)).p == pytest.approx(above)
        assert outcome(mann_whitney(first, second, alternative="below", **settings)).p == pytest.approx(below)
        two_sided = outcome(mann_whitney(first, second, **settings))
        assert two_sided.p == pytest.approx(min(1, 2 * min(above, below)))


@pytest.mark.parametrize("seed", range(8))
def test_interval_holds_the_shifts_that_are_kept(seed: int, outcome: Any) -> None:
    # every gap between two differences, and beyond them, asked by enumeration
    random = np.random.default_rng(seed)
    first, second = random.integers(0, 8, 5) + 0.0, random.integers(0, 6, 4) + 0.0
    found = outcome(mann_whitney(first, second, confidence=0.9))
    critical = np.unique(np.subtract.outer(first, second))
    gaps = [critical[0] - 1, *(critical[1:] + critical[:-1]) / 2, critical[-1] + 1]
    for shift in gaps:
        assert (found.lower < shift < found.upper) == (min(enumerated(first, second, shift)) > 0.05)


def test_decimals_that_are_tied_on_paper(outcome: Any) -> None:
    # 0.8 - 0.5 is not 0.3 in doubles; on paper the first group less 0.5 ties with the second in every value
    first, second = np.array([0.6, 0.7, 0.8, 0.9]), np.array([0.1, 0.2, 0.3, 0.4])
    found = outcome(mann_whitney(first, second, null_value=0.5))
    assert found.statistic == 8
    assert found.p == 1
    assert found.estimate == pytest.approx(0.5, rel=1e-15)
    large = outcome(mann_whitney(first, second, null_value=0.5, method="normal"))
    assert (large.statistic, large.p) == (8, 1)


def test_far_tail(outcome: Any) -> None:
    # 50 values above 50 others: one grouping in C(100, 50)
    found = outcome(mann_whitney(np.arange(50.0) + 50, np.arange(50.0), alternative="above"))
    assert found.p == pytest.approx(1 / math.comb(100, 50), rel=1e-13)


def test_an_end_that_is_rejected_itself(outcome: Any) -> None:
    first, second = np.array([2.0, 2, 3, 3, 4, 5, 5]), np.array([0.0, 1, 1, 2, 2, 2, 3])
    found = outcome(mann_whitney(first, second))
    assert found.lower == 0
    assert found.p < 0.05
    assert OPEN_END in found.remarks
    assert OPEN_END not in outcome(mann_whitney(first, second, null_value=-0.5)).remarks


def test_too_few_values_for_an_end(outcome: Any) -> None:
    # two against three: the smallest one-sided p is 1 in 10, more than 2.5 %
    found = outcome(mann_whitney(np.array([5.0, 6]), np.array([1.0, 2, 3])))
    assert (found.lower, found.upper) == (-math.inf, math.inf)
    assert found.remarks[1:] == (
        "So few values allow no lower and no upper end of an interval with a confidence of 95\u202f%.",
    )


def test_the_rule_is_printed_and_looks_at_sizes_only(outcome: Any) -> None:
    sizes = "pairs of values (first group × second group)"
    ascending = np.arange(50.0)
    for second in (ascending + 0.5, np.round(ascending / 7)):
        exact = outcome(mann_whitney(ascending, second)).remarks[0]
        assert exact == f"Exact distribution, ties included (the rule for up to 2\u202f500 {sizes}; here 2\u202f500)."
    normal = outcome(mann_whitney(np.arange(51.0), ascending)).remarks[0]
    assert normal == (
        "Normal approximation, variance corrected for ties, with continuity correction "
        f"(the rule for more than 2\u202f500 {sizes}; here 2\u202f550)."
    )
    asked = outcome(mann_whitney(ascending, ascending + 1, method="normal", continuity=False)).remarks[0]
    assert (
        asked == "Normal approximation, variance corrected for ties, without continuity correction (as the spec asks)."
    )


def test_large_groups_find_the_middle_of_all_differences(outcome: Any) -> None:
    random = np.random.default_rng(17)
    first, second = np.round(random.normal(1, 3, 401), 1), np.round(random.normal(0, 2, 300), 1)
    found = outcome(mann_whitney(first, second))
    assert found.estimate == pytest.approx(np.median(np.subtract.outer(first, second)), abs=1e-12)


@pytest.mark.parametrize("method", ["exact", "normal"])
@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
def test_smallest_p_is_attained(alternative: Any, method: Any, outcome: Any) -> None:
    pooled = np.array([1.0, 1, 2, 4, 4, 4, 6, 7])
    settings = {"alternative": alternative, "method": method}
    found = []
    for chosen in combinations(range(8), 3):
        first, second = pooled[list(chosen)], np.delete(pooled, chosen)
        found.append(outcome(mann_whitney(first, second, **settings)).p)
    assert mann_whitney.smallest_p((3, 5), pooled, **settings) == pytest.approx(min(found), rel=1e-12)


def test_smallest_p_before_data() -> None:
    assert mann_whitney.smallest_p((3, 5), None, alternative="above") == pytest.approx(1 / 56)
    assert mann_whitney.smallest_p((3, 5), None, alternative="two_sided") == pytest.approx(2 / 56)
    assert mann_whitney.smallest_p((3, 5), np.full(8, 2.0), alternative="above") == 1
    assert mann_whitney.smallest_p((0, 5), None, alternative="above") == 1
    z = (100 * 100 / 2 - 0.5) / math.sqrt(100 * 100 * 201 / 12)
    assert mann_whitney.smallest_p((100, 100), None, alternative="below") == pytest.approx(stats.norm.sf(z))


@pytest.mark.parametrize(
    ("first", "second", "settings", "reason"),
    [
        ([], [1.0], {}, "at least 1 value of the first group is needed; there are 0 values"),
        ([2.0] * 3, [2.0] * 4, {}, "all 7 values of both groups are equal"),
        (
            [3.0] * 3,
            [2.0] * 4,
            {"null_value": 1.0},
            "all 7 values are equal once the null value is taken off the first group",
        ),
        (
            np.arange(101.0),
            np.arange(100.0),
            {"method": "exact"},
            "the exact distribution is counted for up to 10\u202f000 pairs of values (first group × second group); "
            "there are 10\u202f100. Use method: normal",
        ),
    ],
)
def test_no_result(first: Any, second: Any, settings: Any, reason: str) -> None:
    found = mann_whitney(np.array(first), np.array(second), **settings)
    assert found == NotComputed(reason, (len(first), len(second)))


def test_refused_call() -> None:
    with pytest.raises(ValueError, match="a method is by_size, exact or normal; found 'auto'"):
        mann_whitney(np.arange(3.0), np.arange(4.0), method="auto")  # type: ignore[arg-type]
