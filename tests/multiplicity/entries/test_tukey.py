"""Tukey's procedure against printed values, base R, scipy and Student's t."""

import numpy as np
import pytest
from multiplicity.contrasts import all_pairs, drawn, groups_of, known, pooled
from scipy import stats

from beforehand.multiplicity.entries.bonferroni import bonferroni
from beforehand.multiplicity.entries.tukey import critical_values, tukey

# rows of these entries name later minus earlier, in the order of all_pairs
ENTRIES = ["tukey-handbook", "tukey-warpbreaks-oneway", "tukey-insectsprays", "tukey-kramer-chickwts"]


@pytest.mark.parametrize("name", ENTRIES)
def test_check_values(name: str) -> None:
    entry, groups = known(name), groups_of(name)
    found = pooled(groups, all_pairs(groups))
    # the entries ask for 1e-5 relative: base R's tail is good to that where p is not tiny, scipy's to 1e-9 absolute
    np.testing.assert_allclose(tukey(found.p, **found.given), entry["expected"]["p"], rtol=1e-5, atol=1e-9)
    reach = critical_values(1 - entry["params"]["level"], **found.given) * found.errors
    np.testing.assert_allclose(found.estimates, entry["expected"]["diff"], rtol=1e-5)
    np.testing.assert_allclose(found.estimates - reach, entry["expected"]["lwr"], rtol=1e-5)
    np.testing.assert_allclose(found.estimates + reach, entry["expected"]["upr"], rtol=1e-5)
    for key, tolerance in entry.get("published_tolerance", {}).items():
        printed = [float(value) for value in entry["published"][key]]
        ends = found.estimates - reach if key == "lwr" else found.estimates + reach
        np.testing.assert_allclose(ends, printed, rtol=0, atol=tolerance)


def test_scipy() -> None:
    # scipy's p is one minus a distribution function that is good to about 1e-11
    for seed in range(4):
        groups = drawn(np.random.default_rng(seed), 4)
        found = pooled(groups, all_pairs(groups))
        again = stats.tukey_hsd(*groups.values())
        names = list(groups)
        p = [again.pvalue[names.index(one), names.index(other)] for one, other in all_pairs(groups)]
        np.testing.assert_allclose(tukey(found.p, **found.given), p, rtol=1e-8, atol=1e-9)
        interval = again.confidence_interval(0.9)
        reach = critical_values(0.1, **found.given) * found.errors
        lower = [interval.low[names.index(one), names.index(other)] for one, other in all_pairs(groups)]
        np.testing.assert_allclose(found.estimates - reach, lower, rtol=1e-7)


def test_never_stricter_than_bonferroni_over_all_pairs() -> None:
    for seed in range(10):
        groups = drawn(np.random.default_rng(seed), 5)
        found = pooled(groups, all_pairs(groups))
        assert np.all(tukey(found.p, **found.given) <= bonferroni(found.p))


def test_some_of_the_pairs_pay_for_all_of_their_groups() -> None:
    groups = drawn(np.random.default_rng(30), 4)
    every = pooled(groups, all_pairs(groups))
    some = pooled(groups, all_pairs(groups)[:3])
    assert some.given["groups"] == 4
    assert np.array_equal(tukey(some.p, **some.given), tukey(every.p, **every.given)[:3])


def test_arithmetic() -> None:
    steps = tukey.steps([0.01], statistics=np.array([-2.9]), df=23.0, groups=4)
    assert list(steps.arithmetic) == ["P(Q > 4.10122), range of 4 groups with 23 df"]
