"""The score test of a risk difference against printed values, base R, scipy, statsmodels and the likelihood itself."""

import math
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import optimize, stats
from statsmodels.stats.proportion import confint_proportions_2indep  # type: ignore[import-untyped]

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.risk_difference import ADDED_SQUARES, risk_difference
from beforehand.hypothesis_tests.shares_remarks import SPARSE

Groups = tuple[NDArray[np.bool_], NDArray[np.bool_]]


def groups(x: int, n1: int, y: int, n2: int) -> Groups:
    return np.arange(n1) < x, np.arange(n2) < y


@pytest.mark.parametrize("name", ["prop2-newcombe-56-70", "prop2-newcombe-9-10"])
def test_printed_values(name: str, reference: Any, outcome: Any) -> None:
    table = reference(name)
    samples = groups(*(table.entry["data"][key] for key in ("x1", "n1", "x2", "n2")))
    plain = outcome(risk_difference(*samples, small_sample_factor=False))
    factor = outcome(risk_difference(*samples))
    added = outcome(risk_difference(*samples, interval="added_squares"))
    intervals = {"diff_ci_mee": plain, "diff_ci_miettinen_nurminen": factor, "diff_ci_newcombe": added}
    for key, found in intervals.items():
        assert table.agrees(key, found.lower, 0), key
        assert table.agrees(key, found.upper, 1), key
    assert table.agrees("X2", plain.statistic**2)
    assert table.agrees("p", plain.p)
    margin: Any = {"null_value": -0.1, "alternative": "above"}
    plain, factor = (outcome(risk_difference(*samples, small_sample_factor=f, **margin)) for f in (False, True))
    assert table.agrees("noninf_fm_z", plain.statistic)
    assert table.agrees("noninf_fm_p", plain.p)
    assert table.agrees("noninf_mn_p", factor.p)
    assert ADDED_SQUARES in added.remarks


@pytest.mark.parametrize(
    ("counts", "settings", "lower", "upper"),
    [
        # Newcombe (1998) example (d): R package ratesci (petelaud/ratesci), tests/testthat, read there
        ((5, 56, 0, 29), {}, -0.0326, 0.1933),
        ((5, 56, 0, 29), {"small_sample_factor": False}, -0.0313, 0.1926),
        ((5, 56, 0, 29), {"interval": "added_squares"}, -0.0381, 0.1926),
        # R package contingencytables (ocbe-uio/contingencytables @0c0a59f1), tests/testthat/test-ch4.R, read there
        ((7, 34, 1, 34), {"small_sample_factor": False}, 0.0284, 0.3439),
        ((7, 34, 1, 34), {"interval": "added_squares"}, 0.0189, 0.3404),
        ((0, 16, 15, 72), {}, -0.3164, -0.0056),
    ],
)
def test_printed_intervals(counts: Any, settings: Any, lower: float, upper: float, outcome: Any) -> None:
    found = outcome(risk_difference(*groups(*counts), **settings))
    assert (round(found.lower, 4), round(found.upper, 4)) == (lower, upper)


def test_known_defect_elsewhere_is_not_ours(outcome: Any) -> None:
    # statsmodels issue 10269: its restricted estimate is no maximum; right are 3.9342 and 3.1818 at a margin of -0.1
    for counts, z in (((56, 70, 48, 80), 3.9342), ((7, 34, 1, 34), 3.1818)):
        found = outcome(risk_difference(*groups(*counts), null_value=-0.1, small_sample_factor=False))
        assert round(found.statistic, 4) == z


def test_base_r(r_case: Any) -> None:
    # R squares z and takes the root again; both to about 1e-14
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-11), name


