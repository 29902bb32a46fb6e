"""Moments and Student's t, both routes, against exact arithmetic, scipy and certified digits."""

import math
from fractions import Fraction

import numpy as np
import pytest
from scipy import special, stats

from beforehand.hypothesis_tests.student import moments, moments_of_differences
from beforehand.hypothesis_tests.student_again import exact_moments, exact_moments_of_differences, tails, upper_quantile

# roundings of a square, a sum, a root
LAST_DIGITS = 1e-14


@pytest.mark.parametrize("offset", [0.0, 1.0, 1e6, 1e12])
@pytest.mark.parametrize("scale", [1e-250, 1.0, 1e250])
def test_moments(offset: float, scale: float) -> None:
    values = (np.random.default_rng(21).standard_normal(60) + offset) * scale
    found, exact = moments(values), exact_moments(values)
    # what two doubles hold of the mean: 106 binary digits
    assert abs(found.mean - exact.mean) <= abs(exact.mean) * Fraction(1, 2**100)
    variance = exact.squares / 59 / Fraction(scale) ** 2
    assert found.sd / scale == pytest.approx(math.sqrt(variance), rel=LAST_DIGITS)


def test_moments_of_a_far_outlier() -> None:
    values = np.append(np.random.default_rng(22).standard_normal(30), 1e15)
    exact = exact_moments(values)
    assert moments(values).sd == pytest.approx(math.sqrt(exact.squares / 30), rel=LAST_DIGITS)


def test_moments_of_one_value() -> None:
    assert moments(np.array([3.5])) == moments(np.array([3.5, 3.5][:1]))
    assert (moments(np.array([3.5])).mean, moments(np.array([3.5])).sd) == (Fraction(7, 2), 0)


def test_moments_of_differences() -> None:
    random = np.random.default_rng(23)
    first, second = random.standard_normal(40) * 1e9, random.standard_normal(40)
    exact = exact_moments_of_differences(first, second)
    found = moments_of_differences(first, second)
    assert abs(found.mean - exact.mean) <= abs(exact.mean) * Fraction(1, 2**100)
    assert found.sd == pytest.approx(math.sqrt(exact.squares / 39), rel=LAST_DIGITS)


@pytest.mark.parametrize("df", [1.0, 1.37, 2.0, 7.5, 40.0, 1e3, 1e6])
def test_tails_by_quadrature(df: float) -> None:
    for t in (0.0, 1e-12, 0.3, 1.0, 2.5, 12.0, 1e4):
        expected = special.stdtr(df, -t)
        if expected > 1e-290:
            # the exponent of the density has a rounding error of 1e-16 of itself, up to 700
            assert tails(t, df)[0] == pytest.approx(expected, rel=3e-13)
            assert tails(-t, df)[1] == pytest.approx(expected, rel=3e-13)
        assert sum(tails(t, df)) == pytest.approx(1, rel=1e-13)


@pytest.mark.parametrize("df", [1.0, 2.6, 30.0, 1e6])
@pytest.mark.parametrize("tail", [1e-15, 1e-6, 0.025, 0.3, 0.4999])
def test_quantiles_by_newton(df: float, tail: float) -> None:
    assert upper_quantile(tail, df) == pytest.approx(stats.t.isf(tail, df), rel=1e-11)


def test_printed_quantiles() -> None:
    # Student's t, table of the upper 2.5 % points (any textbook; from memory)
    printed = {1: 12.706, 2: 4.303, 5: 2.571, 10: 2.228, 30: 2.042, 120: 1.980}
    for df, value in printed.items():
        assert upper_quantile(0.025, df) == pytest.approx(value, abs=0.0005)
