"""Fisher's exact test against printed values, base R, scipy and counting."""

import math
from itertools import combinations
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats
from scipy.stats.contingency import odds_ratio

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.fisher_exact import AT_LEAST, AT_MOST, BY_PROBABILITY, fisher_exact


def group(events: int, size: int) -> NDArray[np.bool_]:
    return np.arange(size) < events


def test_tea(reference: Any, outcome: Any) -> None:
    tea = reference("fisher-tea")
    (a, b), (c, d) = tea.data("table").astype(int)
    samples = group(a, a + b), group(c, c + d)
    found = outcome(fisher_exact(*samples, alternative="above", confidence=0.9))
    assert tea.agrees("p_greater", found.p)
    assert tea.agrees("or_cmle", found.estimate)
    assert tea.agrees("or_lower_greater", found.lower)  # one-sided at 95 %: the lower end at 90 %
    assert tea.agrees("p_two", outcome(fisher_exact(*samples, two_sided_by="smaller_probability")).p)


def test_convictions(reference: Any, outcome: Any) -> None:
    convictions = reference("fisher-convictions")
    (a, b), (c, d) = convictions.data("table").astype(int)
    samples = group(a, a + b), group(c, c + d)
    found = outcome(fisher_exact(*samples))
    assert convictions.agrees("or_cmle", found.estimate)
    for place, end in enumerate((found.lower, found.upper)):
        assert convictions.agrees("ci95", end, place)
    below = outcome(fisher_exact(*samples, alternative="below", confidence=0.9))
    assert convictions.agrees("p_less", below.p)
    assert convictions.agrees("upper_less", below.upper)
    assert convictions.agrees("p_two", outcome(fisher_exact(*samples, two_sided_by="smaller_probability")).p)


def test_base_r(r_case: Any) -> None:
    found = r_case.result()
    # both sum a handful of exact terms; R finds the ends to 1.2e-4 only, above 1 those of the inverse
    assert found.p == pytest.approx(r_case.found["p"], rel=1e-10)
    for name in r_case.found.keys() & {"lower", "upper"}:
        ours, theirs = getattr(found, name), r_case.found[name]
        if ours > 1:
            ours, theirs = 1 / ours, 1 / theirs
        assert ours == pytest.approx(theirs, abs=1.3e-4), name


