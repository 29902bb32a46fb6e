"""The unconditional distribution of a 2 x 2 table, in double precision: Boschloo's test by a grid and refinement.

Given the number m of all events, a test of equal shares rejects with a probability that does not depend on the common
share; m itself is binomial. So the probability of a set of tables is a polynomial in the common share π, with these
conditional probabilities as its coefficients in the basis C(N, m) π^m (1 - π)^(N - m). Its largest value is p.
"""

import math

import numpy as np
from scipy import optimize, special

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.two_by_two import EQUALLY_PROBABLE, Hypergeometric, Table, log_sum

# On the scale asin √π, on which a binomial share has the standard error 1 / (2 √N) wherever it is, so many grid points
# to each standard error: the polynomial hardly bends on a shorter scale, and the second route proves what is found.
POINTS_PER_ERROR = 20


def conditional_above(table: Table) -> float:
    """Give the one-sided p of Fisher's exact test: P(as many events in the first group, or more)."""
    return math.exp(Hypergeometric.of(table).log_above(0.0))


def coefficients(table: Table) -> Values:
    """Give, for each number of all events, the conditional probability of the tables as extreme as the observed one.

    These are the tables whose one-sided p by Fisher's exact test is no larger (Boschloo 1970).
    """
    limit = math.log(conditional_above(table)) + math.log1p(EQUALLY_PROBABLE)
    units = table.first + table.second
    return np.array([_largest_tail(Table(0, table.first, table.second, m), limit) for m in range(units + 1)])


def _largest_tail(margins: Table, limit: float) -> float:
    """Give the largest upper tail whose logarithm does not exceed the limit, 0 where none does."""
    highest = Hypergeometric.of(Table(margins.most, margins.first, margins.second, margins.all_events))
    log_tails = np.logaddexp.accumulate(highest.log_weights[::-1]) - log_sum(highest.log_weights)
    small = log_tails[log_tails <= limit]
    return float(np.exp(small[-1])) if small.size else 0.0


def largest_value(coefficient: Values) -> float:
    """Maximise the polynomial over the common share: every peak of the grid that is near the highest is refined."""
    units, largest = coefficient.size - 1, float(coefficient.max())
    angles = np.linspace(0, math.pi / 2, math.ceil(math.pi * POINTS_PER_ERROR * math.sqrt(units)) + 1)
    values = np.array([_value(coefficient, angle) for angle in angles])
    if values.max() >= largest * (1 - 1e-12):  # no value exceeds the largest coefficient
        return largest
    beside = np.pad(values, 1, constant_values=-1.0)
    peaks = np.flatnonzero((values >= beside[:-2]) & (values >= beside[2:]) & (values > 0.9 * values.max()))
    step = angles[1]
    return max(_refined(coefficient, float(angles[peak]), float(step)) for peak in peaks)


def _refined(coefficient: Values, angle: float, step: float) -> float:
    found = optimize.minimize_scalar(
        lambda at: -_value(coefficient, at),
        bounds=(max(0.0, angle - step), min(math.pi / 2, angle + step)),
        method="bounded",
        options={"xatol": 1e-9},
    )
    return max(_value(coefficient, angle), -float(found.fun))


def _value(coefficient: Values, angle: float) -> float:
    """Give the polynomial at the share sin² angle."""
    units = coefficient.size - 1
    share, rest = math.sin(angle) ** 2, math.cos(angle) ** 2
    m = np.arange(units + 1)
    log_terms = _log_choices(units) + special.xlogy(m, share) + special.xlogy(units - m, rest)
    return float(np.dot(coefficient, np.exp(log_terms)))


def _log_choices(units: int) -> Values:
    m = np.arange(units, dtype=np.float64)
    return np.concatenate([[0.0], np.cumsum(np.log((units - m) / (m + 1)))])
