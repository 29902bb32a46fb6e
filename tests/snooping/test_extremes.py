"""What the extreme pair costs, held against simulations that know no studentized range and no F distribution."""

import math

import numpy as np
import pytest
from scipy import stats

from beforehand.snooping.extremes import among_all_pairs, level_of_extreme_pair

DRAWS = 200_000
# a share of so many draws strays by more than 4.5 standard errors in 7 of a million
STRAYS = 4.5 * math.sqrt(0.25 / DRAWS)


# Recomputed before they were trusted: the same shares follow from the simulation below, which shares nothing with them.
@pytest.mark.parametrize(("k", "level"), [(2, 0.05), (3, 0.122), (4, 0.203), (5, 0.286), (6, 0.366), (10, 0.627)])
def test_level_in_large_samples(k: int, level: float) -> None:
    assert level_of_extreme_pair(k, per_side=0.025) == pytest.approx(level, abs=5e-4)  # printed to 0.1 %
    means = np.random.default_rng(20310302).standard_normal((DRAWS, k))
    t = (means.max(axis=1) - means.min(axis=1)) / math.sqrt(2)
    assert np.mean(t > stats.norm.isf(0.025)) == pytest.approx(level, abs=STRAYS + 5e-4)


@pytest.mark.parametrize(("k", "n"), [(4, 4), (5, 10)])
def test_level_with_the_df_of_two_groups(k: int, n: int) -> None:
    random = np.random.default_rng(20310303)
    means = random.standard_normal((DRAWS, k)) / math.sqrt(n)
    variance = random.chisquare(2 * (n - 1), DRAWS) / (2 * (n - 1))
    t = (means.max(axis=1) - means.min(axis=1)) / np.sqrt(variance * 2 / n)
    simulated = np.mean(t > stats.t.isf(0.025, 2 * n - 2))
    assert level_of_extreme_pair(k, per_side=0.025, df=2 * n - 2) == pytest.approx(simulated, abs=STRAYS)


def test_level_with_unequal_numbers_is_a_bound() -> None:
    random, n = np.random.default_rng(20310304), np.array([5, 10, 20, 40])
    means = random.standard_normal((DRAWS, 4)) / np.sqrt(n)
    high, low = means.argmax(axis=1), means.argmin(axis=1)
    difference = np.take_along_axis(means, np.stack([high, low], axis=1), axis=1)
    z = (difference[:, 0] - difference[:, 1]) / np.sqrt(1 / n[high] + 1 / n[low])
    simulated = np.mean(z > stats.norm.isf(0.025))
    assert 0.05 < simulated < level_of_extreme_pair(4, per_side=0.025) - STRAYS


def test_among_all_pairs_as_published() -> None:
    # entry tukey-kramer-unequal-n of the check values: read in scipy 1.17.1, scipy/stats/tests/test_hypotests.py,
    # TestTukeyHSD, which attributes the values to two commercial systems; accepted there to 1e-7
    groups = (
        np.array([24.5, 23.5, 26.28, 26.4, 27.1, 29.9, 30.1, 30.1]),
        np.array([28.4, 34.2, 29.5, 32.2, 30.1]),
        np.array([26.1, 28.3, 24.3, 26.2, 27.8]),
    )
    found = [among_all_pairs(groups, *pair).tukey_kramer for pair in ((0, 1), (0, 2), (1, 2))]
    assert found == pytest.approx([0.0337149844308, 0.85572267328807, 0.0225904702062], abs=1e-7)


def five_groups(t: float) -> tuple[np.ndarray, ...]:
    """Five groups of ten, each with standard deviation 1; the first and the last differ by so many standard errors."""
    scatter = (np.arange(10) - 4.5) / math.sqrt(55 / 6)
    return tuple(scatter + mean * t * math.sqrt(2 / 10) for mean in (0, 0.4, 0.5, 0.6, 1))


def test_among_all_pairs_of_five_groups_of_ten() -> None:
    # pooled p = 0.01 at 45 df; Tukey 0.071 and Scheffé 0.144, recomputed by the simulation beside them
    t = float(stats.t.isf(0.005, 45))
    found = among_all_pairs(five_groups(t), 4, 0)
    assert found.tukey_kramer == pytest.approx(0.071, abs=5e-4)
    assert found.scheffe == pytest.approx(0.144, abs=5e-4)
    random = np.random.default_rng(20310305)
    means = random.standard_normal((DRAWS, 5))
    variance = random.chisquare(45, DRAWS) / 45
    ranges = (means.max(axis=1) - means.min(axis=1)) / np.sqrt(2 * variance)
    # the largest t² of any contrast is the sum of squares between the groups over the variance
    contrasts = np.sqrt(((means - means.mean(axis=1, keepdims=True)) ** 2).sum(axis=1) / variance)
    assert found.tukey_kramer == pytest.approx(np.mean(ranges > t), abs=STRAYS)
    assert found.scheffe == pytest.approx(np.mean(contrasts > t), abs=STRAYS)


def test_null_value_moves_the_difference() -> None:
    groups = five_groups(3.0)
    moved = (*groups[:4], groups[4] - 0.25)
    found, expected = among_all_pairs(groups, 4, 0, null_value=0.25), among_all_pairs(moved, 4, 0)
    assert found.tukey_kramer == pytest.approx(expected.tukey_kramer, rel=1e-9)  # quadrature
    assert found.scheffe == pytest.approx(expected.scheffe, rel=1e-12)  # two roundings


def test_groups_that_do_not_vary_have_no_p() -> None:
    constant = (np.ones(3), np.ones(3), np.full(3, 2.0))
    single = (np.array([1.0]), np.array([2.0]), np.array([4.0]))
    for groups in (constant[:2], single):
        found = among_all_pairs(groups, 0, 1)
        assert math.isnan(found.tukey_kramer)
        assert math.isnan(found.scheffe)
