"""The signed rank test against printed values, base R, scipy and the enumeration of all signs."""

import math
from itertools import product
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.wilcoxon_signed_rank import wilcoxon_signed_rank
from beforehand.hypothesis_tests.location import DIFFER

Numbers = NDArray[np.float64]


def enumerated(differences: Numbers, null_value: float, zeros: str) -> tuple[float, float]:
    """p above and below: the shares of all signs whose rank sum is as large, or as small."""
    away = differences - null_value
    if zeros == "dropped":
        away = away[away != 0]
    ranks, signed = stats.rankdata(np.abs(away)), away != 0
    ranks, positive = ranks[signed], (away > 0)[signed]
    sums = np.array([ranks[np.array(signs, dtype=bool)].sum() for signs in product((0, 1), repeat=ranks.size)])
    observed = ranks[positive].sum()
    return float(np.mean(sums >= observed)), float(np.mean(sums <= observed))


def test_heights(reference: Any, outcome: Any) -> None:
    heights = reference("perm-darwin")
    differences = heights.data("difference_eighths_inch")
    found = outcome(wilcoxon_signed_rank(differences, np.zeros_like(differences)))
    assert heights.agrees("wsr_Wplus", found.statistic)
    assert heights.agrees("wsr_p_exact", found.p)


def test_sleep(reference: Any, outcome: Any) -> None:
    sleep = reference("wsr-sleep-zero-ties")
    samples = sleep.data("group2"), sleep.data("group1")
    corrected = outcome(wilcoxon_signed_rank(*samples, method="normal", zeros="dropped"))
    assert sleep.agrees("V", corrected.statistic)
    assert sleep.agrees("p_two_cc", corrected.p)
    plain = outcome(wilcoxon_signed_rank(*samples, method="normal", zeros="dropped", continuity=False))
    assert sleep.agrees("p_two_nocc", plain.p)


def test_base_r(r_case: Any) -> None:
    # counts and normal tails: both to about 1e-14; ends and estimates are averages of differences of the data
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-12), name


@pytest.mark.parametrize(("ours", "theirs"), [("above", "greater"), ("below", "less"), ("two_sided", "two-sided")])
def test_scipy(ours: Any, theirs: Any, outcome: Any) -> None:
    random = np.random.default_rng(18)
    for n in (1, 4, 15, 60):
        first, second = random.normal(0.3, 1, n), random.normal(0, 1, n)
        found = outcome(wilcoxon_signed_rank(first, second, alternative=ours))
        again = stats.wilcoxon(first, second, alternative=theirs, method="exact")
        assert found.p == pytest.approx(again.pvalue, rel=1e-11)
    first, second = random.integers(0, 6, 150) + 0.0, random.integers(0, 7, 150) + 0.0
    for zeros, method in (("pratt", "pratt"), ("dropped", "wilcox")):
        for continuity in (True, False):
            settings: Any = {"zeros": zeros, "continuity": continuity, "alternative": ours}
            found = outcome(wilcoxon_signed_rank(first, second, **settings))
            again = stats.wilcoxon(
                first, second, zero_method=method, correction=continuity, alternative=theirs, method="asymptotic"
            )
            assert found.p == pytest.approx(again.pvalue, rel=1e-12)