@pytest.mark.parametrize("seed", range(20))
def test_scipy(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    n1, n2 = (int(n) for n in random.integers(3, 30, 2))
    a, c = int(random.integers(1, n1)), int(random.integers(1, n2))
    samples, table = (group(a, n1), group(c, n2)), [[a, n1 - a], [c, n2 - c]]
    found = outcome(fisher_exact(*samples, confidence=0.9))
    again = odds_ratio(np.array(table))
    # theirs solves to about 1e-12; its tails of the noncentral distribution are good to about 1e-9
    assert found.estimate == pytest.approx(again.statistic, rel=1e-8)
    assert (found.lower, found.upper) == pytest.approx(tuple(again.confidence_interval(0.9)), rel=1e-8)
    for null_value in (1.0, 0.3, 4.0):
        null = stats.nchypergeom_fisher(n1 + n2, a + c, n1, null_value)
        above = outcome(fisher_exact(*samples, null_value=null_value, alternative="above"))
        below = outcome(fisher_exact(*samples, null_value=null_value, alternative="below"))
        assert above.p == pytest.approx(null.sf(a - 1), rel=1e-7)
        assert below.p == pytest.approx(null.cdf(a), rel=1e-7)
        assert above.p + below.p == pytest.approx(1 + null.pmf(a), rel=1e-7)
    two_sided = outcome(fisher_exact(*samples, two_sided_by="smaller_probability"))
    assert two_sided.p == pytest.approx(stats.fisher_exact(table).pvalue, rel=1e-10)


def test_counting_all_groupings(outcome: Any) -> None:
    # every way to put 4 of 10 units into the first group is equally likely when the groups do not matter
    events = np.array([1, 1, 1, 1, 1, 0, 0, 0, 0, 0])
    counts = np.array([events[list(chosen)].sum() for chosen in combinations(range(10), 4)])
    for a in range(5):
        above = outcome(fisher_exact(group(a, 4), group(5 - a, 6), alternative="above"))
        assert above.p == pytest.approx(np.mean(counts >= a), rel=1e-13)


def test_far_tail(outcome: Any) -> None:
    # all 600 events in the first group of 600: the one most extreme of C(1200, 600) groupings
    found = outcome(fisher_exact(group(600, 600), group(0, 600), alternative="above"))
    assert found.p == pytest.approx(1 / math.comb(1200, 600), rel=1e-11)
    assert found.p < 1e-300


def test_empty_cells(outcome: Any) -> None:
    none = outcome(fisher_exact(group(0, 8), group(5, 9)))
    assert (none.estimate, none.lower, none.remarks) == (0, 0, (AT_LEAST,))
    # P(no event in the first group) = 2.5 % at the upper end: the mirrored question has the inverse end
    every = outcome(fisher_exact(group(5, 9), group(0, 8)))
    assert (every.estimate, every.upper, every.remarks) == (math.inf, math.inf, (AT_MOST,))
    assert every.lower == pytest.approx(1 / none.upper, rel=1e-12)


def test_two_sided_rules_differ_and_say_so(outcome: Any) -> None:
    samples = group(2, 12), group(15, 18)
    doubled = outcome(fisher_exact(*samples))
    summed = outcome(fisher_exact(*samples, two_sided_by="smaller_probability"))
    assert doubled.p == pytest.approx(2 * outcome(fisher_exact(*samples, alternative="below")).p)
    assert summed.p < doubled.p
    assert summed.remarks == (BY_PROBABILITY,)
    assert outcome(fisher_exact(*samples, alternative="below", two_sided_by="smaller_probability")).remarks == ()


@pytest.mark.parametrize("two_sided_by", ["smaller_tail", "smaller_probability"])
@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
def test_smallest_p_is_attained(alternative: Any, two_sided_by: Any, outcome: Any) -> None:
    settings = {"alternative": alternative, "two_sided_by": two_sided_by}
    smallest = []
    for events in range(1, 11):
        tables = range(max(0, events - 7), min(4, events) + 1)
        ps = [outcome(fisher_exact(group(a, 4), group(events - a, 7), **settings)).p for a in tables]
        smallest.append(min(ps))
        pooled = group(events, 11)
        assert fisher_exact.smallest_p((4, 7), pooled, **settings) == pytest.approx(smallest[-1], rel=1e-12)
    assert fisher_exact.smallest_p((4, 7), None, **settings) == pytest.approx(min(smallest), rel=1e-12)


@pytest.mark.parametrize(
    ("first", "second", "reason"),
    [
        (group(0, 0), group(1, 3), "at least 1 unit of the first group is needed; there are 0 units"),
        (group(0, 4), group(0, 3), "none of the 7 units has the event"),
        (group(4, 4), group(3, 3), "all 7 units have the event"),
    ],
)
def test_no_result(first: NDArray[np.bool_], second: NDArray[np.bool_], reason: str) -> None:
    assert fisher_exact(first, second) == NotComputed(reason, (first.size, second.size))


def test_refused_calls() -> None:
    samples: Any = (group(2, 4), group(1, 4))
    with pytest.raises(ValueError, match="an odds ratio under the null hypothesis is above 0; found 0"):
        fisher_exact(*samples, null_value=0)
    with pytest.raises(ValueError, match="two_sided_by is smaller_tail or smaller_probability; found 'doubled'"):
        fisher_exact(*samples, two_sided_by="doubled")  # type: ignore[arg-type]
    with pytest.raises(ValueError, match="an event has happened or has not"):
        fisher_exact(np.array([0, 2, 1]), samples[1])
