"""The score test of a risk ratio against printed values, base R, statsmodels and the likelihood itself."""

import math
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import optimize, stats
from statsmodels.stats.proportion import confint_proportions_2indep, score_test_proportions_2indep  # type: ignore[import-untyped]

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.risk_ratio import NO_EVENT_FIRST, NO_EVENT_SECOND, risk_ratio

Groups = tuple[NDArray[np.bool_], NDArray[np.bool_]]


def groups(x: int, n1: int, y: int, n2: int) -> Groups:
    return np.arange(n1) < x, np.arange(n2) < y


@pytest.mark.parametrize(
    ("counts", "factor", "digits", "ends"),
    [
        # R package contingencytables (ocbe-uio/contingencytables @0c0a59f1), tests/testthat/test-ch4.R, read there
        ((7, 34, 1, 34), False, 4, (1.2209, 42.5757)),
        ((7, 34, 1, 34), True, 4, (1.2086, 43.0330)),
        # Gart and Nam (1988), uncorrected, and Fagerland and Newcombe (2013): R package ratesci (petelaud/ratesci),
        # tests/testthat, read there
        ((8, 15, 4, 15), False, 3, (0.815, 5.336)),
        ((6, 10, 6, 20), False, 3, (0.844, 4.594)),
        ((24, 73, 53, 65), True, 3, (0.280, 0.560)),
        ((29, 55, 11, 11), True, 3, (0.397, 0.742)),
        ((7, 18, 1, 18), True, 3, (1.296, 42.544)),
    ],
)
def test_printed_intervals(counts: Any, factor: bool, digits: int, ends: Any, outcome: Any) -> None:
    found = outcome(risk_ratio(*groups(*counts), small_sample_factor=factor))
    assert (round(found.lower, digits), round(found.upper, digits)) == ends


def test_base_r(r_case: Any) -> None:
    # at a ratio of 1 without the factor this is Pearson's chi-square; R squares z and takes the root again
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-11), name


@pytest.mark.parametrize("seed", range(12))
def test_statsmodels_and_likelihood(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    n1, n2 = (int(n) for n in random.integers(5, 80, 2))
    x, y = int(random.integers(1, n1)), int(random.integers(1, n2))
    null, factor = float(np.exp(random.normal(0, 0.7))), bool(random.integers(2))
    found = outcome(risk_ratio(*groups(x, n1, y, n2), null_value=null, small_sample_factor=factor))
    again = score_test_proportions_2indep(x, n1, y, n2, value=null, compare="ratio", correction=factor)
    assert found.statistic == pytest.approx(again.statistic, rel=1e-9)
    assert found.p == pytest.approx(again.pvalue, rel=1e-8)
    ends = confint_proportions_2indep(x, n1, y, n2, method="score", compare="ratio", correction=factor)
    # theirs brackets the roots to about 1e-6
    assert (found.lower, found.upper) == pytest.approx(ends, rel=1e-5)

    def loss(share: float) -> float:
        return -float(stats.binom.logpmf(x, n1, null * share) + stats.binom.logpmf(y, n2, share))

    bounds = (1e-9, min(1.0, 1 / null) - 1e-9)
    second = optimize.minimize_scalar(loss, bounds=bounds, method="bounded", options={"xatol": 1e-12}).x
    first = null * second
    error = math.sqrt(first * (1 - first) / n1 + null**2 * second * (1 - second) / n2)
    # the likelihood is flat at its top: its maximum is good to about 1e-7
    z = (x / n1 - null * y / n2) / error * math.sqrt(1 - factor / (n1 + n2))
    assert found.statistic == pytest.approx(z, rel=1e-4, abs=1e-6)


def test_no_event_in_a_group(outcome: Any) -> None:
    none = outcome(risk_ratio(*groups(0, 20, 6, 25)))
    assert (none.estimate, none.lower, NO_EVENT_FIRST in none.remarks) == (0, 0, True)
    every = outcome(risk_ratio(*groups(6, 25, 0, 20)))
    assert (every.estimate, every.upper, NO_EVENT_SECOND in every.remarks) == (math.inf, math.inf, True)
    assert every.lower == pytest.approx(1 / none.upper, rel=1e-11)


def test_every_unit_has_the_event(outcome: Any) -> None:
    found = outcome(risk_ratio(*groups(20, 20, 25, 25), small_sample_factor=False))
    assert (found.estimate, found.statistic, found.p) == (1, 0, 1)
    # all of n: below 1 the first share is the ratio itself, so (1 - r) n = z² r at the lower end
    squared = stats.norm.ppf(0.975) ** 2
    assert found.lower == pytest.approx(20 / (20 + squared), rel=1e-12)
    assert found.upper == pytest.approx((25 + squared) / 25, rel=1e-12)


@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
@pytest.mark.parametrize("null", [1.0, 0.6, 3.0])
def test_smallest_p_is_attained(alternative: Any, null: float, outcome: Any) -> None:
    settings: Any = {"alternative": alternative, "null_value": null}
    smallest = []
    for events in range(1, 12):
        tables = range(max(0, events - 7), min(4, events) + 1)
        smallest.append(min(outcome(risk_ratio(*groups(x, 4, events - x, 7), **settings)).p for x in tables))
        found = risk_ratio.smallest_p((4, 7), np.arange(11) < events, **settings)
        assert found == pytest.approx(smallest[-1], rel=1e-11)
    assert risk_ratio.smallest_p((4, 7), None, **settings) == pytest.approx(min(smallest), rel=1e-11)
    assert risk_ratio.smallest_p((4, 7), np.zeros(11, dtype=np.bool_), **settings) == 1


@pytest.mark.parametrize(
    ("counts", "reason"),
    [
        ((0, 0, 1, 3), "at least 1 unit of the first group is needed; there are 0 units"),
        ((0, 4, 0, 3), "none of the 7 units has the event"),
    ],
)
def test_no_result(counts: Any, reason: str) -> None:
    assert risk_ratio(*groups(*counts)) == NotComputed(reason, (counts[1], counts[3]))


def test_refused_calls() -> None:
    with pytest.raises(ValueError, match="a ratio of shares under the null hypothesis is above 0; found 0"):
        risk_ratio(*groups(2, 4, 1, 4), null_value=0)
