"""All or none, against its definition."""

import numpy as np
import pytest

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.all_or_none import all_or_none


@pytest.mark.parametrize("seed", range(10))
def test_the_joint_p_is_the_largest(seed: int) -> None:
    # semantics of this project: "joint p = largest p, each member's p_family equals it"; Berger (1982)
    p = np.random.default_rng(seed).random(1 + seed) ** 5
    assert all_or_none(p).tolist() == [p.max()] * p.size


def test_one_that_misses_takes_all_with_it() -> None:
    assert is_rejected(all_or_none([0.049, 0.001, 0.03]), 0.05).tolist() == [True] * 3
    assert is_rejected(all_or_none([0.051, 0.001, 0.03]), 0.05).tolist() == [False] * 3


def test_every_adjusted_p_comes_from_the_last_rank() -> None:
    steps = all_or_none.steps([0.02, 0.04, 0.01])
    assert steps.factor.tolist() == [1, 1, 1]
    assert steps.taken_from.tolist() == [2, 2, 2]
    assert steps.thresholds(0.05).tolist() == [0.05] * 3
