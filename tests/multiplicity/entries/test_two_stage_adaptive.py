"""The two-stage adaptive procedure against the paper's example, its two stages at every level, and statsmodels."""

from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from statsmodels.stats.multitest import multipletests

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.benjamini_hochberg import benjamini_hochberg
from beforehand.multiplicity.entries.two_stage_adaptive import two_stage_adaptive


def test_the_example_of_the_paper(entry: Any) -> None:
    known = entry("two_stage_adaptive", "bky06-two-stage-bh95")
    p, level = known["inputs"]["p"], known["params"]["alpha"]
    steps = two_stage_adaptive.steps(p)
    assert np.count_nonzero(is_rejected(steps.adjusted, level)) == known["expected"]["n_rejected"]
    # thresholds are (level of stage 2) x rank / m
    found = steps.thresholds(level)[-1]
    assert found == pytest.approx(known["expected"]["stage2_level"], abs=known["tolerance"]["abs"])


def test_nothing_rejected_at_stage_1(entry: Any) -> None:
    # the adjusted values of that entry hold for stage 1 at 0.05 alone; the decision is the same
    known = entry("two_stage_adaptive", "bky06-none-rejected")
    rejected = is_rejected(two_stage_adaptive(known["inputs"]["p"]), known["params"]["alpha"])
    assert np.count_nonzero(rejected) == known["expected"]["n_rejected"]


def two_stages(p: NDArray[np.float64], level: float) -> NDArray[np.bool_]:
    """Benjamini, Krieger & Yekutieli (2006), definition 6, by the adjusted p of the one-stage procedure."""
    t, adjusted = level / (1 + level), benjamini_hochberg(p)
    first = np.count_nonzero(is_rejected(adjusted, t))
    if first in (0, p.size):
        return np.full(p.size, first > 0)
    return is_rejected(adjusted, t * p.size / (p.size - first))


@pytest.mark.parametrize("shape", ["uniform", "few effects", "many effects", "tied"])
@pytest.mark.parametrize("m", [1, 2, 5, 15, 60])
def test_the_adjusted_p_is_the_smallest_level_that_rejects(m: int, shape: str) -> None:
    random = np.random.default_rng(m)
    for _ in range(15):
        p = {
            "uniform": random.random(m),
            "few effects": np.where(random.random(m) < 0.2, random.random(m) ** 8, random.random(m)),
            "many effects": random.random(m) ** 5,
            "tied": np.round(random.random(m) ** 2, 1),
        }[shape]
        adjusted = two_stage_adaptive(p)
        for value in set(adjusted[(adjusted > 0) & (adjusted < 1)].tolist()):
            assert np.array_equal(two_stages(p, value * (1 + 1e-9)), adjusted <= value * (1 + 1e-9))
            assert np.array_equal(two_stages(p, value * (1 - 1e-9)), adjusted <= value * (1 - 1e-9))


@pytest.mark.parametrize("level", [0.01, 0.05, 0.1, 0.2])
def test_statsmodels(level: float) -> None:
    # Only its decisions: its adjusted p are those of one level. Without `maxiter`, which does the opposite of its
    # description. No p-value here lies on a boundary, where its decisions follow other roundings.
    for seed in range(30):
        p = np.random.default_rng(seed).random(50) ** (1 + seed % 5)
        theirs = multipletests(p, alpha=level, method="fdr_tsbky")[0]
        assert np.array_equal(is_rejected(two_stage_adaptive(p), level), theirs)


def test_the_arithmetic_in_words() -> None:
    # of 10 the first 9 have 0.009 x 10/9 = 0.01 at stage 1: they fall at t = 0.01, where stage 2 has the level 10 t;
    # that is enough for 0.06, and for 0.5 from t = 0.05 on
    for last, words, t in (
        (0.06, "t = 0.01, from which stage 1 rejects 9; t / (1 − t)", 0.01),
        (0.5, "t = 0.5 × 1/10; t / (1 − t)", 0.05),
    ):
        steps = two_stage_adaptive.steps([*[0.009] * 9, last])
        assert steps.arithmetic[9] == words
        np.testing.assert_allclose(steps.product, [*[0.01 / 0.99] * 9, t / (1 - t)], rtol=1e-14)


def test_it_can_be_below_p() -> None:
    assert two_stage_adaptive([*[0.0001] * 9, 0.5])[-1] < 0.06


def test_all_rejected_at_stage_1() -> None:
    p = [0.001, 0.002, 0.003]
    assert two_stage_adaptive.steps(p).thresholds(0.05).tolist() == [1, 1, 1]
    assert two_stage_adaptive.replay(p, 0.05)["rejected"] == [True] * 3
