"""Facts that everybody in the trade can say without looking up: common practice, no source."""

from math import comb

import numpy as np
import pytest

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.bonferroni import bonferroni
from beforehand.multiplicity.entries.holm import holm
from beforehand.multiplicity.entries.unadjusted import unadjusted
from beforehand.multiplicity.unadjusted_error import unadjusted_error


def test_a_hundred_tests_at_five_per_cent() -> None:
    assert (0.05 / bonferroni.steps(np.ones(100)).factor).tolist() == [0.0005] * 100
    for p, expected in ((0.0005, True), (0.000501, False)):
        assert is_rejected(bonferroni([p, *[1.0] * 99]), 0.05)[0] == expected


def test_five_hundred_nulls_expect_twenty_five_errors() -> None:
    evenly_spread = (np.arange(500) + 0.5) / 500
    assert np.count_nonzero(is_rejected(unadjusted(evenly_spread), 0.05)) == 25


def test_five_groups_make_ten_pairs() -> None:
    pairs = comb(5, 2)
    assert pairs == 10
    assert bonferroni([0.005, *[1.0] * (pairs - 1)])[0] == pytest.approx(0.05, rel=1e-15)


def test_the_smallest_holm_value_is_the_bonferroni_value() -> None:
    p = np.random.default_rng(59).random(37) ** 3
    assert holm(p).min() == bonferroni(p).min()


@pytest.mark.parametrize("m", [1, 2, 5, 14, 20, 100])
def test_family_wise_error_of_independent_tests(m: int) -> None:
    # no digit of 1 - 0.95^m is lost at this level, so the plain formula is the reference
    assert unadjusted_error(m, level=0.05).independent == pytest.approx(1 - 0.95**m, rel=1e-14)
