"""The correlation of two columns, and the exact distribution of r in samples from a bivariate normal distribution.

On the scale w = artanh r, with β = artanh ρ, the density of r (Hotelling 1953, Journal of the Royal Statistical Society
B 15:193-232, equation 25) is proportional to

    √cosh w · cosh(w - β)^-(n - 3/2) · F(1/2, 1/2; n - 1/2; (1 + tanh β tanh w) / 2):

a bell around β. Its tails are integrated relative to their beginning, so small ones keep their digits.
"""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy import optimize, special

from beforehand.hypothesis_tests.contract import Values

# Nodes of the double exponential rule: u = exp(π/2 sinh s) at equal steps of s (Takahasi and Mori 1974, Publications of
# the Research Institute for Mathematical Sciences 9:721-741); halving the step changes no tail by more than 1e-13.
_S = np.arange(-60, 61) / 16
_NODES = np.exp(np.pi / 2 * np.sinh(_S))
_WEIGHTS = np.pi / 32 * np.cosh(_S) * _NODES


@dataclass(frozen=True)
class Correlation:
    """The correlation r of n pairs, and how much it lacks to 1 and to -1, each to its own last digit."""

    n: int
    below_one: float
    above_minus_one: float

    @classmethod
    def of(cls, first: Values, second: Values) -> "Correlation":
        """Correlate two columns, neither of them constant: from the sum and the difference of unit vectors."""
        x, y = _unit(first), _unit(second)
        return cls(x.size, math.fsum((x - y) ** 2) / 2, math.fsum((x + y) ** 2) / 2)

    @property
    def r(self) -> float:
        """The correlation."""
        return (self.above_minus_one - self.below_one) / 2

    @property
    def t(self) -> float:
        """Student's t of the correlation."""
        return self.r * math.sqrt((self.n - 2) / (self.below_one * self.above_minus_one))

    @property
    def w(self) -> float:
        """The inverse hyperbolic tangent of r."""
        return math.log(self.above_minus_one / self.below_one) / 2


def _unit(values: Values) -> Values:
    centred = values - np.median(values)
    centred = centred / math.ldexp(1.0, math.frexp(float(np.abs(centred).max()))[1])
    centred = centred - math.fsum(centred) / centred.size
    unit: Values = centred / math.sqrt(math.fsum(centred * centred))
    return unit


@dataclass(frozen=True)
class Bell:
    """The exact distribution of w in samples of n pairs, around β."""

    n: int
    beta: float

    def above(self, w: float) -> float:
        """Give P(W >= w)."""
        far = self._tail(w, away=1 if w >= self.beta else -1)
        return far if w >= self.beta else 1 - far

    def below(self, w: float) -> float:
        """Give P(W <= w)."""
        return Bell(self.n, -self.beta).above(-w)

    def _tail(self, w: float, *, away: int) -> float:
        """Give the probability beyond w, seen from the centre."""
        whole = self._beyond(self.beta, 1) + self._beyond(self.beta, -1)
        begin = float(self._log_density(np.array([w]), w)[0]) - float(self._log_density(np.array([self.beta]), w)[0])
        return math.exp(begin) * self._beyond(w, away) / whole

    def _beyond(self, w: float, away: int) -> float:
        """Integrate the density from w on, divided by the density at w."""
        steepness = (self.n - 1.5) * math.tanh(abs(w - self.beta)) + math.sqrt(self.n)
        steps = _NODES / steepness
        begin = self._log_density(np.array([w]), w)[0]
        fall = self._log_density(w + away * steps, w) - begin
        return float((_WEIGHTS * np.exp(fall)).sum() / steepness)

    def _log_density(self, w: Values, about: float) -> Values:
        """Give the logarithm of the density, but for a constant."""
        squared = special.hyp2f1(0.5, 0.5, self.n - 0.5, (1 + math.tanh(self.beta) * np.tanh(w)) / 2)
        found: Values = _log_cosh(w) / 2 - (self.n - 1.5) * _log_cosh(w - self.beta) + np.log(squared)
        return found


def _log_cosh(x: NDArray[np.float64]) -> NDArray[np.float64]:
    small = np.minimum(np.abs(x), 1.0)
    near = np.log1p(2 * np.sinh(small / 2) ** 2)
    far = np.abs(x) + np.log1p(np.exp(-2 * np.abs(x))) - math.log(2)
    found: Values = np.where(np.abs(x) < 1, near, far)
    return found


def centre_at(n: int, w: float, tail: float) -> float:
    """Give the β at which P(W >= w) is the tail."""
    width = 4 / math.sqrt(n - 2)

    def excess(beta: float) -> float:
        return math.log(Bell(n, beta).above(w)) - math.log(tail)

    low, high = w - width, w
    while excess(low) > 0:
        low -= width
    while excess(high) < 0:
        high += width
    return float(optimize.brentq(excess, low, high, xtol=1e-14, rtol=1e-15))
