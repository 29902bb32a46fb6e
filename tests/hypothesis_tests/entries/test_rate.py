"""The Poisson test of a rate against printed values, statsmodels and sums of the distribution."""

import math
from typing import Any

import numpy as np
import pytest
from scipy import stats
from statsmodels.stats import rates

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.rate import rate


def in_rows(total: int, exposure: float, n: int = 4) -> dict[str, Any]:
    """Spread events and exposure evenly over rows: only their sums matter."""
    counts = np.diff(np.linspace(0, total, n + 1).round())
    return {"values": counts, "exposure": (np.full(n, exposure / n),)}


def ask(total: int, exposure: float, **settings: Any) -> Any:
    rows = in_rows(total, exposure)
    return rate(rows["values"], exposure=rows["exposure"], **settings)


def test_welded_breaks(reference: Any, outcome: Any) -> None:
    breaks = reference("poisson-one")
    found = outcome(ask(breaks.entry["data"]["events"], breaks.entry["data"]["time"]))
    assert breaks.agrees("rate", found.estimate)
    for place, end in enumerate((found.lower, found.upper)):
        assert breaks.agrees("ci95", end, place)
    # the entry's two-sided p adds the less probable counts: below, there are none that count
    assert breaks.entry["expected"]["p_H0_rate1"] == pytest.approx(
        outcome(ask(137, 24.19893, alternative="above")).p, rel=1e-6
    )


@pytest.mark.parametrize("total", [0, 1, 7, 300])
@pytest.mark.parametrize(("method", "theirs"), [("exact", "exact-c"), ("score", "score")])
def test_statsmodels(total: int, method: Any, theirs: str, outcome: Any) -> None:
    for side, alternative in (("above", "larger"), ("below", "smaller")):
        found = outcome(ask(total, 11.5, null_value=1.7, alternative=side, method=method, confidence=0.9))
        if method == "exact":
            tail = stats.poisson(11.5 * 1.7)
            assert found.p == pytest.approx(tail.sf(total - 1) if side == "above" else tail.cdf(total), rel=1e-10)
        else:
            again = rates.test_poisson(total, 11.5, value=1.7, method="score", alternative=alternative)
            assert found.p == pytest.approx(again.pvalue, rel=1e-10)
    ends = rates.confint_poisson(total, 11.5, method=theirs, alpha=0.1)
    assert (found.lower, found.upper) == pytest.approx(tuple(np.nan_to_num(ends)), rel=1e-9, abs=1e-12)


def test_two_sided_p_and_interval_by_hand(outcome: Any) -> None:
    # no event in an exposure of 3: P(0) = exp(-3 rate) is 2.5 % at the upper end
    found = outcome(ask(0, 3.0, null_value=0.5))
    assert (found.estimate, found.lower) == (0, 0)
    assert found.upper == pytest.approx(-math.log(0.025) / 3, rel=1e-12)
    assert found.p == pytest.approx(2 * math.exp(-1.5), rel=1e-12)


def test_only_sums_matter(outcome: Any) -> None:
    one = outcome(rate(np.array([9.0]), exposure=(np.array([4.0]),), null_value=1.5))
    several = outcome(rate(np.array([3.0, 0.0, 6.0]), exposure=(np.array([1.0, 0.5, 2.5]),), null_value=1.5))
    for number in ("estimate", "lower", "upper", "p"):
        assert getattr(one, number) == pytest.approx(getattr(several, number), rel=1e-13)


def test_counts_that_scatter_too_much_are_remarked(outcome: Any) -> None:
    exposure = (np.ones(12),)
    calm = np.array([3.0, 4, 2, 5, 3, 3, 4, 2, 6, 3, 1, 4])
    assert outcome(rate(calm, exposure=exposure)).remarks == ()
    (said,) = outcome(rate(calm * 5 * (np.arange(12) % 3 == 0), exposure=exposure)).remarks
    # variance by mean, from the rows by hand: sum (x - mean)² / mean / 11
    rows = calm * 5 * (np.arange(12) % 3 == 0)
    assert f"about {np.var(rows, ddof=1) / rows.mean():.0f} times" in said


def test_smallest_p(outcome: Any) -> None:
    exposure = (np.full(5, 2.0),)
    for method in ("exact", "score"):
        settings: dict[str, Any] = {"null_value": 0.4, "alternative": "below", "method": method}
        attained = outcome(rate(np.zeros(5), exposure=exposure, **settings)).p
        assert rate.smallest_p((5,), np.zeros(5), exposure=exposure, **settings) == pytest.approx(attained, rel=1e-12)
    assert rate.smallest_p((5,), None, exposure=exposure, null_value=0.4, alternative="above") == 0.0
    assert rate.smallest_p((5,), None, null_value=0.4, alternative="below") == 0.0  # the exposure is not known


def test_no_result() -> None:
    assert rate(np.empty(0), exposure=(np.empty(0),)) == NotComputed("at least 1 row is needed; there are 0 rows", (0,))


def test_refused_calls() -> None:
    with pytest.raises(ValueError, match="a rate under the null hypothesis is above 0; found 0"):
        ask(3, 4.0, null_value=0)
    with pytest.raises(ValueError, match="method is exact or score; found 'wald'"):
        ask(3, 4.0, method="wald")
    with pytest.raises(ValueError, match="a count is a whole number from 0 on"):
        rate(np.array([1.5]), exposure=(np.ones(1),))
