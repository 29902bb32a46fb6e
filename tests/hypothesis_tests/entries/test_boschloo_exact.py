"""Boschloo's exact test against another implementation's printed values, scipy and enumeration."""

from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.boschloo_exact import BUILT_DIFFERENTLY, boschloo_exact
from beforehand.hypothesis_tests.entries.fisher_exact import fisher_exact
from beforehand.hypothesis_tests.entries.risk_difference import risk_difference

Groups = tuple[NDArray[np.bool_], NDArray[np.bool_]]


def groups(x: int, n1: int, y: int, n2: int) -> Groups:
    return np.arange(n1) < x, np.arange(n2) < y


def by_columns(table: list[list[int]]) -> Groups:
    (a, b), (c, d) = table
    return groups(a, a + c, b, b + d)


# R package Exact, exact.test(method = "Boschloo", tsmethod = "central"), 7 digits: read in scipy 1.17.1,
# stats/tests/test_hypotests.py, class for boschloo_exact; a table's columns are the groups
@pytest.mark.parametrize(
    ("table", "alternative", "statistic", "p"),
    [
        ([[2, 7], [8, 2]], "below", 0.01852173, 0.009886142),
        ([[5, 1], [10, 10]], "below", 0.9782609, 0.9450994),
        ([[5, 16], [20, 25]], "below", 0.08913823, 0.05827348),
        ([[10, 5], [10, 1]], "below", 0.1652174, 0.08565611),
        ([[5, 0], [1, 4]], "below", 1, 1),
        ([[0, 1], [3, 2]], "below", 0.5, 0.34375),
        ([[43, 40], [10, 39]], "above", 0.0002875544, 0.0001615562),
        ([[5, 1], [10, 10]], "above", 0.1652174, 0.09008534),
        ([[5, 0], [1, 4]], "above", 0.02380952, 0.006865367),
        ([[43, 40], [10, 39]], "two_sided", 0.0002875544, 0.0003231115),
        ([[2, 7], [8, 2]], "two_sided", 0.01852173, 0.01977228),
        ([[5, 16], [20, 25]], "two_sided", 0.08913823, 0.116547),
        ([[0, 1], [3, 2]], "two_sided", 0.5, 0.6875),
    ],
)
def test_printed_values(table: Any, alternative: Any, statistic: float, p: float, outcome: Any) -> None:
    found = outcome(boschloo_exact(*by_columns(table), alternative=alternative))
    assert (found.statistic, found.p) == pytest.approx((statistic, p), abs=1e-7)


@pytest.mark.parametrize("seed", range(8))
def test_scipy(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    n1, n2 = (int(n) for n in random.integers(3, 30, 2))
    x, y = int(random.integers(0, n1 + 1)), int(random.integers(1, n2))
    sides: Any = (("above", "greater"), ("below", "less"))
    for ours, theirs in sides:
        found = outcome(boschloo_exact(*groups(x, n1, y, n2), alternative=ours))
        again = stats.boschloo_exact([[x, y], [n1 - x, n2 - y]], alternative=theirs, n=256)
        # theirs samples the common share and may miss the peak by a little, never exceed it
        assert found.p == pytest.approx(again.pvalue, rel=1e-6)
        assert found.p >= again.pvalue * (1 - 1e-9)


@pytest.mark.parametrize(("n1", "n2"), [(4, 7), (5, 5), (1, 6)])
def test_enumeration(n1: int, n2: int, outcome: Any) -> None:
    # every table, its one-sided p by Fisher's test, and the probability of those as extreme on a fine grid of shares
    tables = [(x, y) for x in range(n1 + 1) for y in range(n2 + 1)]
    fisher = np.array([stats.hypergeom.sf(x - 1, n1 + n2, x + y, n1) for x, y in tables])
    share = np.linspace(0, 1, 20_001)[:, None]
    counts = np.array(tables).T
    chance = np.asarray(stats.binom.pmf(counts[0], n1, share)) * np.asarray(stats.binom.pmf(counts[1], n2, share))
    for (x, y), one in zip(tables, fisher, strict=True):
        found = outcome(boschloo_exact(*groups(x, n1, y, n2), alternative="above"))
        # the grid is at most 2.5e-5 away from the peak, where the probability is flat
        assert found.p == pytest.approx(chance[:, fisher <= one * (1 + 1e-9)].sum(axis=1).max(), rel=1e-7)


@pytest.mark.parametrize("counts", [(9, 12, 3, 14), (0, 9, 5, 8), (20, 40, 31, 45), (0, 5, 0, 6), (4, 4, 4, 4)])
def test_never_larger_than_fishers(counts: Any, outcome: Any) -> None:
    for alternative in ("above", "below"):
        found = outcome(boschloo_exact(*groups(*counts), alternative=alternative))
        fisher = fisher_exact(*groups(*counts), alternative=alternative)
        assert found.p <= found.statistic * (1 + 1e-12)
        assert isinstance(fisher, NotComputed) or found.statistic == pytest.approx(fisher.p, rel=1e-11)


def test_interval_is_that_of_the_score_test(outcome: Any) -> None:
    found, score = (outcome(test(*groups(9, 12, 3, 14))) for test in (boschloo_exact, risk_difference))
    assert (found.estimate, found.lower, found.upper) == (score.estimate, score.lower, score.upper)
    assert found.remarks == (BUILT_DIFFERENTLY,)


def test_one_event_in_the_far_corner(outcome: Any) -> None:
    # all of the first group and none of the second: the only table as extreme; the share n1 / N is the worst
    found = outcome(boschloo_exact(*groups(6, 6, 0, 9), alternative="above"))
    assert found.p == pytest.approx((6 / 15) ** 6 * (9 / 15) ** 9, rel=1e-12)


@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
def test_smallest_p_is_attained(alternative: Any, outcome: Any) -> None:
    smallest = []
    for events in range(12):
        tables = range(max(0, events - 7), min(4, events) + 1)
        found = [outcome(boschloo_exact(*groups(x, 4, events - x, 7), alternative=alternative)).p for x in tables]
        smallest.append(min(found))
        known = boschloo_exact.smallest_p((4, 7), np.arange(11) < events, alternative=alternative)
        assert known == pytest.approx(smallest[-1], rel=1e-10)
    known = boschloo_exact.smallest_p((4, 7), None, alternative=alternative)
    assert known == pytest.approx(min(smallest), rel=1e-10)


@pytest.mark.parametrize(
    ("counts", "null", "reason"),
    [
        ((0, 0, 1, 3), 0, "at least 1 unit of the first group is needed; there are 0 units"),
        (
            (1, 3, 1, 3),
            0.1,
            "Boschloo's test is one of equal shares, null value 0; found 0.1. Use risk_difference.",
        ),
        (
            (9, 1500, 7, 600),
            0,
            "Boschloo's test takes up to 2\N{NARROW NO-BREAK SPACE}000 units; there are "
            "2\N{NARROW NO-BREAK SPACE}100. Use risk_difference.",
        ),
    ],
)
def test_no_result(counts: Any, null: float, reason: str) -> None:
    for ask in (boschloo_exact, boschloo_exact.again):
        assert ask(*groups(*counts), null_value=null) == NotComputed(reason, (counts[1], counts[3]))
