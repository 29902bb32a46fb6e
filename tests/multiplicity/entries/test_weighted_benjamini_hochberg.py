"""The weighted Benjamini-Hochberg procedure against a check value and its definition."""

from typing import Any

import numpy as np
import pytest
from scipy.stats import false_discovery_control

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.benjamini_hochberg import benjamini_hochberg
from beforehand.multiplicity.entries.weighted_benjamini_hochberg import weighted_benjamini_hochberg


def test_reference(entry: Any) -> None:
    known = entry("weighted_benjamini_hochberg", "weighted-bh-5")
    adjusted = weighted_benjamini_hochberg(known["inputs"]["p"], weights=known["params"]["weights"])
    np.testing.assert_allclose(adjusted, known["expected"]["adjusted_p"], rtol=0, atol=known["tolerance"]["abs"])
    assert np.count_nonzero(is_rejected(adjusted, known["params"]["alpha"])) == known["expected"]["n_rejected"]


@pytest.mark.parametrize("seed", range(10))
def test_scipy_on_p_over_weight(seed: int) -> None:
    # scipy's unweighted adjustment of p / weight, where no quotient is above 1
    random = np.random.default_rng(seed)
    weights = random.random(60) + 0.5
    weights /= weights.mean()
    p = random.random(60) ** 4 * weights.min()
    expected = false_discovery_control(p / weights, method="bh")
    np.testing.assert_allclose(weighted_benjamini_hochberg(p, weights=weights), expected, rtol=1e-14)


def test_equal_weights_are_benjamini_hochberg() -> None:
    p = np.random.default_rng(67).random(40) ** 3
    np.testing.assert_allclose(weighted_benjamini_hochberg(p, weights=np.ones(40)), benjamini_hochberg(p), rtol=1e-15)


def test_a_share_of_nothing() -> None:
    p, weights = [1e-300, 0.01, 0.0, 0.9], [0, 1, 0, 1]
    steps = weighted_benjamini_hochberg.steps(p, weights=weights)
    assert steps.adjusted.tolist() == [0, 1, 0.01, 0.6]
    assert steps.thresholds(0.1).tolist() == [0, 0, pytest.approx(0.1), pytest.approx(0.15)]
    rejected = weighted_benjamini_hochberg.replay(p, 0.1, weights=weights)["rejected"]
    assert rejected == [False, True, True, False]
