"""The second route of the t-tests: exact sums, 50-digit roots, and Student's t by quadrature of its density.

Nothing here is shared with ``student``: no centring, no special function of scipy, no quantile function. The level of
each side is read by ``sides``.
"""

import math
from dataclasses import dataclass
from decimal import Context, Decimal
from fractions import Fraction

import numpy as np

from beforehand.hypothesis_tests.contract import Outcome, Values
from beforehand.hypothesis_tests.sides import Asked

FIFTY_DIGITS = Context(prec=50, Emin=-(10**8), Emax=10**8)

# Nodes of the double exponential rule: u = exp(pi/2 sinh s) at equal steps of s (Takahasi and Mori 1974,
# Publications of the Research Institute for Mathematical Sciences 9:721-741). With df = 1 the integrand has fallen to
# 1e-18 at s = 4; halving the step changes no tail by more than 1e-14 of itself.
_S = np.arange(-72, 73) / 16
_NODES = np.exp(np.pi / 2 * np.sinh(_S))
_WEIGHTS = np.pi / 32 * np.cosh(_S) * _NODES


@dataclass(frozen=True)
class ExactMoments:
    """Size, mean and sum of squared deviations of one sample, without any rounding."""

    n: int
    mean: Fraction
    squares: Fraction

    @property
    def variance_of_mean(self) -> Fraction:
        """The squared standard error of the mean."""
        return self.squares / (self.n * (self.n - 1))


def exact_moments(values: Values) -> ExactMoments:
    """Sum values and their squares as whole numbers over a common power of two.

    Parameters
    ----------
    values : ndarray, shape (n,)
        One value or more, in any unit; each double is a fraction with a power of two below the line.
    """
    return _exact([Fraction(value) for value in values.tolist()])


def exact_moments_of_differences(first: Values, second: Values) -> ExactMoments:
    """Do the same for first - second, two aligned samples of one unit."""
    pairs = zip(first.tolist(), second.tolist(), strict=True)
    return _exact([Fraction(one) - Fraction(other) for one, other in pairs])


def _exact(values: list[Fraction]) -> ExactMoments:
    below = max(value.denominator for value in values)
    whole = [value.numerator * (below // value.denominator) for value in values]
    n, total = len(whole), sum(whole)
    squares = n * sum(number * number for number in whole) - total * total
    return ExactMoments(n, Fraction(total, n * below), Fraction(squares, n * below * below))


def _log_kernel(t: float, df: float) -> float:
    return -(df + 1) / 2 * math.log1p(t * t / df)


def _relative_tail(t: float, df: float) -> float:
    """Integrate the density above t, divided by the density at t."""
    width = (df + t * t) / ((df + 1) * max(t, 1.0))  # the distance on which the density falls by a factor e
    step = width * _NODES
    fall = np.log1p(step * (2 * t + step) / (df + t * t))
    return float(width * (_WEIGHTS * np.exp(-(df + 1) / 2 * fall)).sum())


def log_upper_tail(t: float, df: float) -> float:
    """Give the logarithm of P(T >= t) for t >= 0, by quadrature; the constant of the density is a quadrature too."""
    return _log_kernel(t, df) + math.log(_relative_tail(t, df)) - math.log(2 * _relative_tail(0.0, df))


def tails(t: float, df: float) -> tuple[float, float]:
    """Give P(T >= t) and P(T <= t)."""
    far = math.exp(log_upper_tail(abs(t), df))
    return (far, 1 - far) if t >= 0 else (1 - far, far)


def upper_quantile(tail: float, df: float) -> float:
    """Solve P(T >= q) = tail for a tail below 1/2, by Newton's method in log q.

    log |T| has a log-concave density, so log P is concave in log q: the first step may cross the solution, every later
    one approaches it from the right.
    """
    log_q = 0.0
    for _ in range(200):
        q = math.exp(log_q)
        slope = -q / _relative_tail(q, df)
        step = (math.log(tail) - log_upper_tail(q, df)) / slope
        log_q += step
        if abs(step) < 1e-14:
            break
    return math.exp(log_q)


def t_outcome_again(
    asked: Asked,
    *,
    estimate: Fraction,
    squared_error: Fraction,
    df: Fraction,
    n: tuple[int, ...],
    remarks: tuple[str, ...] = (),
) -> Outcome:
    """Refer an exact estimate with its exact squared standard error to Student's t distribution."""
    error = FIFTY_DIGITS.sqrt(_decimal(squared_error))
    t = float(FIFTY_DIGITS.divide(_decimal(estimate - Fraction(asked.null_value)), error))
    above, below = tails(t, float(df))
    half_width = FIFTY_DIGITS.multiply(Decimal(upper_quantile(asked.tail, float(df))), error)
    two_sided = min(1.0, 2 * (above if t > 0 else below))
    return Outcome(
        estimate=float(estimate),
        lower=float(FIFTY_DIGITS.subtract(_decimal(estimate), half_width)),
        upper=float(FIFTY_DIGITS.add(_decimal(estimate), half_width)),
        statistic=t,
        df=float(df),
        p={"above": above, "below": below, "two_sided": two_sided}[asked.alternative],
        n=n,
        standard_error=float(error),
        remarks=remarks,
    )


def _decimal(value: Fraction) -> Decimal:
    return FIFTY_DIGITS.divide(Decimal(value.numerator), Decimal(value.denominator))