@pytest.mark.parametrize("zeros", ["pratt", "dropped"])
@pytest.mark.parametrize("seed", range(8))
def test_enumeration_with_ties_and_zeros(seed: int, zeros: Any, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    differences = random.integers(-3, 6, 8) + 0.0
    for null_value in (0.0, 1.0, 0.5, 0.25):
        above, below = enumerated(differences, null_value, zeros)
        call = differences, np.zeros(8)
        settings: Any = {"null_value": null_value, "zeros": zeros}
        assert outcome(wilcoxon_signed_rank(*call, alternative="above", **settings)).p == pytest.approx(above)
        assert outcome(wilcoxon_signed_rank(*call, alternative="below", **settings)).p == pytest.approx(below)
        two_sided = outcome(wilcoxon_signed_rank(*call, **settings))
        assert two_sided.p == pytest.approx(min(1, 2 * min(above, below)))


@pytest.mark.parametrize("seed", range(6))
def test_interval_holds_the_null_values_that_are_kept(seed: int, outcome: Any) -> None:
    # every gap between two averages, and beyond them, asked by enumeration; no difference is zero there
    differences = np.random.default_rng(seed).integers(-3, 8, 7) + 0.0
    found = outcome(wilcoxon_signed_rank(differences, np.zeros(7), confidence=0.9))
    critical = np.unique(np.add.outer(differences, differences) / 2)
    gaps = [critical[0] - 1, *(critical[1:] + critical[:-1]) / 2, critical[-1] + 1]
    for null_value in gaps:
        kept = min(enumerated(differences, null_value, "pratt")) > 0.05
        assert (found.lower < null_value < found.upper) == kept


def one_sided(differences: Numbers, zeros: Any, outcome: Any) -> list[float]:
    nulls = np.arange(-4, 5) / 4
    call = differences, np.zeros_like(differences)
    return [outcome(wilcoxon_signed_rank(*call, null_value=v, alternative="above", zeros=zeros)).p for v in nulls]


def test_dropped_zeros_are_not_monotone_and_pratts_are(outcome: Any) -> None:
    # twelve differences on one side and one large one on the other (the pattern of Pratt 1959, from memory)
    differences = np.array([0, 2, 3, 4, 6, 7, 8, 9, 11, 14, 15, 17, -18.0])
    assert np.all(np.diff(one_sided(differences, "pratt", outcome)) >= 0)
    assert np.any(np.diff(one_sided(differences, "dropped", outcome)) < 0)


def test_dropped_zeros_may_contradict_the_interval_and_say_so(outcome: Any) -> None:
    differences = np.array([0, 2, 3, 4, 6, 7, 8, 9, 11, 14, 15, 17, -18.0])
    settings: Any = {"zeros": "dropped", "alternative": "above", "confidence": 1 - 2 * 0.015}
    found = outcome(wilcoxon_signed_rank(differences, np.zeros(13), **settings))
    assert found.lower > 0
    assert found.p > 0.015
    assert DIFFER in found.remarks
    settings["zeros"] = "pratt"
    assert DIFFER not in outcome(wilcoxon_signed_rank(differences, np.zeros(13), **settings)).remarks


def test_differences_that_are_tied_on_paper(outcome: Any) -> None:
    # on paper: 0.1, 0.1, -0.1, 0 and 0.2; as doubles all five are different
    first, second = np.array([0.3, 0.2, 0.2, 0.3, 0.9]), np.array([0.2, 0.1, 0.3, 0.3, 0.7])
    found = outcome(wilcoxon_signed_rank(first, second))
    assert found.statistic == 3 + 3 + 5
    assert found.p == pytest.approx(2 * min(enumerated(np.array([1.0, 1, -1, 0, 2]), 0, "pratt")))
    assert outcome(wilcoxon_signed_rank(first, second, method="normal")).statistic == 11


def test_far_tail(outcome: Any) -> None:
    found = outcome(wilcoxon_signed_rank(np.arange(1.0, 101), np.zeros(100), alternative="above"))
    assert found.p == pytest.approx(0.5**100, rel=1e-13)


def test_the_rule_is_printed(outcome: Any) -> None:
    first = np.arange(1.0, 102)
    exact = outcome(wilcoxon_signed_rank(first[:100], np.zeros(100))).remarks[0]
    assert exact == "Exact distribution, ties included (the rule for up to 100 pairs; here 100)."
    normal = outcome(wilcoxon_signed_rank(first, np.zeros(101))).remarks[0]
    assert normal.endswith("with continuity correction (the rule for more than 100 pairs; here 101).")


@pytest.mark.parametrize("zeros", ["pratt", "dropped"])
@pytest.mark.parametrize("method", ["exact", "normal"])
@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
def test_smallest_p_is_attained(alternative: Any, method: Any, zeros: Any, outcome: Any) -> None:
    sizes = np.array([0.0, 0, 1, 2, 2, 5])
    settings = {"alternative": alternative, "method": method, "zeros": zeros}
    found = [
        outcome(wilcoxon_signed_rank(sizes * np.array(signs), np.zeros(6), **settings)).p
        for signs in product((1.0, -1.0), repeat=6)
    ]
    assert wilcoxon_signed_rank.smallest_p((6,), sizes, **settings) == pytest.approx(min(found), rel=1e-12)


def test_smallest_p_before_data() -> None:
    assert wilcoxon_signed_rank.smallest_p((5,), None, alternative="above") == 1 / 32
    assert wilcoxon_signed_rank.smallest_p((5,), None, alternative="two_sided") == 1 / 16
    assert wilcoxon_signed_rank.smallest_p((5,), np.zeros(5), alternative="above") == 1
    assert wilcoxon_signed_rank.smallest_p((0,), None, alternative="above") == 1
    z = (200 * 201 / 4 - 0.5) / math.sqrt(200 * 201 * 401 / 24)
    assert wilcoxon_signed_rank.smallest_p((200,), None, alternative="below") == pytest.approx(stats.norm.sf(z))


@pytest.mark.parametrize(
    ("first", "second", "settings", "reason"),
    [
        ([], [], {}, "at least 1 pair is needed; there are 0 pairs"),
        ([0.3, 0.2], [0.3, 0.2], {}, "all 2 differences within pairs equal the null value"),
        ([0.3, 0.2], [0.2, 0.1], {"null_value": 0.1}, "all 2 differences within pairs equal the null value"),
        (
            np.arange(201.0),
            np.zeros(201),
            {"method": "exact"},
            "the exact distribution is counted for up to 200 pairs; there are 201. Use method: normal",
        ),
    ],
)
def test_no_result(first: Any, second: Any, settings: Any, reason: str) -> None:
    found = wilcoxon_signed_rank(np.array(first), np.array(second), **settings)
    assert found == NotComputed(reason, (len(first),))


def test_refused_calls() -> None:
    samples: Any = (np.arange(3.0), np.ones(3))
    with pytest.raises(ValueError, match="zeros is pratt or dropped; found 'split'"):
        wilcoxon_signed_rank(*samples, zeros="split")  # type: ignore[arg-type]
