"""Cox's hazard ratio against printed values, closed forms, R and statsmodels."""

import math
from typing import Any

import numpy as np
import pytest
from hypothesis_tests.times import ask, base_r, bearings, patients, split
from scipy import stats
from statsmodels.duration.hazard_regression import PHReg

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.cox_hazard_ratio import cox_hazard_ratio
from beforehand.hypothesis_tests.survival import NO_EVENT_FIRST, NO_EVENT_SECOND


def error_of(found: Any, confidence: float = 0.95) -> float:
    """The standard error of the logarithm, from the ends of a Wald interval."""
    return math.log(found.upper / found.lower) / 2 / float(stats.norm.isf((1 - confidence) / 2))


def test_maintenance(reference: Any, outcome: Any) -> None:
    data, cox = reference("logrank-aml").data, reference("cox-aml")
    case = split(data("time"), data("status"), data("nonmaintained") == 1)
    ratio, wald = outcome(ask(cox_hazard_ratio, case)), outcome(ask(cox_hazard_ratio, case, method="wald"))
    assert cox.agrees("efron_coef", math.log(ratio.estimate))
    assert cox.agrees("efron_se", error_of(wald))
    assert cox.agrees("efron_p", wald.p)
    assert cox.agrees("efron_lr_df_p", ratio.statistic**2, 0)
    assert cox.agrees("efron_lr_df_p", ratio.p, 2)


def test_a_closed_form(reference: Any, outcome: Any) -> None:
    known = reference("cox-tg-appendix")
    case = split(known.data("time"), known.data("status"), known.data("x") == 1)
    found = outcome(ask(cox_hazard_ratio, case, method="wald"))
    closed = math.log(2 * math.sqrt(23 / 3) * math.cos(math.acos(45 / 23 * math.sqrt(3 / 23)) / 3))
    assert math.log(found.estimate) == pytest.approx(closed, rel=1e-12)
    assert known.agrees("efron_coef", math.log(found.estimate))
    assert known.agrees("efron_se", error_of(found))


def test_ovarian(reference: Any, outcome: Any) -> None:
    cox = reference("cox-ovarian")
    found = outcome(ask(cox_hazard_ratio, patients(reference, strata=False), method="wald"))
    # theirs is the effect of one more of rx, so of the second treatment over the first
    assert cox.agrees("rx_coef", -math.log(found.estimate))
    assert cox.agrees("rx_se", error_of(found))


@pytest.mark.parametrize("name", ["stratified", "bearings"])
def test_r_with_strata_and_ties(name: str, reference: Any, outcome: Any) -> None:
    theirs, case = base_r(name), patients(reference, strata=True) if name == "stratified" else bearings()
    ratio, wald = outcome(ask(cox_hazard_ratio, case)), outcome(ask(cox_hazard_ratio, case, method="wald"))
    # theirs stops when a step of the likelihood is below 1e-12 of it: half of that in the coefficient
    assert math.log(ratio.estimate) == pytest.approx(theirs["coef"], rel=1e-6)
    assert error_of(wald) == pytest.approx(theirs["error"], rel=1e-6)
    assert ratio.statistic**2 == pytest.approx(theirs["likelihood_ratio"], rel=1e-9)
    assert wald.statistic == pytest.approx(theirs["coef"] / theirs["error"], rel=1e-6)


@pytest.mark.parametrize("strata", [True, False])
def test_statsmodels(strata: bool, outcome: Any) -> None:
    case = bearings(strata=strata)
    time, events = np.concatenate(case["beside"]["time"]), np.concatenate(case["samples"])
    group = np.repeat([1.0, 0.0], [sample.size for sample in case["samples"]])
    names = np.concatenate(case["beside"]["strata"]) if strata else None
    model = PHReg(time, group[:, None], status=events.astype(int), ties="efron", strata=names)
    found = outcome(ask(cox_hazard_ratio, case))
    assert float(model.score(np.array([math.log(found.estimate)]))[0]) == pytest.approx(0, abs=1e-9)
    for null_value in (1.0, 0.4, 2.0):
        lacking = model.loglike(np.array([math.log(found.estimate)])) - model.loglike(np.array([math.log(null_value)]))
        moved = outcome(ask(cox_hazard_ratio, case, null_value=null_value, alternative="below"))
        z = math.copysign(math.sqrt(2 * lacking), found.estimate - null_value)
        assert moved.statistic == pytest.approx(z, rel=1e-8)
        assert moved.p == pytest.approx(stats.norm.cdf(z), rel=1e-8)
    ends = outcome(ask(cox_hazard_ratio, case, confidence=0.9))
    for end in (ends.lower, ends.upper):
        lacking = model.loglike(np.array([math.log(found.estimate)])) - model.loglike(np.array([math.log(end)]))
        assert 2 * lacking == pytest.approx(stats.chi2.isf(0.1, 1), rel=1e-8)


