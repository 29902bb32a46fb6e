"""Combined p-values against printed values, scipy, and the worst dependence."""

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from scipy.optimize import brentq
from scipy.stats import cauchy as cauchy_distribution
from scipy.stats import combine_pvalues

from beforehand.multiplicity import combination
from beforehand.multiplicity.combination import (
    Combined,
    bonferroni,
    cauchy,
    fisher,
    harmonic_factor,
    harmonic_mean,
    simes,
    stouffer,
)
from beforehand.multiplicity.contract import Ordered
from beforehand.multiplicity.entries.benjamini_hochberg import benjamini_hochberg

ALL: list[Callable[..., Combined]] = [fisher, stouffer, simes, bonferroni, cauchy, harmonic_mean]


@pytest.mark.parametrize("name", ["combine-fisher-doc-4", "combine-fisher-3"])
def test_fisher(name: str, entry: Any) -> None:
    known = entry("combination", name)
    found = fisher(known["inputs"]["p"])
    assert found.statistic == pytest.approx(known["expected"]["statistic"], abs=1e-12)
    assert found.p == pytest.approx(known["expected"]["p"], abs=1e-12)


def test_fishers_own_example(entry: Any) -> None:
    known = entry("combination", "combine-fisher-1932")
    assert fisher(known["inputs"]["p"]).statistic == pytest.approx(known["expected"]["statistic"], abs=0.001)


@pytest.mark.parametrize("name", ["combine-stouffer-weighted-doc-4", "combine-stouffer-weighted-3"])
def test_stouffer(name: str, entry: Any) -> None:
    known = entry("combination", name)
    found = stouffer(known["inputs"]["p"], weights=known["params"]["weights"])
    assert found.p == pytest.approx(known["expected"]["p"], abs=1e-12)
    assert found.statistic == pytest.approx(known["expected"].get("statistic", found.statistic), abs=1e-12)


def test_five_p_values(entry: Any) -> None:
    known = entry("combination", "combine-becker-1994")
    p, expected = known["inputs"]["p"], known["expected"]
    for found, value in (
        (fisher(p).statistic, expected["fisher_statistic"]),
        (fisher(p).p, expected["fisher_p"]),
        (stouffer(p).statistic, expected["stouffer_z"]),
        (stouffer(p).p, expected["stouffer_p"]),
    ):
        assert found == pytest.approx(value, **known["tolerance"])


def test_simes(entry: Any) -> None:
    known = entry("combination", "bh95-simes-global")
    p = known["inputs"]["p"]
    assert simes(p).p == pytest.approx(known["expected"]["p_global"], abs=1e-12)
    assert simes(p).p == benjamini_hochberg(p).min()


def test_equal_p_values_combine_to_themselves_by_cauchy(entry: Any) -> None:
    known = entry("combination", "combine-cauchy-equal")
    assert cauchy(known["inputs"]["p"]).p == pytest.approx(known["expected"]["p"], abs=1e-12)
    assert cauchy([1e-250] * 3).p == pytest.approx(1e-250, rel=1e-14)


@pytest.mark.parametrize("seed", range(10))
def test_scipy(seed: int) -> None:
    random = np.random.default_rng(seed)
    p, weights = random.random(20), random.random(20) + 0.1
    assert fisher(p).p == pytest.approx(combine_pvalues(p, method="fisher").pvalue, rel=1e-12)
    theirs = combine_pvalues(p, method="stouffer", weights=weights)
    assert stouffer(p, weights=weights).p == pytest.approx(theirs.pvalue, rel=1e-11)
    quantiles = np.average(cauchy_distribution.isf(p), weights=weights)
    assert cauchy(p, weights=weights).p == pytest.approx(cauchy_distribution.sf(quantiles), rel=1e-10)


def worst_dependence(m: int) -> float:
    """Give the factor by the worst value at risk of a sum of m values 1 / p (Wang, Peng & Yang 2013; from memory).

    With all tails joined as far as can be, the sum exceeds m h(x) / a with probability a, where h is the mean of 1 / p
    over the middle of the tail, equal to that over its two ends; x is the part that each end takes.
    """

    def ends(x: float) -> float:
        return (m - 1) / (m * (1 - (m - 1) * x)) + 1 / (m * x)

    def middle(x: float) -> float:
        return float(np.log((1 - (m - 1) * x) / x) / (1 - m * x))

    x = brentq(lambda x: middle(x) - ends(x), 1e-9 / m, (1 - 1e-4) / m, xtol=1e-18)
    return ends(x)


@pytest.mark.parametrize("m", [3, 4, 10, 100, 10_000])
def test_the_factor_of_the_harmonic_mean(m: int) -> None:
    assert harmonic_factor(m) == pytest.approx(worst_dependence(m), rel=1e-7)


def test_the_factor_is_near_the_logarithm() -> None:
    # Vovk & Wang (2020): log m asymptotically, and at most e log m
    assert harmonic_factor(10**9) / np.log(10**9) == pytest.approx(1, abs=0.25)
    for m in (3, 10, 1000):
        assert harmonic_factor(m) <= np.e * np.log(m)
    assert (harmonic_factor(1), harmonic_factor(2)) == (1, 2)


def test_two_need_their_factor() -> None:
    # two p-values that share a tail: (u, a - u) with u uniform below a, and anything else outside. Then one is below
    # a with probability a, and the harmonic mean is at most a / 2 each time: less than the factor 2 would err
    a = 0.05
    combined = [harmonic_mean([u, a - u]).p for u in np.linspace(0, a, 101)]
    assert max(combined) == pytest.approx(a, rel=1e-14)


@pytest.mark.parametrize("combine", ALL)
def test_what_all_have_in_common(combine: Callable[..., Combined]) -> None:
    for seed in range(20):
        p = np.random.default_rng(seed).random(9) ** 3
        found = combine(p)
        assert 0 <= found.p <= 1
        assert combine(p[::-1]).p == pytest.approx(found.p, rel=1e-12)
        assert combine(np.minimum(p * 1.5, 1)).p >= found.p
        assert found.valid_under
        assert found.null == combination.ALL_TRUE
    assert combine([0.0, 0.5]).p == 0
    assert combine([0.3]).p == pytest.approx(0.3, rel=1e-14)
    for wrong in ([], [0.1, float("nan")], [1.1]):
        with pytest.raises(ValueError, match=r"no p-value|between 0 and 1"):
            combine(wrong)


@pytest.mark.parametrize("combine", [fisher, simes, bonferroni, harmonic_mean])
def test_a_sort_is_shared(combine: Callable[..., Combined]) -> None:
    p = np.random.default_rng(7).random(9)
    assert combine(Ordered.of(p)) == combine(p)


@pytest.mark.parametrize("combine", [stouffer, cauchy])
def test_what_has_no_sum_is_refused(combine: Callable[..., Combined]) -> None:
    assert combine([0.2, 1.0]).p == 1
    with pytest.raises(ValueError, match="a p of 0 and a p of 1"):
        combine([0.0, 0.3, 1.0])
    for weights in ([1, 0], [1, -1], [1], [1, float("inf")]):
        with pytest.raises(ValueError, match="2 positive numbers"):
            combine([0.1, 0.2], weights=weights)
