"""Two shares: both routes of the score tests on tables of every size, and the formula for cubics that neither uses."""

import math
from decimal import Decimal
from typing import Any

import numpy as np
import pytest

from beforehand.hypothesis_tests import normal, normal_again, shares
from beforehand.hypothesis_tests.shares_again import Group, TwoGroups
from beforehand.hypothesis_tests.two_by_two import Table


def tables(seed: int, how_many: int = 12, largest: int = 40) -> list[Table]:
    """Draw tables, many of them with groups in which all, none, or all but one have the event."""
    random, found = np.random.default_rng(seed), []
    for _ in range(how_many):
        n = [int(size) for size in random.integers(2, largest, 2)]
        x, y = (int(random.choice([0, 1, size - 1, size, size // 2, size // 7])) for size in n)
        found.append(Table(x, n[0], n[1], x + y))
    return found


def by_cubic_formula(table: Table, null: float) -> float:
    """Fit the share of the second group by the trigonometric formula (Farrington and Manning 1990, appendix)."""
    x, y, n1, n2 = table.events, table.all_events - table.events, table.first, table.second
    theta, p1, p2 = n2 / n1, x / n1, y / n2
    a, b = 1 + theta, -(1 + theta + p1 + theta * p2 + null * (theta + 2))
    c, d = null**2 + null * (2 * p1 + theta + 1) + p1 + theta * p2, -p1 * null * (1 + null)
    v = b**3 / (3 * a) ** 3 - b * c / (6 * a * a) + d / (2 * a)
    u = math.copysign(math.sqrt(max(0.0, b * b / (3 * a) ** 2 - c / (3 * a))), v)
    angle = (math.pi + math.acos(min(1.0, max(-1.0, v / u**3)))) / 3 if u else math.pi / 2
    return 2 * u * math.cos(angle) - b / (3 * a) - null


@pytest.mark.parametrize("seed", range(6))
def test_the_formula_for_cubics_gives_the_same_fit(seed: int) -> None:
    random = np.random.default_rng(seed)
    for table in tables(seed):
        null = float(random.uniform(-0.95, 0.95))
        fit = shares.fitted_to_difference(table, null)
        first, second = fit.first, fit.second
        assert first.share - second.share == pytest.approx(null, abs=1e-15)
        # the formula loses half the digits where two roots are near each other
        assert second.share == pytest.approx(by_cubic_formula(table, null), abs=1e-7)
        assert (first.share + first.rest, second.share + second.rest) == pytest.approx((1, 1), rel=1e-14)


@pytest.mark.parametrize("comparison", ["difference", "ratio", "odds"])
@pytest.mark.parametrize("largest", [40, 20_000])
def test_two_routes(comparison: Any, largest: int) -> None:
    random = np.random.default_rng(largest)
    for table in tables(largest, largest=largest):
        x, y = table.events, table.all_events - table.events
        spared = table.first + table.second - x - y
        if (comparison != "difference" and not x + y) or (comparison == "odds" and not spared):
            continue
        groups = TwoGroups(Group(x, table.first), Group(y, table.second), comparison, small_sample=False)
        critical, again = normal.critical(1e-4), normal_again.critical(1e-4)
        if comparison == "difference":
            null, z = float(random.uniform(-0.9, 0.9)), shares.difference_score
            ends = shares.difference_ends(table, critical)
        else:
            null, z = (
                float(np.exp(random.normal(0, 2))),
                shares.ratio_score if comparison == "ratio" else shares.odds_score,
            )
            below, above = (not x, not y) if comparison == "ratio" else (x == table.least, x == table.most)
            ends = shares.ratio_ends(z, table, critical, open_below=below, open_above=above)
        found = groups.interval(again)
        # cancellation in the difference of two shares: 1e-16 of the shares, some 1e-4 of which is the difference
        assert z(table, null) == pytest.approx(float(groups.z(Decimal(null))), rel=1e-11)
        assert (ends.lower, ends.upper) == pytest.approx((found.lower, found.upper), rel=1e-11)


@pytest.mark.parametrize("score", [shares.difference_score, shares.ratio_score, shares.odds_score])
def test_z_falls_along_the_null_values(score: Any) -> None:
    logs = np.linspace(-6, 6, 61)
    for n1 in range(1, 6):
        for n2 in range(1, 6):
            for x in range(n1 + 1):
                for y in range(n2 + 1):
                    if score is not shares.difference_score and not 0 < x + y < n1 + n2:
                        continue
                    nulls = np.tanh(logs / 2) if score is shares.difference_score else np.exp(logs)
                    z = [score(Table(x, n1, n2, x + y), float(null)) for null in nulls]
                    assert np.all(np.diff(z) <= 1e-9)
