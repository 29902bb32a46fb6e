"""Means, standard deviations and Student's t, in double precision: what the t-tests share."""

import math
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
from scipy import special

from beforehand.hypothesis_tests.contract import Outcome, Values
from beforehand.hypothesis_tests.sides import Asked


@dataclass(frozen=True)
class Moments:
    """Size, mean and standard deviation (divisor n - 1, 0 for a single value) of one sample, in its unit."""

    n: int
    mean: Fraction
    sd: float

    @property
    def standard_error(self) -> float:
        """The standard error of the mean."""
        return self.sd / math.sqrt(self.n)


def moments(values: Values, rest: Values | float = 0.0) -> Moments:
    """Compute the moments of a sample whatever the offset and the unit of its values.

    The values are first centred at their median: a mean lies within one standard deviation of it (Hotelling and
    Solomons 1932, Annals of Mathematical Statistics 3:141-142), so the sum of squares loses at most one bit. They are
    divided by a power of two, so no square overflows or vanishes.

    Parameters
    ----------
    values : ndarray, shape (n,)
        One value or more, in any unit.
    rest : ndarray, shape (n,), optional
        What rounding took from the values: the sample is values + rest.

    Returns
    -------
    Moments
        The mean to twice double precision: a difference of two means that are nearly equal keeps all its digits.
    """
    centred = (values - np.median(values)) + rest
    scale = math.ldexp(1.0, math.frexp(float(np.abs(centred).max()))[1] - 1)
    scaled = centred / scale if scale else centred
    squares = math.fsum(scaled * scaled) - math.fsum(scaled) ** 2 / values.size
    sd = scale * math.sqrt(max(squares, 0.0) / (values.size - 1)) if values.size > 1 else 0.0
    return Moments(values.size, _mean(values) + _mean(np.broadcast_to(rest, values.shape)), sd)


def moments_of_differences(first: Values, second: Values) -> Moments:
    """Compute the moments of first - second, and lose nothing to the rounding of the differences.

    What a difference of two doubles loses is a double itself (Knuth 1997, The Art of Computer Programming, volume 2,
    section 4.2.2, theorem B).

    Parameters
    ----------
    first, second : ndarray, shape (n,)
        Aligned values of one unit.
    """
    difference = first - second
    taken = difference - first
    rest = (first - (difference - taken)) - (second + taken)
    return moments(difference, rest)


def _mean(values: Values) -> Fraction:
    listed = values.tolist()
    total = math.fsum(listed)
    rest = math.fsum([*listed, -total])
    return (Fraction(total) + Fraction(rest)) / values.size


def t_outcome(
    asked: Asked,
    *,
    estimate: Fraction,
    standard_error: float,
    df: float,
    n: tuple[int, ...],
    remarks: tuple[str, ...] = (),
) -> Outcome:
    """Refer an estimate to Student's t distribution.

    Parameters
    ----------
    asked : Asked
        Null value (unit of the estimate), side and confidence.
    estimate : Fraction
        The mean or the difference of means.
    standard_error : float
        Its standard error, same unit, above 0.
    df : float
        Degrees of freedom, 1 or more, whole or not.

    Returns
    -------
    Outcome
        t = (estimate - null value) / standard error, p, and estimate plus and minus the t quantile times the
        standard error. Each tail is computed as a lower tail, never as 1 - p, so p keeps its digits down to 1e-300.
    """
    t = float(estimate - Fraction(asked.null_value)) / standard_error
    half_width = -float(special.stdtrit(df, asked.tail)) * standard_error
    return Outcome(
        estimate=float(estimate),
        lower=float(estimate - Fraction(half_width)),
        upper=float(estimate + Fraction(half_width)),
        statistic=t,
        df=float(df),
        p=asked.p(above=float(special.stdtr(df, -t)), below=float(special.stdtr(df, t))),
        n=n,
        standard_error=standard_error,
        remarks=remarks,
    )
