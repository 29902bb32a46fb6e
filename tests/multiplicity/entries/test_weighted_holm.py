"""The weighted Holm procedure against check values and against closed testing over all sets."""

from itertools import combinations
from typing import Any

import numpy as np
import pytest

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.holm import holm
from beforehand.multiplicity.entries.weighted_bonferroni import weighted_bonferroni
from beforehand.multiplicity.entries.weighted_holm import weighted_holm


@pytest.mark.parametrize("name", ["weighted-holm-zero", "weighted-holm-4"])
def test_reference(name: str, entry: Any) -> None:
    known = entry("weighted_holm", name)
    adjusted = weighted_holm(known["inputs"]["p"], weights=known["params"]["weights"])
    np.testing.assert_allclose(adjusted, known["expected"]["adjusted_p"], rtol=0, atol=known["tolerance"]["abs"])
    assert is_rejected(adjusted, known["params"]["alpha"]).tolist() == known["expected"]["reject"]


@pytest.mark.parametrize("seed", range(20))
def test_closed_testing(seed: int) -> None:
    # the closure of weighted Bonferroni tests: adjusted p = largest min over S of p / w x (sum of w over S), over all
    # sets S that hold the hypothesis (Marcus, Peritz & Gabriel 1976, Biometrika 63:655-660; from memory)
    random = np.random.default_rng(seed)
    p, weights = np.round(random.random(8) ** 2, 2), random.integers(1, 6, 8)  # with ties
    sets = [list(chosen) for size in range(1, 9) for chosen in combinations(range(8), size)]
    local = {tuple(s): min(1.0, np.min(p[s] / weights[s]) * weights[s].sum()) for s in sets}
    closed = [max(value for chosen, value in local.items() if i in chosen) for i in range(8)]
    np.testing.assert_allclose(weighted_holm(p, weights=weights), closed, rtol=1e-15)


def test_equal_weights_are_holm() -> None:
    p = np.random.default_rng(64).random(40) ** 3
    np.testing.assert_allclose(weighted_holm(p, weights=np.ones(40)), holm(p), rtol=1e-15)


def test_never_stricter_than_weighted_bonferroni() -> None:
    random = np.random.default_rng(65)
    p, weights = random.random(300) ** 5, random.random(300)
    assert np.all(weighted_holm(p, weights=weights) <= weighted_bonferroni(p, weights=weights) * (1 + 1e-13))


def test_a_p_of_zero_needs_no_share() -> None:
    p, weights = [0.2, 0.0, 0.01], [0.5, 0, 0.5]
    assert weighted_holm(p, weights=weights).tolist() == [0.2, 0, 0.02]
    assert weighted_holm.replay(p, 0.05, weights=weights)["rejected"] == [False, True, True]
