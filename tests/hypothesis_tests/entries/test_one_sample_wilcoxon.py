"""The signed rank test of one sample against printed values, base R, scipy and the test of pairs."""

from typing import Any

import numpy as np
import pytest
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.one_sample_wilcoxon import one_sample_wilcoxon
from beforehand.hypothesis_tests.entries.wilcoxon_signed_rank import wilcoxon_signed_rank


def test_heights(reference: Any, outcome: Any) -> None:
    heights = reference("perm-darwin")
    found = outcome(one_sample_wilcoxon(heights.data("difference_eighths_inch")))
    assert heights.agrees("wsr_Wplus", found.statistic)
    assert heights.agrees("wsr_p_exact", found.p)


def test_base_r(r_case: Any) -> None:
    # counts and normal tails: both to about 1e-14; ends and estimates are averages of the data
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-12), name


@pytest.mark.parametrize(("ours", "theirs"), [("above", "greater"), ("below", "less"), ("two_sided", "two-sided")])
def test_scipy(ours: Any, theirs: Any, outcome: Any) -> None:
    random = np.random.default_rng(46)
    for n in (2, 9, 40):
        values = random.normal(3.3, 1, n)
        found = outcome(one_sample_wilcoxon(values, null_value=3, alternative=ours))
        again = stats.wilcoxon(values - 3, alternative=theirs, method="exact")
        assert found.p == pytest.approx(again.pvalue, rel=1e-11)


@pytest.mark.parametrize("method", ["exact", "normal"])
@pytest.mark.parametrize("zeros", ["pratt", "dropped"])
def test_like_pairs_with_nothing(method: Any, zeros: Any, outcome: Any) -> None:
    values = np.random.default_rng(47).integers(-3, 6, 25) / 10
    settings: Any = {"null_value": 0.1, "alternative": "above", "zeros": zeros, "method": method}
    found = outcome(one_sample_wilcoxon(values, **settings))
    again = outcome(wilcoxon_signed_rank(values, np.zeros(25), **settings))
    assert (found.p, found.statistic, found.n) == (again.p, again.statistic, again.n)
    assert (found.estimate, found.lower, found.upper) == (again.estimate, again.lower, again.upper)


def test_the_rule_is_printed(outcome: Any) -> None:
    exact = outcome(one_sample_wilcoxon(np.arange(100.0))).remarks[0]
    assert exact == "Exact distribution, ties included (the rule for up to 100 values; here 100)."


def test_smallest_p() -> None:
    values = np.array([1.0, 2, 2, 3, 5])
    for null_value, p in ((0.0, 1 / 32), (2.0, 1 / 8)):
        assert one_sample_wilcoxon.smallest_p((5,), values, alternative="above", null_value=null_value) == p
    assert one_sample_wilcoxon.smallest_p((5,), None, alternative="two_sided", null_value=2.0) == 1 / 16


@pytest.mark.parametrize(
    ("values", "settings", "reason"),
    [
        ([3.0], {}, "at least 2 values are needed; there is 1 value"),
        ([3.0] * 4, {}, "all 4 values are equal"),
        # neighbours among doubles, both as near to the null value as rounding allows
        (
            [1.0, 1 + 6 * 2.0**-53],
            {"null_value": 1 + 2 * 2.0**-53},
            "all 2 values equal the null value but for rounding",
        ),
        (
            np.arange(201.0),
            {"method": "exact"},
            "the exact distribution is counted for up to 200 values; there are 201. Use method: normal",
        ),
    ],
)
def test_no_result(values: Any, settings: dict[str, Any], reason: str) -> None:
    assert one_sample_wilcoxon(np.array(values), **settings) == NotComputed(reason, (len(values),))


def test_refused_calls() -> None:
    for ask in (one_sample_wilcoxon, one_sample_wilcoxon.again):
        with pytest.raises(ValueError, match="zeros is pratt or dropped; found 'split'"):
            ask(np.arange(3.0), zeros="split")  # type: ignore[arg-type]
