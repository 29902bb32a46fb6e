"""The Poisson test of a rate ratio against printed values, statsmodels and counting of divisions."""

import math
from typing import Any

import numpy as np
import pytest
from scipy import stats
from statsmodels.stats import rates

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.rate_ratio import NO_EVENT_FIRST, NO_EVENT_SECOND, rate_ratio


def ask(x: int, t1: float, y: int, t2: float, **settings: Any) -> Any:
    """Ask of two groups with these totals, spread over three rows each."""
    rows = [np.diff(np.linspace(0, total, 4).round()) for total in (x, y)]
    return rate_ratio(*rows, exposure=tuple(np.full(3, amount / 3) for amount in (t1, t2)), **settings)


def test_x_rays(reference: Any, outcome: Any) -> None:
    rays = reference("poisson-ratio-gu")
    (x, y), (t1, t2) = rays.entry["data"]["count"], rays.entry["data"]["person_years"]
    found = outcome(ask(x, t1, y, t2))
    assert rays.agrees("ratio", found.estimate)
    for place, end in enumerate((found.lower, found.upper)):
        assert rays.agrees("exact_ci95", end, place)
    assert rays.agrees("exact_p_ratio_gt_1.2", outcome(ask(x, t1, y, t2, null_value=1.2, alternative="above")).p)
    assert rays.agrees("score_p_one_sided", outcome(ask(x, t1, y, t2, alternative="above", method="score")).p)


@pytest.mark.parametrize(("x", "y"), [(0, 4), (3, 1), (5, 9), (140, 90)])
@pytest.mark.parametrize(("method", "theirs"), [("exact", "exact-cond"), ("score", "score")])
def test_statsmodels(x: int, y: int, method: Any, theirs: str, outcome: Any) -> None:
    for null_value in (1.0, 0.6):
        for side, alternative in (("above", "larger"), ("below", "smaller")):
            found = outcome(ask(x, 7.0, y, 9.5, null_value=null_value, alternative=side, method=method))
            again = rates.test_poisson_2indep(
                x, 7.0, y, 9.5, value=null_value, method=theirs, compare="ratio", alternative=alternative
            )
            assert found.p == pytest.approx(again.pvalue, rel=1e-9)


@pytest.mark.parametrize(("x", "y"), [(0, 4), (3, 0), (5, 9), (140, 90)])
def test_scipys_interval_of_the_share(x: int, y: int, outcome: Any) -> None:
    # given all events those of the first group are binomial: the ends are odds of that share, by exposure
    for method, theirs in (("exact", "exact"), ("score", "wilson")):
        found = outcome(ask(x, 7.0, y, 9.5, method=method, confidence=0.9))
        share = stats.binomtest(x, x + y).proportion_ci(0.9, method=theirs)
        ends = [math.inf if end > 1 - 1e-15 else end / (1 - end) * 9.5 / 7.0 for end in share]
        assert (found.lower, found.upper) == pytest.approx(tuple(ends), rel=1e-8, abs=1e-14)


def test_counting_all_divisions(outcome: Any) -> None:
    # with equal exposure each of 2^9 ways to give 9 events to two groups is as likely as any other
    ways = np.array([math.comb(9, x) for x in range(10)]) / 2**9
    for x in range(10):
        found = outcome(ask(x, 3.0, 9 - x, 3.0, alternative="above"))
        assert found.p == pytest.approx(ways[x:].sum(), rel=1e-12)
        assert outcome(ask(x, 3.0, 9 - x, 3.0)).p == pytest.approx(min(1, 2 * min(ways[x:].sum(), ways[: x + 1].sum())))


def test_groups_without_an_event(outcome: Any) -> None:
    none = outcome(ask(0, 2.0, 6, 3.0))
    assert (none.estimate, none.lower, none.remarks) == (0, 0, (NO_EVENT_FIRST,))
    every = outcome(ask(6, 3.0, 0, 2.0))
    assert (every.estimate, every.upper, every.remarks) == (math.inf, math.inf, (NO_EVENT_SECOND,))
    assert every.lower == pytest.approx(1 / none.upper, rel=1e-12)


def test_another_unit_of_exposure_changes_nothing(outcome: Any) -> None:
    for method in ("exact", "score"):
        here, there = (outcome(ask(5, 7.0 * unit, 9, 9.5 * unit, method=method)) for unit in (1, 24))
        for number in ("estimate", "lower", "upper", "p"):
            assert getattr(here, number) == pytest.approx(getattr(there, number), rel=1e-12)


def test_counts_that_scatter_too_much_are_remarked(outcome: Any) -> None:
    clustered = np.array([0.0, 0, 21, 0, 0, 17, 0, 1, 0])
    (said,) = outcome(rate_ratio(clustered, clustered[::-1], exposure=(np.ones(9), np.ones(9)))).remarks
    # both groups alike: sum (x - mean)² / mean over 16 degrees of freedom
    assert f"about {np.var(clustered, ddof=1) / clustered.mean():.0f} times" in said


@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
@pytest.mark.parametrize("method", ["exact", "score"])
def test_smallest_p_is_attained(alternative: Any, method: Any, outcome: Any) -> None:
    settings: dict[str, Any] = {"null_value": 1.3, "alternative": alternative, "method": method}
    smallest = min(outcome(ask(x, 3.0, 8 - x, 5.0, **settings)).p for x in range(9))
    exposure = (np.ones(3), np.full(3, 5 / 3))
    pooled = np.array([0.0, 1, 1, 2, 2, 2])
    assert rate_ratio.smallest_p((3, 3), pooled, exposure=exposure, **settings) == pytest.approx(smallest, rel=1e-12)
    assert rate_ratio.smallest_p((3, 3), None, exposure=exposure, **settings) == 0.0
    assert rate_ratio.smallest_p((3, 3), np.zeros(6), exposure=exposure, **settings) == 1.0


def test_no_result() -> None:
    one, none = (np.ones(1), np.empty(0)), (np.empty(0), np.ones(2))
    assert rate_ratio(np.empty(0), np.ones(2), exposure=none) == NotComputed(
        "at least 1 row of the first group is needed; there are 0 rows", (0, 2)
    )
    assert rate_ratio(np.zeros(1), np.empty(0), exposure=one) == NotComputed(
        "at least 1 row of the second group is needed; there are 0 rows", (1, 0)
    )
    assert ask(0, 2.0, 0, 3.0) == NotComputed("no event has happened in either group", (3, 3))


def test_refused_calls() -> None:
    with pytest.raises(ValueError, match="a ratio under the null hypothesis is above 0; found -1"):
        ask(3, 4.0, 2, 1.0, null_value=-1)
    with pytest.raises(ValueError, match="method is exact or score; found 'wald'"):
        ask(3, 4.0, 2, 1.0, method="wald")
