"""The log-rank test against printed values, R, statsmodels and a walk by hand."""

import math
from typing import Any

import numpy as np
import pytest
from hypothesis_tests.times import ask, base_r, bearings, patients, split
from scipy import stats
from statsmodels.duration.survfunc import survdiff

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.cochran_mantel_haenszel import cochran_mantel_haenszel
from beforehand.hypothesis_tests.entries.cox_hazard_ratio import cox_hazard_ratio
from beforehand.hypothesis_tests.entries.log_rank import BUILT_DIFFERENTLY, log_rank


def leukaemia(reference: Any, name: str, indicator: str) -> dict[str, Any]:
    data = reference(name).data
    return split(data("time"), data("cens" if name == "logrank-gehan" else "status"), data(indicator) == 1)


@pytest.mark.parametrize(
    ("name", "indicator"), [("logrank-aml", "nonmaintained"), ("logrank-gehan", "placebo"), ("logrank-ovarian", "")]
)
def test_printed_values(name: str, indicator: str, reference: Any, outcome: Any) -> None:
    given = reference(name)
    case = leukaemia(reference, name, indicator) if indicator else patients(reference, strata=False)
    found = outcome(ask(log_rank, case))
    assert given.agrees("chisq", found.statistic**2)
    if "p" in given.entry["expected"]:
        assert given.agrees("p", found.p)
    place = 1 if indicator else 0  # the entries name the group without the indicator first
    observed, expected = (given.entry["expected"][word][place] for word in ("observed", "expected_events"))
    assert found.remarks[0] == (
        f"Events in the first group: {observed} observed, {expected:.2f} expected with equal hazards."
    )
    # more events than expected: the hazard is higher, and the side above is the small one
    above = outcome(ask(log_rank, case, alternative="above"))
    assert (found.estimate > 1) == (observed > expected) == (above.p < 0.5)
    assert found.remarks[-1] == BUILT_DIFFERENTLY


@pytest.mark.parametrize(("name", "case"), [("stratified", patients), ("bearings", bearings)])
def test_r_with_strata_and_ties(name: str, case: Any, reference: Any, outcome: Any) -> None:
    theirs = base_r(name)
    with_strata, without = (
        case(reference, strata=strata) if name == "stratified" else case(strata=strata) for strata in (True, False)
    )
    found = outcome(ask(log_rank, with_strata))
    assert found.statistic**2 == pytest.approx(theirs["log_rank"], rel=1e-10)
    assert f"{theirs['observed']:.0f} observed, {theirs['expected']:.2f} expected" in found.remarks[0]
    assert math.log(found.estimate) == pytest.approx(theirs["coef"], rel=1e-8)
    assert outcome(ask(log_rank, without)).statistic ** 2 == pytest.approx(theirs["unstratified"], rel=1e-10)


def test_statsmodels(outcome: Any) -> None:
    case = bearings()
    time, events = np.concatenate(case["beside"]["time"]), np.concatenate(case["samples"])
    group = np.repeat([1, 0], [sample.size for sample in case["samples"]])
    chi_square, p = survdiff(time, events, group, strata=np.concatenate(case["beside"]["strata"]))
    found = outcome(ask(log_rank, case))
    assert (found.statistic**2, found.p) == pytest.approx((chi_square, p), rel=1e-10)


def test_each_event_time_is_a_stratum_of_two_by_two_tables(outcome: Any) -> None:
    # Mantel (1966): the log-rank test is the score test of the tables of all event times
    case = bearings(strata=False)
    time, events = np.concatenate(case["beside"]["time"]), np.concatenate(case["samples"])
    first = np.arange(events.size) < case["samples"][0].size
    rows = [(at, first[i], events[i] and time[i] == at) for at in np.unique(time[events])
            for i in np.flatnonzero(time >= at)]  # fmt: skip
    at, group, happened = (np.array(column) for column in zip(*rows, strict=True))
    by_tables = cochran_mantel_haenszel(
        *(happened[side] for side in (group, ~group)),
        strata=tuple(at[side] for side in (group, ~group)),
        method="score",
        continuity=False,
    )
    assert outcome(ask(log_rank, case)).p == pytest.approx(outcome(by_tables).p, rel=1e-10)


