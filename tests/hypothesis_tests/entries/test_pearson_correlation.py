"""Pearson's correlation against printed values, scipy, and two other ways to its exact distribution."""

import math
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import integrate, stats

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.pearson_correlation import pearson_correlation


def test_judges(reference: Any, outcome: Any) -> None:
    judges = reference("cor-judge")
    columns = judges.data("CONT"), judges.data("INTG")
    found = outcome(pearson_correlation(*columns))
    for name, value in {"r": found.estimate, "t": found.statistic, "df": found.df, "p": found.p}.items():
        assert judges.agrees(name, value), name
    by_z = outcome(pearson_correlation(*columns, method="fisher_z"))
    for place, end in enumerate((by_z.lower, by_z.upper)):
        assert judges.agrees("ci95", end, place)
    # 43 pairs: both intervals lie near each other
    assert (found.lower, found.upper) == pytest.approx((by_z.lower, by_z.upper), abs=0.005)


def columns(seed: int, n: int, rho: float) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    random = np.random.default_rng(seed)
    x = random.normal(0, 1, n)
    return x, rho * x + math.sqrt(1 - rho**2) * random.normal(0, 1, n)


@pytest.mark.parametrize("n", [3, 4, 7, 40, 900])
def test_scipy(n: int, outcome: Any) -> None:
    for rho in (-0.8, 0.1, 0.6):
        x, y = columns(n, n, rho)
        for ours, theirs in (("above", "greater"), ("below", "less"), ("two_sided", "two-sided")):
            again = stats.pearsonr(x, y, alternative=theirs)
            found = outcome(pearson_correlation(x, y, alternative=ours))
            assert (found.estimate, found.p) == pytest.approx((again.statistic, again.pvalue), rel=1e-9)
        if n > 3:
            by_z = outcome(pearson_correlation(x, y, method="fisher_z", confidence=0.9))
            assert (by_z.lower, by_z.upper) == pytest.approx(tuple(again.confidence_interval(0.9)), rel=1e-9)


def mixture(n: int, r: float, rho: float) -> float:
    """P(R >= r): given the length of one column, r / √(1 - r²) is noncentral t, the noncentrality a scaled chi."""
    t, shift = r / math.sqrt(1 - r * r) * math.sqrt(n - 2), rho / math.sqrt(1 - rho * rho)
    length, middle = stats.chi(n - 1), math.sqrt(n - 1)
    ends = max(0.0, middle - 8), middle + 8
    found = integrate.quad(lambda u: length.pdf(u) * stats.nct.sf(t, n - 2, shift * u), *ends, epsrel=1e-11, limit=200)
    return float(found[0])


@pytest.mark.parametrize(("n", "rho"), [(3, 0.4), (5, 0.2), (8, 0.9), (10, -0.3), (30, -0.2), (30, 0.7)])
def test_the_exact_distribution_is_a_mixture_of_noncentral_t(n: int, rho: float, outcome: Any) -> None:
    x, y = columns(n + 7, n, rho / 2)
    found = outcome(pearson_correlation(x, y, null_value=rho, alternative="above"))
    assert found.p == pytest.approx(mixture(n, found.estimate, rho), rel=1e-9)
    # and the ends of the interval are where it gives 5 %
    ends = outcome(pearson_correlation(x, y, confidence=0.9))
    assert mixture(n, ends.estimate, ends.lower) == pytest.approx(0.05, rel=1e-8)
    assert mixture(n, ends.estimate, ends.upper) == pytest.approx(0.95, rel=1e-8)


def test_it_covers(outcome: Any) -> None:
    # 200 samples of 6 pairs with ρ = 0.7: p at the truth is uniform; the largest gap of a true uniform sample stays
    # under 1.95 / √200 in 999 of 1000 samples (Kolmogorov)
    p = np.array(
        [outcome(pearson_correlation(*columns(s, 6, 0.7), null_value=0.7, alternative="above")).p for s in range(200)]
    )
    assert stats.kstest(p, "uniform").statistic < 1.95 / math.sqrt(200)


def test_a_common_offset_and_other_units_change_nothing(outcome: Any) -> None:
    x, y = (np.round(one * 8) / 8 for one in columns(3, 20, 0.5))
    here = outcome(pearson_correlation(x, y, null_value=0.2))
    for moved in ((x + 2.0**40, y), (x, y * 2.0**-600), (x * 2.0**500, y + 1e6)):
        there = outcome(pearson_correlation(*moved, null_value=0.2))
        assert (there.estimate, there.p, there.lower) == pytest.approx((here.estimate, here.p, here.lower), rel=1e-12)


def test_nearly_straight_lines_keep_their_digits(outcome: Any) -> None:
    x = np.arange(30.0)
    y = x + 1e-4 * np.cos(x)
    first, again = (ask(x, y, null_value=0.99, alternative="above") for ask in
                    (pearson_correlation, pearson_correlation.again))  # fmt: skip
    assert 1e-12 < 1 - outcome(first).estimate < 1e-9
    for number in ("estimate", "lower", "upper", "p", "statistic"):
        assert getattr(outcome(first), number) == pytest.approx(getattr(outcome(again), number), rel=1e-9)


@pytest.mark.parametrize(
    ("first", "second", "method", "reason"),
    [
        ([1.0, 2.0], [1.0, 3.0], "exact", "at least 3 rows are needed; there are 2 rows"),
        ([1.0, 2.0, 4.0], [1.0, 3.0, 1.0], "fisher_z", "at least 4 rows are needed; there are 3 rows"),
        ([3.0] * 5, [1.0, 2.0, 3.0, 4.0, 6.0], "exact", "all 5 values of the first column are equal"),
        (
            [0.1, 0.2, 0.3, 0.4],
            [-1.0, -2.0, -3.0, -4.0],
            "exact",
            "the two columns are one straight line, up to rounding: one says what the other says",
        ),
    ],
)
def test_no_result(first: list[float], second: list[float], method: Any, reason: str) -> None:
    samples = np.array(first), np.array(second)
    assert pearson_correlation(*samples, method=method) == NotComputed(reason, (len(first),))
    assert pearson_correlation.again(*samples, method=method) == NotComputed(reason, (len(first),))


def test_refused_calls() -> None:
    samples = columns(1, 9, 0.3)
    with pytest.raises(ValueError, match="a correlation under the null hypothesis lies between -1 and 1; found 1"):
        pearson_correlation(*samples, null_value=1.0)
    with pytest.raises(ValueError, match="method is exact or fisher_z; found 'fisher'"):
        pearson_correlation(*samples, method="fisher")  # type: ignore[arg-type]
    with pytest.raises(ValueError, match="pairs have two values each; found 9 and 8 values"):
        pearson_correlation(samples[0], samples[1][1:])
