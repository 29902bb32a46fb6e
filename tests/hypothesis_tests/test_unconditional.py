"""Boschloo's polynomial: its coefficients, and its largest value by a grid and by enclosure."""

from typing import Any

import numpy as np
import pytest
from scipy import stats

from beforehand.hypothesis_tests import unconditional, unconditional_again
from beforehand.hypothesis_tests.two_by_two import Table


def value(coefficient: Any, share: float) -> float:
    """The polynomial as the mean of its coefficients over a binomial count."""
    units = coefficient.size - 1
    return float(np.dot(coefficient, stats.binom.pmf(np.arange(units + 1), units, share)))


def test_coefficients_are_conditional_sizes() -> None:
    table = Table(5, 7, 6, 7)
    limit = unconditional.conditional_above(table)
    assert limit == pytest.approx(stats.hypergeom.sf(4, 13, 7, 7), rel=1e-12)
    for m, found in enumerate(unconditional.coefficients(table)):
        tails = stats.hypergeom.sf(np.arange(-1, 8), 13, m, 7)
        kept = tails[(tails <= limit * (1 + 1e-9)) & (tails > 0)]
        assert found == pytest.approx(kept.max() if kept.size else 0.0, rel=1e-10)


def test_both_routes_have_the_same_coefficients() -> None:
    for table in (Table(5, 7, 6, 7), Table(40, 60, 90, 75), Table(0, 4, 9, 3), Table(3, 3, 1, 4)):
        observed = unconditional_again.conditional_above(table.events, table.first, table.second, table.all_events)
        again = unconditional_again.coefficients(table.first, table.second, observed)
        np.testing.assert_allclose(unconditional.coefficients(table), again, rtol=1e-11)


@pytest.mark.parametrize("units", [1, 2, 7, 40, 300])
def test_largest_value_of_rough_polynomials(units: int) -> None:
    # coefficients that jump at random make more and nearer peaks than any test does
    random = np.random.default_rng(units)
    for _ in range(4):
        coefficient = random.random(units + 1) * (random.random(units + 1) < 0.3)
        coefficient[random.integers(units + 1)] = 1.0
        enclosed = unconditional_again.largest_value(coefficient)
        assert unconditional.largest_value(coefficient) == pytest.approx(enclosed, rel=1e-9)
        assert enclosed >= max(value(coefficient, share) for share in np.linspace(0, 1, 501)) * (1 - 1e-10)


def test_halves_are_the_same_polynomial() -> None:
    coefficient = np.random.default_rng(9).random(12)
    lower, upper = unconditional_again.halves(coefficient)
    for share in (0.0, 0.2, 0.7, 1.0):
        assert value(lower, share) == pytest.approx(value(coefficient, share / 2), rel=1e-13)
        assert value(upper, share) == pytest.approx(value(coefficient, (1 + share) / 2), rel=1e-13)
