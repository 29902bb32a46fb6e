"""The weighted Bonferroni adjustment against its definition."""

from fractions import Fraction

import numpy as np
import pytest

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.bonferroni import bonferroni
from beforehand.multiplicity.entries.weighted_bonferroni import weighted_bonferroni


@pytest.mark.parametrize("seed", range(10))
def test_p_over_weight(seed: int) -> None:
    # min(1, p / w) with weights that sum to 1 (methods page of this project; Rosenthal & Rubin 1983 from memory)
    random = np.random.default_rng(seed)
    p, parts = random.random(12) ** 4, random.integers(1, 20, 12)
    shares = [Fraction(int(part), int(parts.sum())) for part in parts]
    expected = [float(min(1, Fraction(value) / share)) for value, share in zip(p, shares, strict=True)]
    np.testing.assert_allclose(weighted_bonferroni(p, weights=parts), expected, rtol=1e-15)


def test_equal_weights_are_bonferroni() -> None:
    p = np.random.default_rng(63).random(40) ** 3
    np.testing.assert_allclose(weighted_bonferroni(p, weights=np.full(40, 0.7)), bonferroni(p), rtol=4e-16)


def test_a_share_of_nothing() -> None:
    steps = weighted_bonferroni.steps([1e-300, 0.01, 0.0], weights=[0, 1, 0])
    assert steps.adjusted.tolist() == [0, 1, 0.01]
    assert list(steps.arithmetic) == ["weight 0: no share of the level"] * 2 + [""]
    assert steps.thresholds(0.05).tolist() == [0, 0, 0.05]
    assert weighted_bonferroni.replay([1e-300, 0.01, 0.0], 0.05, weights=[0, 1, 0])["rejected"] == [False, True, True]


def test_the_thresholds_share_the_level() -> None:
    thresholds = weighted_bonferroni.steps([0.5, 0.5, 0.5], weights=[0.5, 0.3, 0.2]).thresholds(0.05)
    np.testing.assert_allclose(thresholds, [0.025, 0.015, 0.01], rtol=1e-15)
    assert is_rejected(weighted_bonferroni([0.025, 0.015, 0.01], weights=[0.5, 0.3, 0.2]), 0.05).all()


@pytest.mark.parametrize(
    ("weights", "complaint"),
    [([0.5, -0.1], "from 0 on"), ([0.5, float("nan")], "from 0 on"), ([0, 0], "all weights are 0")],
)
def test_what_is_no_weight_is_refused(weights: list[float], complaint: str) -> None:
    with pytest.raises(ValueError, match=complaint):
        weighted_bonferroni([0.1, 0.2], weights=weights)
