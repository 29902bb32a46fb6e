"""Success of a family by several rejections: its joint p, and the error that it keeps."""

import numpy as np
import pytest
from scipy.stats import binom

from beforehand.multiplicity.success import success

ALL = np.full(3, True)


@pytest.mark.parametrize(
    ("at_least", "p", "reached"),
    # by hand: (m - r + 1) x p_(r)
    [(1, 0.03, True), (2, 0.04, True), (3, 0.06, False)],
)
def test_the_joint_p(at_least: int, p: float, reached: bool) -> None:
    found = success(np.array([0.02, 0.06, 0.01]), ALL, at_least=at_least, level=0.05)
    assert found.p == pytest.approx(p)
    assert found.reached == reached
    assert found.level == 0.05


def test_a_finding_of_harm_and_a_missing_result_do_not_count() -> None:
    found = success(np.array([0.001, 0.001, 0.01]), np.array([False, True, True]), at_least=2, level=0.05)
    assert found.p == pytest.approx(0.02)
    assert success(np.array([0.001, 0.001, 0.01]), np.array([False, False, True]), at_least=2, level=0.05).p == 1.0


def test_behind_a_closed_gate_nothing_is_reached() -> None:
    assert not success(np.zeros(3), ALL, at_least=1, level=0.0).reached


def test_two_of_three_with_one_real_effect() -> None:
    # the configuration of which the design says that counting unadjusted rejections errs in 9.75 % = 1 - .95^2
    random, studies, level = np.random.default_rng(20320201), 4000, 0.05
    p = random.random((studies, 3))
    p[:, 0] = 1e-12
    errors = sum(success(one, ALL, at_least=2, level=level).reached for one in p)
    naive = int((np.count_nonzero(p <= level, axis=1) >= 2).sum())
    # two true nulls, Bonferroni among them: 1 - (1 - .025)^2; bounds that a right program leaves once in 10,000 seeds
    lower, upper = binom.ppf([5e-5, 1 - 5e-5], studies, 1 - 0.975**2)
    assert lower <= errors <= upper
    assert naive > upper
