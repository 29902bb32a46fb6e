"""Mean absolute deviations from the median, twice: in double precision and in exact fractions."""

import math
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.student import moments
from beforehand.hypothesis_tests.student_again import exact_moments


@dataclass(frozen=True)
class Spread:
    """The mean absolute deviation of one sample, n / (n - 1) times that from its median; and how well it is known.

    ``log_variance`` is the variance of the logarithm of ``size`` (Bonett and Seier 2003): with the median η, the mean
    absolute deviation τ about it and the standard deviation σ, (((μ - η) / τ)² + (σ / τ)² - 1) / n.
    """

    size: float
    log_variance: float


def spread(values: Values) -> Spread:
    """Measure the spread of a sample of two values or more that differ.

    Deviations are taken from a value of the sample in its middle, which loses no digit; the median lies half a step
    above it where the number of values is even.
    """
    n, ordered = values.size, np.sort(values)
    middle = ordered[(n - 1) // 2]
    away = ordered - middle
    median = away[n // 2] / 2 if n % 2 == 0 else 0.0
    deviation = math.fsum(np.abs(away - median)) / n
    scaled = away / deviation
    shift = (math.fsum(scaled) / n - median / deviation) ** 2
    return Spread(deviation * n / (n - 1), (shift + moments(scaled).sd ** 2 - 1) / n)


def exact_spread(values: Values) -> Spread:
    """Measure the same in fractions, rounded once at the end.

    The deviations from the median add up to the sum of the upper half of the sample less that of the lower half.
    """
    ordered, exact = [Fraction(value) for value in np.sort(values).tolist()], exact_moments(values)
    n = exact.n
    median = (ordered[(n - 1) // 2] + ordered[n // 2]) / 2
    deviation = (sum(ordered[(n + 1) // 2 :], Fraction(0)) - sum(ordered[: n // 2], Fraction(0))) / n
    relative = ((exact.mean - median) ** 2 + exact.squares / (n - 1)) / deviation**2 - 1
    return Spread(float(deviation * n / (n - 1)), float(relative / n))