def test_another_null_value_by_hand(outcome: Any) -> None:
    # times 1 (first), 2 (second), 3 (first), 4 ended (second); ratio 2: shares 4/6, 2/4, 2/3
    case = split([1, 2, 3, 4], [1, 1, 1, 0], [1, 0, 1, 0])
    shares = np.array([4 / 6, 2 / 4, 2 / 3])
    z = (2 - shares.sum()) / math.sqrt((shares * (1 - shares)).sum())
    found = outcome(ask(log_rank, case, null_value=2.0, alternative="above"))
    assert found.statistic == pytest.approx(z, rel=1e-12)
    assert found.p == pytest.approx(stats.norm.sf(z), rel=1e-12)


def test_a_watch_that_ends_at_the_time_of_an_event_still_counts(outcome: Any) -> None:
    later = split([1, 2, 2, 3], [1, 1, 0, 1], [1, 1, 0, 0])
    found = outcome(ask(log_rank, later))
    # expected: 2/4 at 1, 1/3 at 2 (the watch that ends then is under watch), 0/1 at 3
    assert f"{2 / 4 + 1 / 3:.2f} expected" in found.remarks[0]


def test_times_that_differ_by_rounding_are_equal(outcome: Any) -> None:
    status, first = [1, 1, 1, 1, 0, 1], [1, 0, 1, 0, 1, 0]
    typed = split([0.1, 0.1, 0.3, 0.3, 0.5, 0.6], status, first)
    computed = split([0.3 - 0.2, 0.1, 0.1 + 0.2, 0.3, 0.5, 0.6], status, first)
    assert outcome(ask(log_rank, typed)).statistic == outcome(ask(log_rank, computed)).statistic


def test_only_the_order_of_times_counts(outcome: Any) -> None:
    case = bearings()
    moved = {**case, "beside": {**case["beside"], "time": tuple(np.exp(t / 3) for t in case["beside"]["time"])}}
    assert outcome(ask(log_rank, case)).p == pytest.approx(outcome(ask(log_rank, moved)).p, rel=1e-12)


def test_estimate_and_interval_are_those_of_proportional_hazards(outcome: Any) -> None:
    log, cox = outcome(ask(log_rank, bearings())), outcome(ask(cox_hazard_ratio, bearings()))
    assert (log.estimate, log.lower, log.upper) == (cox.estimate, cox.lower, cox.upper)
    assert log.p == pytest.approx(cox.p, rel=0.3)


@pytest.mark.parametrize(
    ("case", "reason"),
    [
        (split([1, 2], [1, 1], [0, 0]), "at least 1 unit of the first group is needed; there are 0 units"),
        (split([1, 2, 3], [0, 0, 0], [1, 0, 0]), "no event has happened in either group"),
        (
            split([1, 1, 3, 4], [0, 0, 1, 1], [1, 1, 0, 0]),
            "no event has happened while units of both groups were under watch",
        ),
        (
            split([2, 2], [1, 1], [1, 0]),
            "every event time takes all units that are still under watch: nothing is left to compare them with",
        ),
    ],
)
def test_no_result(case: dict[str, Any], reason: str) -> None:
    n = tuple(sample.size for sample in case["samples"])
    assert ask(log_rank, case) == ask(log_rank.again, case) == NotComputed(reason, n)


def test_refused_calls() -> None:
    with pytest.raises(ValueError, match="a hazard ratio under the null hypothesis is above 0; found 0"):
        ask(log_rank, bearings(), null_value=0)
    with pytest.raises(ValueError, match="a time is 0 or more; found"):
        ask(log_rank, split([1, -2], [1, 1], [1, 0]))
