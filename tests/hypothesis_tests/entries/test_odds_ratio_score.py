"""The score test of an odds ratio against printed values, base R, statsmodels and Cornfield's cells."""

import math
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import optimize
from statsmodels.stats.proportion import score_test_proportions_2indep  # type: ignore[import-untyped]

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.odds_ratio_score import AT_LEAST, AT_MOST, odds_ratio_score

Groups = tuple[NDArray[np.bool_], NDArray[np.bool_]]


def groups(x: int, n1: int, y: int, n2: int) -> Groups:
    return np.arange(n1) < x, np.arange(n2) < y


@pytest.mark.parametrize(
    ("counts", "factor", "digits", "ends"),
    [
        # R package contingencytables (ocbe-uio/contingencytables @0c0a59f1), tests/testthat/test-ch4.R, read there
        ((9, 13, 4, 14), True, 4, (1.0934, 28.9419)),
        ((0, 16, 15, 72), False, 4, (0.0, 0.9532)),
        # Fagerland and Newcombe (2013), and Gart and Thomas (1982): R package ratesci (petelaud/ratesci),
        # tests/testthat, read there
        ((24, 73, 53, 65), True, 3, (0.050, 0.245)),
        ((29, 55, 11, 11), True, 3, (0.0, 0.417)),
        ((7, 18, 1, 18), True, 3, (1.416, 76.428)),
        ((28, 51, 71, 230), False, 3, (1.476, 5.035)),
    ],
)
def test_printed_intervals(counts: Any, factor: bool, digits: int, ends: Any, outcome: Any) -> None:
    found = outcome(odds_ratio_score(*groups(*counts), small_sample_factor=factor))
    assert (round(found.lower, digits), round(found.upper, digits)) == ends


def test_base_r(r_case: Any) -> None:
    # at an odds ratio of 1 without the factor this is Pearson's chi-square; R squares z and takes the root again
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-11), name


@pytest.mark.parametrize("seed", range(12))
def test_statsmodels_and_cells(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    n1, n2 = (int(n) for n in random.integers(5, 80, 2))
    x, y = int(random.integers(1, n1)), int(random.integers(1, n2))
    null = float(np.exp(random.normal(0, 1)))
    found = outcome(odds_ratio_score(*groups(x, n1, y, n2), null_value=null, small_sample_factor=False))
    again = score_test_proportions_2indep(x, n1, y, n2, value=null, compare="odds-ratio", correction=False)
    assert found.statistic == pytest.approx(again.statistic, rel=1e-8)
    assert found.p == pytest.approx(again.pvalue, rel=1e-7)

    # Cornfield (1956): each end is the odds ratio of the cells x - z s, with s the standard error that they imply
    def log_odds(a: float) -> float:
        return math.log(a) + math.log(n2 - x - y + a) - math.log(n1 - a) - math.log(x + y - a)

    def distance(a: float, side: float) -> float:
        return (x - a) * math.sqrt(
            1 / a + 1 / (n1 - a) + 1 / (x + y - a) + 1 / (n2 - x - y + a)
        ) - side * 1.959963984540054

    low, high = max(0, x + y - n2) + 1e-9, min(n1, x + y) - 1e-9
    for side, end in ((1, found.lower), (-1, found.upper)):
        cell = optimize.brentq(distance, low, high, args=(side,), xtol=1e-13)
        assert math.log(end) == pytest.approx(log_odds(cell), rel=1e-6, abs=1e-6)


def test_empty_cells(outcome: Any) -> None:
    none = outcome(odds_ratio_score(*groups(0, 20, 6, 25)))
    assert (none.estimate, none.lower, AT_LEAST in none.remarks) == (0, 0, True)
    every = outcome(odds_ratio_score(*groups(20, 20, 19, 25)))
    assert (every.estimate, every.upper, AT_MOST in every.remarks) == (math.inf, math.inf, True)
    # events and units without the event change places: the inverse odds ratio
    assert every.lower == pytest.approx(1 / none.upper, rel=1e-10)


@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
@pytest.mark.parametrize("null", [1.0, 0.2, 30.0])
def test_smallest_p_is_attained(alternative: Any, null: float, outcome: Any) -> None:
    settings: Any = {"alternative": alternative, "null_value": null}
    smallest = []
    for events in range(1, 11):
        tables = range(max(0, events - 7), min(4, events) + 1)
        smallest.append(min(outcome(odds_ratio_score(*groups(x, 4, events - x, 7), **settings)).p for x in tables))
        found = odds_ratio_score.smallest_p((4, 7), np.arange(11) < events, **settings)
        assert found == pytest.approx(smallest[-1], rel=1e-11)
    assert odds_ratio_score.smallest_p((4, 7), None, **settings) == pytest.approx(min(smallest), rel=1e-11)
    assert odds_ratio_score.smallest_p((4, 7), np.ones(11, dtype=np.bool_), **settings) == 1


@pytest.mark.parametrize(
    ("counts", "reason"),
    [
        ((0, 0, 1, 3), "at least 1 unit of the first group is needed; there are 0 units"),
        ((0, 4, 0, 3), "none of the 7 units has the event"),
        ((4, 4, 3, 3), "all 7 units have the event"),
    ],
)
def test_no_result(counts: Any, reason: str) -> None:
    assert odds_ratio_score(*groups(*counts)) == NotComputed(reason, (counts[1], counts[3]))


def test_refused_calls() -> None:
    with pytest.raises(ValueError, match="an odds ratio under the null hypothesis is above 0; found -1"):
        odds_ratio_score(*groups(2, 4, 1, 4), null_value=-1)
