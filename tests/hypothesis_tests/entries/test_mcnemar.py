"""McNemar's test against printed values, base R, statsmodels, scipy and counting."""

import math
from itertools import product
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats
from statsmodels.stats.contingency_tables import mcnemar as by_statsmodels  # type: ignore[import-untyped]

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.mcnemar import NONE_FIRST, NONE_SECOND, RULES, mcnemar

Pairs = tuple[NDArray[np.bool_], NDArray[np.bool_]]


def pairs(first: int, second: int, both: int = 0, neither: int = 0) -> Pairs:
    """So many pairs with the event on the first side alone, on the second alone, on both, on neither."""
    counts = (first, second, both, neither)
    return np.repeat([True, False, True, False], counts), np.repeat([False, True, True, False], counts)


@pytest.mark.parametrize(("b", "c"), [(121, 59), (70, 59), (80, 59), (30, 60), (10, 30)])
def test_printed_series(b: int, c: int, reference: Any, outcome: Any) -> None:
    series = reference("mcnemar-series")
    assert series.agrees(f"b{b}_c{c}_pexact", outcome(mcnemar(*pairs(b, c, 40, 50))).p)
    assert series.agrees(f"b{b}_c{c}_p", outcome(mcnemar(*pairs(b, c, 40, 50), method="normal")).p)


def test_printed_methods(outcome: Any) -> None:
    # R package contingencytables (ocbe-uio/contingencytables @00b5af39), tests/testthat/test-ch8.R, read there
    samples = pairs(6, 16, 59, 80)
    assert round(outcome(mcnemar(*samples)).p, 6) == 0.052479
    assert round(outcome(mcnemar(*samples, method="mid_p")).p, 6) == 0.034690
    normal = outcome(mcnemar(*samples, method="normal"))
    assert round(normal.p, 6) == 0.033006
    assert (round(normal.lower, 4), round(normal.upper, 4)) == (0.1514, 0.9287)
    # Fagerland, Lydersen and Laake (2014): R package ratesci (petelaud/ratesci), tests/testthat, read there
    mid = outcome(mcnemar(*pairs(1, 7, 1, 12), method="mid_p"))
    assert (round(mid.lower, 3), round(mid.upper, 3)) == (0.006, 0.924)


def test_base_r(r_case: Any) -> None:
    # R's normal p comes from a chi-square, its ends from sums of squares: both to about 1e-13
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-10), name


@pytest.mark.parametrize("seed", range(10))
def test_statsmodels_and_scipy(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    b, c, both, neither = (int(n) for n in random.integers(1, 40, 4))
    table = [[both, b], [c, neither]]
    samples, odds = pairs(b, c, both, neither), float(np.exp(random.normal(0, 0.7)))
    assert outcome(mcnemar(*samples)).p == pytest.approx(by_statsmodels(table, exact=True).pvalue, rel=1e-11)
    again = by_statsmodels(table, exact=False, correction=False)
    assert outcome(mcnemar(*samples, method="normal")).p == pytest.approx(again.pvalue, rel=1e-10)
    share = odds / (1 + odds)
    methods: Any = (("exact", 1.0), ("mid_p", 0.5))
    for method, part in methods:
        settings: Any = {"null_value": odds, "method": method}
        above = outcome(mcnemar(*samples, alternative="above", **settings))
        point = stats.binom.pmf(b, b + c, share)
        assert above.p == pytest.approx(stats.binom.sf(b, b + c, share) + part * point, rel=1e-10)
        # each end is where a side has 5 % as its p
        found = outcome(mcnemar(*samples, method=method, confidence=0.9))
        low, high = found.lower / (1 + found.lower), found.upper / (1 + found.upper)
        assert stats.binom.sf(b, b + c, low) + part * stats.binom.pmf(b, b + c, low) == pytest.approx(0.05, rel=1e-9)
        below = stats.binom.cdf(b - 1, b + c, high) + part * stats.binom.pmf(b, b + c, high)
        assert below == pytest.approx(0.05, rel=1e-9)


def test_counting_all_exchanges(outcome: Any) -> None:
    # when the sides do not matter, each pair that differs may as well have its sides exchanged
    counts = np.array([sum(kept) for kept in product((0, 1), repeat=9)])
    for b in range(10):
        above = outcome(mcnemar(*pairs(b, 9 - b, 3, 4), alternative="above"))
        assert above.p == pytest.approx(np.mean(counts >= b), rel=1e-13)


def test_pairs_that_agree_say_nothing_but_in_the_shares(outcome: Any) -> None:
    few, many = outcome(mcnemar(*pairs(14, 5, 17, 28))), outcome(mcnemar(*pairs(14, 5)))
    assert (few.p, few.lower, few.upper) == (many.p, many.lower, many.upper)
    assert (few.estimate, few.statistic, few.n) == (2.8, 14, (64,))
    assert few.remarks == (
        "19 of 64 pairs differ: 14 with the event on the first side alone, 5 with it on the second alone. That is a "
        "difference in shares of 0.1406, whose interval paired_risk_difference gives.",
    )


def test_empty_cells_and_methods_say_so(outcome: Any) -> None:
    none = outcome(mcnemar(*pairs(0, 6, 3)))
    assert (none.estimate, none.lower, none.remarks[0]) == (0, 0, NONE_FIRST)
    assert none.upper == pytest.approx((1 - 0.025 ** (1 / 6)) / 0.025 ** (1 / 6), rel=1e-12)  # (1 - share)^6 = 2.5 %
    every = outcome(mcnemar(*pairs(6, 0, 3), method="mid_p"))
    assert (every.estimate, every.upper, every.remarks[:2]) == (math.inf, math.inf, (RULES["mid_p"], NONE_SECOND))


@pytest.mark.parametrize("method", ["exact", "mid_p", "normal"])
@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
@pytest.mark.parametrize("null", [1.0, 0.3])
def test_smallest_p_is_attained(method: Any, alternative: Any, null: float, outcome: Any) -> None:
    settings: Any = {"method": method, "alternative": alternative, "null_value": null}
    smallest = []
    for differ in range(1, 8):
        found = [outcome(mcnemar(*pairs(b, differ - b, 7 - differ), **settings)).p for b in range(differ + 1)]
        smallest.append(min(found))
        known = mcnemar.smallest_p((7,), np.arange(7) < differ, **settings)
        assert known == pytest.approx(smallest[-1], rel=1e-11)
    assert mcnemar.smallest_p((7,), None, **settings) == pytest.approx(min(smallest), rel=1e-11)
    assert mcnemar.smallest_p((7,), np.zeros(7, dtype=np.bool_), **settings) == 1


@pytest.mark.parametrize(
    ("samples", "reason"),
    [
        (pairs(0, 0), "at least 1 pair is needed; there are 0 pairs"),
        (pairs(0, 0, 3, 2), "the two sides of all 5 pairs agree"),
    ],
)
def test_no_result(samples: Pairs, reason: str) -> None:
    assert mcnemar(*samples) == NotComputed(reason, (samples[0].size,))


def test_refused_calls() -> None:
    with pytest.raises(ValueError, match="an odds ratio under the null hypothesis is above 0; found 0"):
        mcnemar(*pairs(2, 1), null_value=0)
    with pytest.raises(ValueError, match="method is exact, mid_p or normal; found 'corrected'"):
        mcnemar(*pairs(2, 1), method="corrected")  # type: ignore[arg-type]
    with pytest.raises(ValueError, match="pairs have two values each; found 3 and 2 values"):
        mcnemar(np.ones(3, dtype=np.bool_), np.ones(2, dtype=np.bool_))
