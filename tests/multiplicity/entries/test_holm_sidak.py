"""The Holm-Šidák procedure against values from elsewhere and against closed testing."""

from itertools import combinations
from typing import Any

import numpy as np
import pytest
from statsmodels.stats.multitest import multipletests

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.holm import holm
from beforehand.multiplicity.entries.holm_sidak import holm_sidak
from beforehand.multiplicity.entries.sidak import sidak


def test_reference(reference: Any) -> None:
    adjusted = holm_sidak(reference.p)
    assert reference.agrees(adjusted)
    if reference.rejections is not None:
        assert np.count_nonzero(is_rejected(adjusted, reference.level)) == reference.rejections


def test_statsmodels() -> None:
    # Only its adjusted p: its `reject` is computed on its own and differs at all of 232 boundaries. p = 1, at which it
    # warns, is left out.
    p = np.random.default_rng(57).random(200) ** 3
    np.testing.assert_allclose(holm_sidak(p), multipletests(p, method="holm-sidak")[1], rtol=1e-15)


@pytest.mark.parametrize("seed", range(10))
def test_closed_testing(seed: int) -> None:
    # the closure of Šidák's single step: adjusted p = largest 1 - (1 - min p_S)^|S| over all sets S that hold the
    # hypothesis (Marcus, Peritz & Gabriel 1976, Biometrika 63:655-660; from memory)
    p = np.round(np.random.default_rng(seed).random(7) ** 2, 2)  # with ties
    sets = [list(chosen) for size in range(1, 8) for chosen in combinations(range(7), size)]
    closed = [max(1 - (1 - p[chosen].min()) ** len(chosen) for chosen in sets if i in chosen) for i in range(7)]
    np.testing.assert_allclose(holm_sidak(p), closed, rtol=0, atol=4e-16)


def test_never_stricter_than_holm_and_sidak() -> None:
    p = np.random.default_rng(58).random(500) ** 6
    assert np.all(holm_sidak(p) <= holm(p))
    assert np.all(holm_sidak(p) <= sidak(p) * (1 + 1e-15))


def test_the_arithmetic_in_words() -> None:
    assert list(holm_sidak.steps([0.2, 0.04, 0.03]).arithmetic) == [
        "1 − (1 − 0.03)^3",
        "1 − (1 − 0.04)^2",
        "1 − (1 − 0.2)^1",
    ]
