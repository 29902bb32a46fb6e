"""From a statistic with a known standard deviation to the same with an estimated one: one grid for all quantiles."""

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy import optimize

Values = NDArray[np.float64]

DEPTH = 45.0
"""An integrand is followed until it has fallen to exp(-45) = 3e-20 of its peak."""
STEP = 0.35
"""Step of log s, times √df (the standard deviation of log s is about 1 / √(2 df))."""
WIDEST_STEP, WIDEST_STEP_OF_MANY = 0.07, 0.035
"""The widest step. All three were set by halving them: no tail changes by more than 1e-12 of itself."""
MANY = 100
"""With more statistics than this the tail of the largest one falls so steeply that it needs the finer steps."""
UNDERFLOW = 745.0
"""exp(-745) is the smallest double."""


@dataclass(frozen=True)
class Studentized:
    """The largest of several normal statistics W, divided by an independent estimate s of their standard deviation.

    ``df`` times s² has the chi-square distribution with ``df`` degrees of freedom, so that

        P(W / s > q) = ∫ P(W > q s) f(s) ds = Σ h P(W > w_i) s_i f(s_i),   w_i = q s_i = exp(i h).

    The nodes w_i are the same for every q, and so P(W > w) is computed once for each. The rule is the trapezoid rule in
    log s, which converges exponentially there, because the integrand is analytic and falls to 0 on both sides. Every
    term is positive: small tails keep their relative accuracy.
    """

    normal_tail: Callable[[Values], Values]
    """P(W > w) for standard normal statistics, elementwise; w may be negative."""
    rate: float
    """P(W > w) falls like exp(-rate w²)."""
    many: bool = False
    """Whether W is the largest of more than ``MANY``."""

    def tail(self, q: ArrayLike, df: float) -> Values:
        """Give P(W / s > q).

        Parameters
        ----------
        q : array_like, shape (n,)
            Quantiles.
        df : float
            Degrees of freedom of s, above 0; infinite when the standard deviation is known.

        Returns
        -------
        ndarray, shape (n,)
            Relative accuracy 1e-12 or better down to 1e-290.

        Raises
        ------
        ValueError
            When a quantile is missing, or the degrees of freedom are not above 0.
        """
        q = np.atleast_1d(np.asarray(q, dtype=np.float64))
        if np.isnan(q).any() or not df > 0:
            raise ValueError(f"quantiles are numbers and degrees of freedom are above 0; found df = {df}")
        if math.isinf(df):
            return self.normal_tail(q)
        tails = np.empty_like(q)
        for side in (-1, 0, 1):
            here = np.sign(q) == side
            if here.any():
                tails[here] = self._mixed(np.abs(q[here]), side, df) if side else self.normal_tail(q[here])
        return tails

    def quantile(self, tail: float, df: float, *, between: tuple[float, float]) -> float:
        """Solve P(W / s > q) = tail.

        Parameters
        ----------
        tail : float
            Probability above the quantile, between 0 and 1.
        df : float
            Degrees of freedom.
        between : (float, float)
            Two positive numbers between which the solution lies, to within rounding.
        """
        low, high = (math.log(end) + slack for end, slack in zip(between, (-1e-9, 1e-9), strict=True))

        def excess(log_q: float) -> float:
            return math.log(float(self.tail(math.exp(log_q), df)[0]) / tail)

        return math.exp(optimize.brentq(excess, low, high, xtol=1e-15, rtol=1e-14))

    def _mixed(self, q: Values, side: int, df: float) -> Values:
        """Give P(W / s > side q) for q > 0."""
        step = min(WIDEST_STEP_OF_MANY if self.many else WIDEST_STEP, STEP / math.sqrt(df))
        log_q = np.log(np.minimum(q, 1e300))
        below, above = _reach(df)
        # where P(W > w) falls, the peak of the integrand lies by this much further down
        drop = 0.5 * np.logaddexp(0.0, math.log(2 * self.rate / df) + 2 * log_q) if side > 0 else 0.0
        first = np.floor((log_q - drop - below) / step).astype(np.int64)
        last = np.ceil((log_q + above) / step).astype(np.int64)
        if side > 0:
            last = np.clip(last, first, math.ceil(math.log(math.sqrt(UNDERFLOW / self.rate)) / step))
        counts = np.maximum(last - first, 0) + 1
        starts = np.concatenate([[0], np.cumsum(counts)[:-1]])
        node = np.arange(counts.sum()) - np.repeat(starts - first, counts)
        used, place = np.unique(node, return_inverse=True)
        terms = self.normal_tail(side * np.exp(step * used))[place]
        terms *= _density(step * node - np.repeat(log_q, counts), df)
        all_steps = np.arange(-math.ceil(below / step), math.ceil(above / step) + 1, dtype=np.float64)
        whole = _density(step * all_steps, df).sum()
        tails: Values = np.minimum(np.add.reduceat(terms, starts) / whole, 1.0)
        return tails


def _density(log_s: Values, df: float) -> Values:
    """Give the density of log s, divided by its value at s = 1."""
    density: Values = np.exp(df * (log_s - np.expm1(2 * log_s) / 2))
    return density


def _reach(df: float) -> tuple[float, float]:
    """Bound how far below and above 0 the density of log s falls to exp(-DEPTH) of its peak.

    Below, x - (1 - exp(-2x))/2 = d is solved by less than d + min(√d, 1/2); above, (exp(2x) - 1)/2 - x = d by less than
    √d, and so by less than log(1 + 2d + 2√d)/2.
    """
    d = DEPTH / df
    return d + min(math.sqrt(d), 0.5), 0.5 * math.log1p(2 * d + 2 * math.sqrt(d))
