"""Logarithms of positive values whatever their unit, in double precision and in 50-digit decimals."""

import math
from decimal import Decimal
from fractions import Fraction

import numpy as np

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.student_again import FIFTY_DIGITS, ExactMoments

# A unit for decimals rounded to whole numbers: more places than a double has digits.
PLACES = 45


def logarithms(values: Values, centre: float) -> Values:
    """Give log(value / centre), each to its own last digit.

    Near the centre the logarithm is that of 1 + a difference, so values that differ in their last digits only keep
    their distances; farther away mantissa and exponent are taken apart, so no quotient over- or underflows, and another
    unit (a power of two) changes nothing.

    Parameters
    ----------
    values : ndarray, shape (n,)
        Values above 0.
    centre : float
        A value of about their size.
    """
    mantissa, exponent = np.frexp(values)
    middle, power = math.frexp(centre)
    far = np.log(mantissa / middle) + (exponent - power) * math.log(2)
    is_near = (values > centre / 2) & (values < 2 * centre)
    return np.where(is_near, np.log1p((np.where(is_near, values, centre) - centre) / centre), far)


def exact_log_moments(values: Values) -> ExactMoments:
    """Give the moments of natural logarithms that are good to 45 decimal places, summed as whole numbers."""
    unit = Decimal(10**PLACES)
    whole = [int(FIFTY_DIGITS.multiply(FIFTY_DIGITS.ln(Decimal(value)), unit)) for value in values.tolist()]
    n, total = len(whole), sum(whole)
    squares = n * sum(number * number for number in whole) - total * total
    return ExactMoments(n, Fraction(total, n * 10**PLACES), Fraction(squares, n * 10 ** (2 * PLACES)))
