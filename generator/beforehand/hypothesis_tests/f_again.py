"""The second route of the F distribution: quadrature of its density on the logarithmic scale.

The density of log F with d1 and d2 degrees of freedom is proportional to F^(d1/2) / (d2 + d1 F)^((d1 + d2)/2). It has
one peak, at F = 1, and its logarithm is concave. No beta function and no inverse of one is used.
"""

import math
from dataclasses import dataclass

import numpy as np

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.location import Tails

# Nodes of the double exponential rule: s = exp(pi/2 sinh x) at equal steps of x (Takahasi and Mori 1974, Publications
# of the Research Institute for Mathematical Sciences 9:721-741); halving the step changes no tail by 1e-13 of itself.
_X = np.arange(-96, 97) / 24
_NODES = np.exp(np.pi / 2 * np.sinh(_X))
_WEIGHTS = np.pi / 48 * np.cosh(_X) * _NODES
LARGE = 30.0  # from here on exp s is so large that 1 beside it changes no digit


@dataclass(frozen=True)
class LogF:
    """The distribution of the logarithm of F with d1 and d2 degrees of freedom."""

    d1: float
    d2: float

    def tails(self, log_f: float) -> Tails:
        """Give P(log F >= log_f) and P(log F <= log_f)."""
        if log_f >= 0:  # F = 1 is the peak of the density of log F
            above = math.exp(self._log_upper(log_f))
            return Tails(above=above, below=1 - above)
        below = math.exp(self._mirrored._log_upper(-log_f))
        return Tails(above=1 - below, below=below)

    def upper_quantile(self, tail: float) -> float:
        """Solve P(log F >= q) = tail, by Newton's method.

        The logarithm of P is concave in q: the first step may cross the solution, every later one approaches it from
        the right.
        """
        q = 0.0
        for _ in range(200):
            log_above = self._log_upper(q) if q >= 0 else math.log1p(-self.tails(q).below)
            step = (log_above - math.log(tail)) * math.exp(log_above - self._log_density(q))
            q += step
            if abs(step) <= 1e-15 * abs(q):
                break
        return q

    @property
    def _mirrored(self) -> "LogF":
        return LogF(self.d2, self.d1)

    def _log_upper(self, log_f: float) -> float:
        return self._log_kernel(log_f) + math.log(self._relative_tail(log_f)) - self._log_whole

    def _log_density(self, log_f: float) -> float:
        return self._log_kernel(log_f) - self._log_whole

    @property
    def _log_whole(self) -> float:
        return math.log(self._relative_tail(0.0) + self._mirrored._relative_tail(0.0))

    def _log_kernel(self, log_f: float) -> float:
        """Give the logarithm of the density relative to its peak."""
        share = self.d1 / (self.d1 + self.d2)
        return float(self.d1 / 2 * log_f - (self.d1 + self.d2) / 2 * _log_mixture(share, np.array([log_f]))[0])

    def _relative_tail(self, log_f: float) -> float:
        """Integrate the density above log_f >= 0, divided by the density there."""
        odds = self.d1 / self.d2 * math.exp(log_f) if log_f < 700 else math.inf
        share = odds / (1 + odds) if math.isfinite(odds) else 1.0
        slope = (self.d1 + self.d2) / 2 * share - self.d1 / 2
        width = 1 / (slope + math.sqrt(self.d1 * self.d2 / (self.d1 + self.d2) / 2))
        step = width * _NODES
        fall = (self.d1 + self.d2) / 2 * _log_mixture(share, step) - self.d1 / 2 * step
        return float(width * (_WEIGHTS * np.exp(-fall)).sum())


def _log_mixture(share: float, step: Values) -> Values:
    """Give log(1 - share + share × exp step)."""
    near = np.log1p(share * np.expm1(np.minimum(step, LARGE)))
    far = step + np.log(share + (1 - share) * np.exp(-np.maximum(step, LARGE)))
    return np.where(step < LARGE, near, far)
