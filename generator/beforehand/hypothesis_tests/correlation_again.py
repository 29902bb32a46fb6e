"""The second route of the correlation: exact sums, and r's distribution by Fisher's double integral.

Fisher (1915), Biometrika 10:507-521, gives the density of r as an integral over v. With w = artanh r and β = artanh ρ
it is proportional to

    cosh w · ∫ [cosh(w - β) + cosh β cosh w (cosh v - 1)]^-(n - 1) dv,   v from 0 on.

Nothing here is shared with ``correlation``: no unit vectors, no hypergeometric function, no double exponential rule, no
root finder of scipy.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.student_again import FIFTY_DIGITS

# Panels of 30 Gauss nodes, eight decays long: the integrand has fallen by e^-8 at the end of each.
_GAUSS, _GAUSS_WEIGHTS = np.polynomial.legendre.leggauss(30)
_PANELS, _DECAYS = 10, 8.0
_V_STEPS = 64


@dataclass(frozen=True)
class ExactCorrelation:
    """The correlation of n pairs to 50 digits."""

    n: int
    r: Decimal
    lacks: Decimal
    """1 - r²."""

    @classmethod
    def of(cls, first: Values, second: Values) -> "ExactCorrelation":
        """Sum squares and products as fractions, and take one root."""
        x, y = ([Fraction(value) for value in values.tolist()] for values in (first, second))
        xx, yy, xy = _products(x, x), _products(y, y), _products(x, y)
        squared = xy * xy / (xx * yy)
        root = FIFTY_DIGITS.sqrt(_decimal(squared))
        return cls(len(x), root if xy >= 0 else -root, _decimal(1 - squared))

    @property
    def t(self) -> float:
        """Student's t of the correlation."""
        return float(self.r * FIFTY_DIGITS.sqrt((self.n - 2) / self.lacks))

    @property
    def w(self) -> float:
        """The inverse hyperbolic tangent of r: log((1 + |r|)² / (1 - r²)) / 2 with the sign of r."""
        size = FIFTY_DIGITS.ln((1 + abs(self.r)) ** 2 / self.lacks) / 2
        return float(size if self.r >= 0 else -size)


def _products(x: list[Fraction], y: list[Fraction]) -> Fraction:
    """Add up products of deviations, times n, over one denominator."""
    one, other = max(value.denominator for value in x), max(value.denominator for value in y)
    a = [value.numerator * (one // value.denominator) for value in x]
    b = [value.numerator * (other // value.denominator) for value in y]
    return Fraction(len(a) * sum(p * q for p, q in zip(a, b, strict=True)) - sum(a) * sum(b), one * other)


def _decimal(value: Fraction) -> Decimal:
    return FIFTY_DIGITS.divide(Decimal(value.numerator), Decimal(value.denominator))


def tails(n: int, w: float, beta: float) -> tuple[float, float]:
    """Give P(W >= w) and P(W <= w) around β."""
    away = 1 if w >= beta else -1
    whole = _beyond(n, beta, beta, 1) + _beyond(n, beta, beta, -1)
    begin = math.exp(_log_density(n, np.array([w]), beta)[0] - _log_density(n, np.array([beta]), beta)[0])
    far = begin * _beyond(n, w, beta, away) / whole
    return (far, 1 - far) if away == 1 else (1 - far, far)


def _beyond(n: int, w: float, beta: float, away: int) -> float:
    """Integrate the density from w on, divided by the density at w."""
    length = _DECAYS / ((n - 2) * math.tanh(abs(w - beta)) + math.sqrt(n - 2))
    begin = _log_density(n, np.array([w]), beta)[0]
    total = 0.0
    for panel in range(_PANELS):
        steps = length * (panel + (_GAUSS + 1) / 2)
        fall = np.exp(_log_density(n, w + away * steps, beta) - begin)
        total += length / 2 * float((_GAUSS_WEIGHTS * fall).sum())
    return total


def _log_density(n: int, w: NDArray[np.float64], beta: float) -> NDArray[np.float64]:
    """Give the logarithm of the density but for a constant, by the trapezoidal rule in v.

    v = 2 arsinh(s), so that cosh v - 1 = 2 s²: (1 + k s²)^-(n - 1) with k large is nearly Gaussian in s.
    """
    near = np.cosh(w - beta)
    k = 2 * np.cosh(beta) * np.cosh(w) / near
    u = np.arange(_V_STEPS + 1) * (14.0 / _V_STEPS)  # s √k = sinh u / √(n - 1), so the sum ends where nothing is left
    scaled = np.sinh(u) / math.sqrt(n - 1)
    s = scaled / np.sqrt(k)[:, None]
    terms = np.exp(-(n - 1) * np.log1p(scaled**2)) * np.cosh(u) / np.sqrt(1 + s**2)
    weights = np.where(u == 0, 0.5, 1.0)
    found: NDArray[np.float64] = (
        np.log(np.cosh(w)) - (n - 1) * np.log(near) - np.log(k) / 2 + np.log((weights * terms).sum(axis=1))
    )
    return found


def centre_again(n: int, w: float, tail: float) -> float:
    """Give the β at which P(W >= w) is the tail, by false position on the logarithm of the tail."""
    step = 3 / math.sqrt(n - 2)
    return zero(lambda beta: math.log(tails(n, w, beta)[0] / tail), w - step, w)


def zero(increasing: Callable[[float], float], low: float, high: float) -> float:
    """Find where an increasing function is 0; by the Illinois rule the value at an end that stays is halved."""
    step = high - low
    at_low, at_high = increasing(low), increasing(high)
    while at_low > 0:
        high, at_high, low = low, at_low, low - step
        at_low = increasing(low)
    while at_high < 0:
        low, at_low, high = high, at_high, high + step
        at_high = increasing(high)
    here = low
    for _ in range(200):
        before, here = here, (low * at_high - high * at_low) / (at_high - at_low)
        value = increasing(here)
        if value == 0 or abs(here - before) < 1e-15 * max(1.0, abs(here)):
            break
        if value > 0:
            high, at_high, at_low = here, value, at_low / 2
        else:
            low, at_low, at_high = here, value, at_high / 2
    return here