@pytest.mark.parametrize("seed", range(15))
def test_likelihood_statsmodels_and_scipy(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    n1, n2 = (int(n) for n in random.integers(4, 90, 2))
    x, y = int(random.integers(0, n1 + 1)), int(random.integers(1, n2))
    null = float(random.uniform(-0.9, 0.9))
    found = outcome(risk_difference(*groups(x, n1, y, n2), null_value=null, small_sample_factor=False))

    def loss(share: float) -> float:
        return -float(stats.binom.logpmf(x, n1, share + null) + stats.binom.logpmf(y, n2, share))

    # the restricted shares by maximising the likelihood itself: flat at its top, so good to about 1e-7
    low, high = max(0.0, -null), min(1.0, 1 - null)
    second = optimize.minimize_scalar(loss, bounds=(low, high), method="bounded", options={"xatol": 1e-12}).x
    first = second + null
    error = math.sqrt(first * (1 - first) / n1 + second * (1 - second) / n2)
    assert found.statistic == pytest.approx((x / n1 - y / n2 - null) / error, rel=1e-4)
    z, p = found.statistic, found.p
    assert p == pytest.approx(2 * stats.norm.sf(abs(z)), rel=1e-11)
    # statsmodels has Newcombe's interval right
    added = outcome(risk_difference(*groups(x, n1, y, n2), interval="added_squares", confidence=0.9))
    again = confint_proportions_2indep(x, n1, y, n2, method="newcomb", compare="diff", alpha=0.1)
    assert (added.lower, added.upper) == pytest.approx(again, rel=1e-9, abs=1e-12)
    plain = outcome(risk_difference(*groups(x, n1, y, n2), small_sample_factor=False))
    table = [[x, n1 - x], [y, n2 - y]]
    assert plain.statistic**2 == pytest.approx(stats.chi2_contingency(table, correction=False).statistic, rel=1e-10)


def test_number_needed(outcome: Any) -> None:
    found = outcome(risk_difference(*groups(56, 70, 48, 80)))
    needed = "one event more in the first group for every 5.00 units, by the interval 2.96 to 18.9."
    assert found.remarks == (f"The reciprocal of the difference (number needed): {needed}",)  # 1/0.3382, 1/0.0528
    fewer = outcome(risk_difference(*groups(48, 80, 56, 70)))
    assert "one event fewer in the first group for every 5.00 units" in fewer.remarks[0]
    assert outcome(risk_difference(*groups(30, 60, 31, 60))).remarks == ()


def test_small_tables_say_so(outcome: Any) -> None:
    # 5 expected events in the smaller group are enough, fewer are not
    assert SPARSE not in outcome(risk_difference(*groups(10, 20, 0, 20))).remarks
    assert SPARSE in outcome(risk_difference(*groups(9, 20, 0, 20))).remarks


def test_units_that_are_all_alike(outcome: Any) -> None:
    # no event at all: as the null value goes to 0 so does z; with 0 of n the end d solves d n = z² (1 - d)
    found = outcome(risk_difference(*groups(0, 30, 0, 40), small_sample_factor=False))
    assert (found.estimate, found.statistic, found.p) == (0, 0, 1)
    squared = stats.norm.ppf(0.975) ** 2
    assert (found.lower, found.upper) == pytest.approx((-squared / (40 + squared), squared / (30 + squared)), rel=1e-12)
    margin = outcome(risk_difference(*groups(30, 30, 40, 40), null_value=-0.1, alternative="above"))
    assert margin.p == pytest.approx(stats.norm.sf(math.sqrt(0.1 / 0.9 * 30 * 69 / 70)), rel=1e-11)


def test_complete_separation(outcome: Any) -> None:
    found = outcome(risk_difference(*groups(12, 12, 0, 15)))
    assert (found.estimate, found.upper) == (1, 1)
    assert 0 < found.lower < 1
    assert outcome(risk_difference(*groups(0, 12, 15, 15))).lower == -1


@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
@pytest.mark.parametrize("null", [0.0, -0.15, 0.4])
def test_smallest_p_is_attained(alternative: Any, null: float, outcome: Any) -> None:
    settings: Any = {"alternative": alternative, "null_value": null}
    smallest = []
    for events in range(12):
        tables = range(max(0, events - 7), min(4, events) + 1)
        smallest.append(min(outcome(risk_difference(*groups(x, 4, events - x, 7), **settings)).p for x in tables))
        found = risk_difference.smallest_p((4, 7), np.arange(11) < events, **settings)
        assert found == pytest.approx(smallest[-1], rel=1e-11)
    assert risk_difference.smallest_p((4, 7), None, **settings) == pytest.approx(min(smallest), rel=1e-11)
    assert risk_difference.smallest_p((0, 7), None, **settings) == 1


def test_no_result() -> None:
    reason = "at least 1 unit of the second group is needed; there are 0 units"
    assert risk_difference(*groups(1, 3, 0, 0)) == NotComputed(reason, (3, 0))


def test_refused_calls() -> None:
    samples: Any = groups(2, 4, 1, 4)
    for null in (-1.0, 1.0, 5.0):
        with pytest.raises(ValueError, match="a null difference in shares lies between -1 and 1; found"):
            risk_difference(*samples, null_value=null)
    with pytest.raises(ValueError, match="interval is score or added_squares; found 'wald'"):
        risk_difference(*samples, interval="wald")  # type: ignore[arg-type]
