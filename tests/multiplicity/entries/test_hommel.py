"""Hommel's procedure against values from elsewhere, closed testing over all sets, and its own stages."""

from itertools import combinations
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from statsmodels.stats.multitest import multipletests

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.hommel import hommel


def test_reference(reference: Any) -> None:
    adjusted = hommel(reference.p)
    assert reference.agrees(adjusted)
    if reference.rejections is not None:
        assert np.count_nonzero(is_rejected(adjusted, reference.level)) == reference.rejections


def test_base_r(r_case: Any) -> None:
    # base R reads 2^-1000 with a few wrong digits at its end
    np.testing.assert_allclose(hommel(r_case.p), r_case.adjusted, rtol=5e-15)


def test_statsmodels() -> None:
    # Only its adjusted p: its `reject` is computed on its own and differs at boundaries (its issues 764 and 768).
    for seed in range(20):
        p = np.random.default_rng(seed).random(200) ** (1 + seed % 4)
        np.testing.assert_allclose(hommel(p), multipletests(p, method="hommel")[1], rtol=2e-15)


def closed_testing(p: NDArray[np.float64]) -> list[float]:
    """Give the largest Simes p over all sets that hold each hypothesis (Marcus, Peritz & Gabriel 1976; from memory)."""
    largest = [0.0] * p.size
    for size in range(1, p.size + 1):
        for chosen in combinations(range(p.size), size):
            simes = float(np.min(size / np.arange(1, size + 1) * np.sort(p[list(chosen)])))
            for i in chosen:
                largest[i] = max(largest[i], simes)
    return largest


@pytest.mark.parametrize("m", [2, 5, 8, 12])
@pytest.mark.parametrize("shape", ["uniform", "small", "tied", "with 0 and 1", "on thresholds", "tiny"])
def test_closed_testing(shape: str, m: int) -> None:
    random = np.random.default_rng(m)
    p = {
        "uniform": random.random(m),
        "small": random.random(m) ** 5,
        "tied": np.round(random.random(m), 1),
        "with 0 and 1": random.choice([0.0, 0.01, 0.3, 1.0], m),
        "on thresholds": 0.05 * random.integers(1, m + 1, m) / m,
        "tiny": 10.0 ** -random.uniform(0, 300, m),
    }[shape]
    np.testing.assert_allclose(hommel(p), closed_testing(p), rtol=4e-16)


@pytest.mark.parametrize("seed", range(30))
def test_a_p_that_equals_its_threshold_is_rejected(seed: int) -> None:
    # every hypothesis with p up to level / h is rejected, where h belongs to these p-values
    random = np.random.default_rng(seed)
    p = random.random(10) ** 3
    threshold = hommel.steps(p).thresholds(0.05)[0]
    at = int(random.integers(10))
    # h doesn't change as long as p stays on its side of level / h
    for value, expected in ((threshold, True), (threshold * (1 + 1e-9), False)):
        there = p.copy()
        there[at] = value
        h = 0.05 / hommel.steps(there).thresholds(0.05)[0]
        if h == pytest.approx(0.05 / threshold):
            assert is_rejected(hommel(there), 0.05)[at] == expected
            assert hommel.replay(there.tolist(), 0.05)["rejected"][at] == expected


def test_the_arithmetic_in_words() -> None:
    # the nine p-values of the reference file: 7 x 0.0301 / 4 = 0.052675 and so on
    p = [0.0004, 0.0081, 0.0120, 0.0190, 0.0280, 0.0301, 0.0480, 0.2100, 0.5700]
    steps = hommel.steps(p)
    assert steps.factor[0] == 9
    assert steps.arithmetic[0] == ""
    assert steps.arithmetic[1] == "Simes p of the 7 largest: 7 × 0.0301 / 4"
    assert steps.product[1] == pytest.approx(7 * 0.0301 / 4, rel=1e-15)
    assert steps.arithmetic[4] == "Simes p of the 4 largest: 4 × 0.048 / 2"
