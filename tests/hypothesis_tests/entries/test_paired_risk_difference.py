"""The score test of a paired risk difference against printed values, base R and the likelihood itself."""

import math
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import optimize, stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.paired_risk_difference import FEW_DIFFER, paired_risk_difference

Pairs = tuple[NDArray[np.bool_], NDArray[np.bool_]]


def pairs(first: int, second: int, both: int = 0, neither: int = 0) -> Pairs:
    """So many pairs with the event on the first side alone, on the second alone, on both, on neither."""
    counts = (first, second, both, neither)
    return np.repeat([True, False, True, False], counts), np.repeat([False, True, True, False], counts)


@pytest.mark.parametrize(
    ("counts", "confidence", "digits", "ends"),
    [
        # R package contingencytables (ocbe-uio/contingencytables @00b5af39), tests/testthat/test-ch8.R, read there
        ((6, 16, 59, 80), 0.95, 4, (-0.1240, -0.0054)),
        # Tango (1998), Agresti and Min (2005), Fagerland and others (2014): R package ratesci (petelaud/ratesci),
        # tests/testthat, read there
        ((9, 3, 4, 16), 0.95, 3, (-0.027, 0.390)),
        ((0, 1, 43, 0), 0.90, 3, (-0.096, 0.037)),
        ((16, 8, 53, 9), 0.95, 3, (-0.020, 0.207)),
        ((1, 7, 1, 12), 0.95, 3, (-0.517, -0.026)),
    ],
)
def test_printed_intervals(counts: Any, confidence: float, digits: int, ends: Any, outcome: Any) -> None:
    found = outcome(paired_risk_difference(*pairs(*counts), confidence=confidence))
    assert (round(found.lower, digits), round(found.upper, digits)) == ends


def test_base_r(r_case: Any) -> None:
    # at 0 this is McNemar's chi-square; R squares z and takes the root again
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-11), name


@pytest.mark.parametrize("seed", range(15))
def test_likelihood(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    b, c, rest = (int(n) for n in random.integers(0, 30, 3))
    n, null = b + c + rest + 1, float(random.uniform(-0.9, 0.9))
    found = outcome(paired_risk_difference(*pairs(b, c, rest, 1), null_value=null))

    def loss(second: float) -> float:
        return -float(stats.multinomial.logpmf([b, c, n - b - c], n, [second + null, second, 1 - null - 2 * second]))

    low, high = max(0.0, -null), (1 - null) / 2
    fitted = optimize.minimize_scalar(loss, bounds=(low, high), method="bounded", options={"xatol": 1e-13})
    # the likelihood is flat at its top: its maximum is good to about 1e-7
    error = math.sqrt(n * (2 * fitted.x + null - null**2))
    assert found.statistic == pytest.approx((b - c - n * null) / error, rel=1e-4, abs=1e-6)
    assert found.p == pytest.approx(2 * stats.norm.sf(abs(found.statistic)), rel=1e-11)
    assert found.estimate == pytest.approx((b - c) / n, rel=1e-15)


def test_ends_by_hand(outcome: Any) -> None:
    # no pair differs: the end d of n pairs solves n d² = z² d (1 - d)
    found = outcome(paired_risk_difference(*pairs(0, 0, 20, 12)))
    squared = stats.norm.ppf(0.975) ** 2
    assert (found.estimate, found.statistic, found.p, found.remarks) == (0, 0, 1, (FEW_DIFFER,))
    assert found.upper == pytest.approx(squared / (32 + squared), rel=1e-12)
    assert found.lower == -found.upper
    every = outcome(paired_risk_difference(*pairs(12, 0)))
    assert (every.estimate, every.upper, every.remarks) == (1, 1, ())


@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
@pytest.mark.parametrize("null", [0.0, -0.2, 0.5])
def test_smallest_p_is_attained(alternative: Any, null: float, outcome: Any) -> None:
    settings: Any = {"alternative": alternative, "null_value": null}
    smallest = []
    for differ in range(8):
        found = [
            outcome(paired_risk_difference(*pairs(b, differ - b, 7 - differ), **settings)).p for b in range(differ + 1)
        ]
        smallest.append(min(found))
        known = paired_risk_difference.smallest_p((7,), np.arange(7) < differ, **settings)
        assert known == pytest.approx(smallest[-1], rel=1e-11)
    assert paired_risk_difference.smallest_p((7,), None, **settings) == pytest.approx(min(smallest), rel=1e-11)


def test_no_result() -> None:
    assert paired_risk_difference(*pairs(0, 0)) == NotComputed("at least 1 pair is needed; there are 0 pairs", (0,))


def test_refused_calls() -> None:
    with pytest.raises(ValueError, match="a null difference in shares lies between -1 and 1; found 10"):
        paired_risk_difference(*pairs(2, 1), null_value=10)
