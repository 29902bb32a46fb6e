"""The fallback procedure against a check value, its walk at every level, and closed testing over all sets."""

from itertools import combinations
from typing import Any

import numpy as np
import pytest

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.fallback import fallback
from beforehand.multiplicity.entries.fixed_sequence import fixed_sequence


def test_reference(entry: Any) -> None:
    known = entry("fallback", "fallback-3-gap")
    adjusted = fallback(known["inputs"]["p"], weights=known["params"]["weights"], positions=[0, 1, 2])
    np.testing.assert_allclose(adjusted, known["expected"]["adjusted_p"], rtol=0, atol=known["tolerance"]["abs"])
    rejected = np.flatnonzero(is_rejected(adjusted, known["params"]["alpha"])) + 1
    assert rejected.tolist() == known["expected"]["rejected"]


@pytest.mark.parametrize("seed", range(20))
def test_closed_testing(seed: int) -> None:
    # Wiens & Dmitrienko (2005; from memory): in a set of hypotheses each has its own weight and those of the ones
    # before it that are not in the set, back to the last that is; the set is tested by min p / weight
    random = np.random.default_rng(seed)
    m = 7
    p, weights = random.random(m) ** 4, random.integers(0, 5, m) / 10
    weights[-1] += 0.1
    weights /= weights.sum()
    closed = np.zeros(m)
    for size in range(1, m + 1):
        for chosen in combinations(range(m), size):
            starts = [0, *[i + 1 for i in chosen]]
            shares = [weights[start : i + 1].sum() for start, i in zip(starts, chosen, strict=False)]
            local = min(p[i] / share if share > 0 else 1.0 for i, share in zip(chosen, shares, strict=True))
            closed[list(chosen)] = np.maximum(closed[list(chosen)], min(1.0, local))
    np.testing.assert_allclose(fallback(p, weights=weights, positions=np.arange(m)), closed, rtol=1e-14)


@pytest.mark.parametrize("seed", range(10))
def test_the_adjusted_p_is_the_smallest_level_that_rejects(seed: int) -> None:
    random = np.random.default_rng(seed)
    p, weights, positions = random.random(9) ** 3, random.random(9), random.permutation(9)
    adjusted = fallback(p, weights=weights, positions=positions)
    for i, value in enumerate(adjusted):
        for level, expected in ((value * (1 + 1e-9), True), (value * (1 - 1e-9), False)):
            if level < 1:
                again = fallback.replay(p.tolist(), level, weights=weights.tolist(), positions=positions.tolist())
                assert again["rejected"][i] == expected


def test_all_weight_on_the_first_is_the_fixed_sequence() -> None:
    p = np.random.default_rng(66).random(30) ** 2
    weights = [1.0, *[0.0] * 29]
    expected = fixed_sequence(p, positions=np.arange(30))
    np.testing.assert_array_equal(fallback(p, weights=weights, positions=np.arange(30)), expected)


def test_the_arithmetic() -> None:
    # written order as given; level 0.05: 0.02 meets 0.025, hands on; 0.06 misses 0.04; 0.018 misses its own 0.01
    steps = fallback.steps([0.02, 0.06, 0.018], weights=[0.5, 0.3, 0.2], positions=[0, 1, 2])
    np.testing.assert_allclose(steps.thresholds(0.05), [0.01, 0.025, 0.04], rtol=1e-15)
    # at its level 0.075 the second falls with the first one's share, and lets the third fall with all of it
    np.testing.assert_allclose(steps.factor, [1.0, 2.0, 1.25], rtol=1e-15)
    assert steps.taken_from.tolist() == [2, 1, 2]
