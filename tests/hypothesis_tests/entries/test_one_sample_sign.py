"""The sign test of one sample against base R, binomial sums and the sign test of pairs."""

from typing import Any

import numpy as np
import pytest
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.one_sample_sign import one_sample_sign
from beforehand.hypothesis_tests.entries.sign import sign


def test_base_r(r_case: Any) -> None:
    # counts of whole numbers, and ends that are values of the data
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-12, abs=1e-9), name


@pytest.mark.parametrize(("ours", "theirs"), [("above", "greater"), ("below", "less"), ("two_sided", "two-sided")])
def test_binomial_of_scipy(ours: Any, theirs: str, outcome: Any) -> None:
    values = np.random.default_rng(43).normal(3, 1, 40)
    for null_value in (2.5, 3.2):
        found = outcome(one_sample_sign(values, null_value=null_value, alternative=ours))
        again = stats.binomtest(int((values > null_value).sum()), 40, 0.5, alternative=theirs)
        assert found.p == pytest.approx(again.pvalue, rel=1e-12)


@pytest.mark.parametrize("confidence", [0.8, 0.95])
def test_interval_of_scipy(confidence: float, outcome: Any) -> None:
    # scipy inverts the same test for a quantile
    values = np.random.default_rng(44).exponential(2, 35)
    found = outcome(one_sample_sign(values, confidence=confidence))
    again = stats.quantile_test(values, q=1, p=0.5).confidence_interval(confidence)
    assert (found.lower, found.upper) == pytest.approx((again.low, again.high), rel=1e-15)
    assert found.estimate == np.median(values)


def test_like_pairs_with_nothing(outcome: Any) -> None:
    values = np.random.default_rng(45).integers(-3, 6, 25) + 0.0
    for zeros in ("dropped", "against"):
        settings: Any = {"null_value": 1.0, "alternative": "above", "zeros": zeros}
        one, pairs = one_sample_sign(values, **settings), sign(values, np.zeros(25), **settings)
        found, again = outcome(one), outcome(pairs)
        assert (found.p, found.lower, found.upper, found.n) == (again.p, again.lower, again.upper, again.n)
        assert found.remarks[0] == again.remarks[0].replace("difference", "value")


def test_smallest_p() -> None:
    values = np.array([1.0, 2, 2, 3, 5])
    settings: Any = {"alternative": "above"}
    assert one_sample_sign.smallest_p((5,), values, null_value=0.0, **settings) == pytest.approx(1 / 32, rel=1e-14)
    assert one_sample_sign.smallest_p((5,), values, null_value=2.0, **settings) == pytest.approx(1 / 8, rel=1e-14)
    assert one_sample_sign.smallest_p((5,), None, null_value=2.0, **settings) == pytest.approx(1 / 32, rel=1e-14)


@pytest.mark.parametrize(
    ("values", "reason"),
    [
        ([3.0], "at least 2 values are needed; there is 1 value"),
        ([3.0] * 4, "all 4 values are equal"),
        ([0.3, 0.1 + 0.2], "all 2 values are equal"),
    ],
)
def test_no_result(values: list[float], reason: str) -> None:
    assert one_sample_sign(np.array(values), null_value=1.0) == NotComputed(reason, (len(values),))
