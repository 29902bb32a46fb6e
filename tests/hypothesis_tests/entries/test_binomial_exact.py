"""The exact binomial test against printed values, base R, scipy and counting."""

import math
from itertools import product
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.binomial_exact import BY_PROBABILITY, binomial_exact


def sample(events: int, size: int) -> NDArray[np.bool_]:
    return np.arange(size) < events


def test_peas(reference: Any, outcome: Any) -> None:
    peas = reference("binom-conover")
    values = sample(peas.entry["data"]["x"], peas.entry["data"]["n"])
    found = outcome(binomial_exact(values, null_value=0.75, two_sided_by="smaller_probability"))
    assert peas.agrees("p_hat", found.estimate)
    assert peas.agrees("p_two", found.p)
    for place, end in enumerate((found.lower, found.upper)):
        assert peas.agrees("ci95_cp", end, place)


@pytest.mark.parametrize("name", ["prop1-newcombe-0-20", "prop1-newcombe-1-29"])
def test_printed_intervals(name: str, reference: Any, outcome: Any) -> None:
    one = reference(name)
    found = outcome(binomial_exact(sample(one.entry["data"]["x"], one.entry["data"]["n"])))
    for place, end in enumerate((found.lower, found.upper)):
        assert one.agrees("clopper_pearson", end, place)


def test_thirteen_of_sixteen(outcome: Any) -> None:
    # R package contingencytables (ocbe-uio/contingencytables @0b16d6d5), tests/testthat/test-ch2.R, read there
    found = outcome(binomial_exact(sample(13, 16)))
    assert (round(found.lower, 4), round(found.upper, 4)) == (0.5435, 0.9595)
    assert round(found.p, 5) == 0.02127


def test_base_r(r_case: Any) -> None:
    # both by the incomplete beta function, to about 1e-13
    found = r_case.result()
    for name, value in r_case.found.items():
        assert getattr(found, name) == pytest.approx(value, rel=1e-10), name


@pytest.mark.parametrize("seed", range(12))
def test_scipy(seed: int, outcome: Any) -> None:
    random = np.random.default_rng(seed)
    n = int(random.integers(1, 60))
    events, null = int(random.integers(0, n + 1)), float(random.uniform(0.05, 0.95))
    sides: Any = (("above", "greater"), ("below", "less"))
    for ours, theirs in sides:
        found = outcome(binomial_exact(sample(events, n), null_value=null, alternative=ours))
        assert found.p == pytest.approx(stats.binomtest(events, n, null, theirs).pvalue, rel=1e-11)
    again = stats.binomtest(events, n, null)
    summed = outcome(binomial_exact(sample(events, n), null_value=null, two_sided_by="smaller_probability"))
    assert summed.p == pytest.approx(again.pvalue, rel=1e-10)
    found = outcome(binomial_exact(sample(events, n), confidence=0.9))
    # theirs finds the ends by a root finder to about 2e-12
    assert (found.lower, found.upper) == pytest.approx(tuple(again.proportion_ci(0.9)), abs=1e-11)


def test_counting_all_sequences(outcome: Any) -> None:
    # each of the 2^10 sequences with probability share^events × rest^others
    share, counts = 0.3, np.array([sum(sequence) for sequence in product((0, 1), repeat=10)])
    chance = share**counts * (1 - share) ** (10 - counts)
    for events in range(11):
        above = outcome(binomial_exact(sample(events, 10), null_value=share, alternative="above"))
        below = outcome(binomial_exact(sample(events, 10), null_value=share, alternative="below"))
        assert above.p == pytest.approx(chance[counts >= events].sum(), rel=1e-12)
        assert below.p == pytest.approx(chance[counts <= events].sum(), rel=1e-12)


def test_ends_by_hand(outcome: Any) -> None:
    # no event of n: the upper end solves (1 - share)^n = 2.5 %; all of n: the lower one share^n = 2.5 %
    none, every = outcome(binomial_exact(sample(0, 40))), outcome(binomial_exact(sample(40, 40)))
    assert (none.lower, every.upper) == (0, 1)
    assert none.upper == pytest.approx(1 - 0.025 ** (1 / 40), rel=1e-13)
    assert every.lower == pytest.approx(0.025 ** (1 / 40), rel=1e-13)


def test_far_tail(outcome: Any) -> None:
    found = outcome(binomial_exact(sample(900, 900), alternative="above"))
    assert math.log2(found.p) == pytest.approx(-900, rel=1e-13)
    rare = outcome(binomial_exact(sample(3, 10**6), null_value=1e-7, alternative="above"))
    # P(X >= 3) of a Poisson variable with mean 0.1, to the difference of the two distributions, about n share²
    assert rare.p == pytest.approx(stats.poisson.sf(2, 0.1), rel=1e-5)


def test_two_sided_rules_differ_and_say_so(outcome: Any) -> None:
    doubled = outcome(binomial_exact(sample(3, 9), null_value=0.1))
    summed = outcome(binomial_exact(sample(3, 9), null_value=0.1, two_sided_by="smaller_probability"))
    assert doubled.p == pytest.approx(2 * stats.binom.sf(2, 9, 0.1), rel=1e-12)
    assert summed.p == pytest.approx(stats.binom.sf(2, 9, 0.1), rel=1e-12)
    assert (doubled.remarks, summed.remarks) == ((), (BY_PROBABILITY,))


@pytest.mark.parametrize("two_sided_by", ["smaller_tail", "smaller_probability"])
@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
@pytest.mark.parametrize("null", [0.5, 0.03])
def test_smallest_p_is_attained(alternative: Any, two_sided_by: Any, null: float, outcome: Any) -> None:
    settings: Any = {"alternative": alternative, "two_sided_by": two_sided_by, "null_value": null}
    found = [outcome(binomial_exact(sample(events, 7), **settings)).p for events in range(8)]
    for pooled in (None, sample(3, 7)):
        assert binomial_exact.smallest_p((7,), pooled, **settings) == pytest.approx(min(found), rel=1e-12)
    assert binomial_exact.smallest_p((7,), None, alternative=alternative) == 0  # not known without the null value


def test_no_result() -> None:
    assert binomial_exact(sample(0, 0)) == NotComputed("at least 1 unit is needed; there are 0 units", (0,))


def test_refused_calls() -> None:
    for null in (0.0, 1.0, 50.0):
        with pytest.raises(ValueError, match="a share under the null hypothesis lies between 0 and 1; found"):
            binomial_exact(sample(1, 4), null_value=null)
    with pytest.raises(ValueError, match="two_sided_by is smaller_tail or smaller_probability; found 'doubled'"):
        binomial_exact(sample(1, 4), two_sided_by="doubled")  # type: ignore[arg-type]
