"""What counts as tied."""

import numpy as np
from scipy import stats

from beforehand.hypothesis_tests.ties import doubled_midranks, rounding, settled


def test_what_is_equal_on_paper_becomes_equal() -> None:
    first, second = np.array([0.3, 0.2, 1.1, 0.4]), np.array([0.2, 0.1, 1.0, 0.2])
    found = settled(first - second, rounding(first, second))
    assert np.unique(found[:3]).size == 1
    assert found[3] != found[0]


def test_what_differs_on_paper_stays_different() -> None:
    values = np.array([1.0, 1.0 + 1e-14, 2.0, 1e20])
    np.testing.assert_array_equal(settled(values, rounding(values)), values)


def test_nearly_nothing_is_nothing() -> None:
    assert settled(np.array([0.3 - 0.1 - 0.2]), rounding(0.3, 0.1, 0.2).reshape(1))[0] == 0


def test_negatives_settle_alike() -> None:
    values = np.random.default_rng(24).integers(-9, 9, 60) * 0.1 + 0.7
    error = rounding(values)
    np.testing.assert_array_equal(settled(-values, error), -settled(values, error))


def test_an_outlier_does_not_tie_the_rest() -> None:
    values = np.array([1.0, 1.1, 1.2, 1e18])
    assert np.unique(settled(values, rounding(values))).size == 4


def test_midranks() -> None:
    values = np.random.default_rng(25).integers(0, 7, 40) + 0.0
    np.testing.assert_array_equal(doubled_midranks(values), 2 * stats.rankdata(values))
