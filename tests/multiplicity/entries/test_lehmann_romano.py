"""Lehmann and Romano's procedure for k or more false rejections against check values and its single steps."""

from typing import Any

import numpy as np
import pytest

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.holm import holm
from beforehand.multiplicity.entries.lehmann_romano import lehmann_romano


def test_reference(entry: Any) -> None:
    known = entry("lehmann_romano", "bh95-kfwer-stepdown")
    steps = lehmann_romano.steps(known["inputs"]["p"], false_rejections=known["params"]["k"])
    thresholds = steps.thresholds(known["params"]["alpha"])
    np.testing.assert_allclose(thresholds, known["expected"]["critical_values"], rtol=0, atol=1e-12)
    rejected = is_rejected(steps.adjusted, known["params"]["alpha"])
    assert np.count_nonzero(rejected) == known["expected"]["n_rejected"]


def test_one_is_holm() -> None:
    p = np.random.default_rng(68).random(50) ** 3
    assert np.array_equal(lehmann_romano(p, false_rejections=1), holm(p))


@pytest.mark.parametrize("k", [1, 2, 3])
@pytest.mark.parametrize("seed", range(5))
def test_steps_of_single_step_tests(seed: int, k: int) -> None:
    # Romano & Wolf (2007, Annals of Statistics 35:1378-1408; from memory): at each step the single-step threshold
    # k a / |K|, where K is what is left and k - 1 of the rejected ones, among which there may be k - 1 errors
    p, level = np.random.default_rng(seed).random(8) ** 3, 0.2
    rejected: set[int] = set()
    while True:
        left = set(range(8)) - rejected
        threshold = min(level, k * level / (len(left) + min(k - 1, len(rejected)))) if left else 0.0
        more = {i for i in left if p[i] <= threshold}
        if not more:
            break
        rejected |= more
    found = set(np.flatnonzero(is_rejected(lehmann_romano(p, false_rejections=k), level)).tolist())
    assert found == rejected


def test_fewer_hypotheses_than_false_rejections() -> None:
    p = [0.01, 0.04]
    assert lehmann_romano(p, false_rejections=3).tolist() == p
    assert lehmann_romano.replay(p, 0.02, false_rejections=3)["rejected"] == [True, False]


def test_none_to_allow_is_refused() -> None:
    with pytest.raises(ValueError, match="at least 1"):
        lehmann_romano([0.1], false_rejections=0)