def test_all_events_in_one_group(outcome: Any) -> None:
    # events of the first group only, of 3, 2 and 1 against 2: the likelihood at ratio r is the product of shares
    only = split([1, 2, 3, 5, 6], [1, 1, 1, 0, 0], [1, 1, 1, 0, 0])
    found = outcome(ask(cox_hazard_ratio, only))
    lacking = -math.log(3 / 5 * 2 / 4 * 1 / 3)
    assert (found.estimate, found.upper, found.remarks[-1]) == (math.inf, math.inf, NO_EVENT_SECOND)
    assert found.statistic == pytest.approx(math.sqrt(2 * lacking), rel=1e-12)
    at_end = outcome(ask(cox_hazard_ratio, only, null_value=found.lower, alternative="above"))
    assert at_end.p == pytest.approx(0.025, rel=1e-8)
    mirror = split([1, 2, 3, 5, 6], [1, 1, 1, 0, 0], [0, 0, 0, 1, 1])
    turned = outcome(ask(cox_hazard_ratio, mirror))
    assert (turned.estimate, turned.lower, turned.remarks[-1]) == (0, 0, NO_EVENT_FIRST)
    assert turned.upper == pytest.approx(1 / found.lower, rel=1e-10)
    told = "the estimate is 0 or infinite, and has no standard error. Use method: likelihood_ratio"
    for case, n in ((only, (3, 2)), (mirror, (2, 3))):
        assert ask(cox_hazard_ratio, case, method="wald") == NotComputed(told, n)
        assert ask(cox_hazard_ratio.again, case, method="wald") == NotComputed(told, n)


def test_strata_are_compared_within(outcome: Any) -> None:
    # each stratum by itself says 1 exactly; together, without strata, the groups lie in different ones
    time, status = [1, 2, 3, 4, 11, 12, 13, 14], [1] * 8
    first, names = [1, 0, 0, 1, 1, 0, 0, 1], ["a"] * 4 + ["b"] * 4
    found = outcome(ask(cox_hazard_ratio, split(time, status, first, names)))
    one = outcome(ask(cox_hazard_ratio, split(time[:4], status[:4], first[:4])))
    assert found.estimate == pytest.approx(one.estimate, rel=1e-12)
    assert found.statistic**2 == pytest.approx(2 * one.statistic**2, rel=1e-9)


@pytest.mark.parametrize(
    ("case", "reason"),
    [
        (split([1, 2], [1, 1], [1, 1]), "at least 1 unit of the second group is needed; there are 0 units"),
        (split([1, 2, 3], [0, 0, 0], [1, 0, 0]), "no event has happened in either group"),
        (
            split([1, 1, 3, 4], [0, 0, 1, 1], [1, 1, 0, 0]),
            "no event has happened while units of both groups were under watch",
        ),
    ],
)
def test_no_result(case: dict[str, Any], reason: str) -> None:
    n = tuple(sample.size for sample in case["samples"])
    assert ask(cox_hazard_ratio, case) == ask(cox_hazard_ratio.again, case) == NotComputed(reason, n)


def test_refused_calls() -> None:
    with pytest.raises(ValueError, match="a hazard ratio under the null hypothesis is above 0; found -1"):
        ask(cox_hazard_ratio, bearings(), null_value=-1)
    with pytest.raises(ValueError, match="method is likelihood_ratio or wald; found 'score'"):
        ask(cox_hazard_ratio, bearings(), method="score")
