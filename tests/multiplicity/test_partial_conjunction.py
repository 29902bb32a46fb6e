"""Partial conjunction p-values against their definition: every way in which fewer than r nulls can be false."""

from itertools import combinations

import numpy as np
import pytest

from beforehand.multiplicity.combination import bonferroni, fisher, simes
from beforehand.multiplicity.partial_conjunction import COMBINE, partial_conjunction


@pytest.mark.parametrize("by", COMBINE)
@pytest.mark.parametrize("seed", range(5))
def test_the_largest_over_all_sets_of_true_nulls(seed: int, by: str) -> None:
    # at most r - 1 false: at least some m - r + 1 nulls are all true, so every such set has to be rejected
    # (Benjamini & Heller 2008; from memory)
    p = np.random.default_rng(seed).random(7) ** 3
    for r in range(1, 8):
        sets = combinations(range(7), 7 - r + 1)
        expected = max(COMBINE[by](p[list(chosen)]).p for chosen in sets)  # type: ignore[arg-type]
        assert partial_conjunction(p, at_least=r, by=by).p == pytest.approx(expected, rel=1e-14)  # type: ignore[arg-type]


def test_the_form_that_semantics_names() -> None:
    # (m - r + 1) p_(r), valid under any dependence: the joint p of "at least r of m"
    p = [0.2, 0.004, 0.03, 0.01]
    assert [partial_conjunction(p, at_least=r).p for r in range(1, 5)] == pytest.approx([0.016, 0.03, 0.06, 0.2])
    assert partial_conjunction(p, at_least=2).valid_under == "any dependence"
    assert "fewer than 2 of 4" in partial_conjunction(p, at_least=2).null


def test_one_of_all_is_the_global_test() -> None:
    p = np.random.default_rng(8).random(6)
    for by, combine in (("bonferroni", bonferroni), ("simes", simes), ("fisher", fisher)):
        assert partial_conjunction(p, at_least=1, by=by).p == combine(p).p  # type: ignore[arg-type]


@pytest.mark.parametrize("r", [0, 4])
def test_what_can_not_be_shown_is_refused(r: int) -> None:
    with pytest.raises(ValueError, match="from 1 to 3"):
        partial_conjunction([0.1, 0.2, 0.3], at_least=r)
