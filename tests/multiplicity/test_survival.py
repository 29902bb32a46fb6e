"""The largest family with which a claim survives, against closed forms where they hold."""

from collections.abc import Callable
from fractions import Fraction
from math import floor

import numpy as np
import pytest
from multiplicity.given import options_for

from beforehand.multiplicity.contract import PROCEDURES
from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.survival import LARGEST_TRIED, can_grow, largest_families, largest_family

LEVEL = 0.05
A = Fraction(LEVEL) * (1 + Fraction(1, 10**12))  # with the tolerance of the decision


def bonferroni(p: list[float], rank: int) -> int:
    return floor(A / Fraction(p[rank]))


def holm(p: list[float], rank: int) -> int:
    # ranks from 1: min over j <= r of floor(a / p_(j)) + j - 1 (semantics of this project; by Holm's thresholds)
    return min(floor(A / Fraction(p[j])) + j for j in range(rank + 1))


def benjamini_hochberg(p: list[float], rank: int) -> int:
    # survives with M as long as some p_(j), j >= r, meets j a / M
    return max(floor((j + 1) * A / Fraction(p[j])) for j in range(rank, len(p)) if p[j] < 1)


CLOSED: dict[str, Callable[[list[float], int], int]] = {
    "bonferroni": bonferroni,
    "holm": holm,
    "benjamini_hochberg": benjamini_hochberg,
}


@pytest.mark.parametrize("seed", range(8))
@pytest.mark.parametrize("name", CLOSED)
def test_closed_forms(name: str, seed: int) -> None:
    random = np.random.default_rng(seed)
    p = np.concatenate([10.0 ** random.uniform(-6.5, -1.5, 9), [0.0005, 0.0005], random.random(9)])
    random.shuffle(p)
    ascending = np.sort(p).tolist()
    rejected = is_rejected(PROCEDURES[name](p), LEVEL)
    found = largest_families(PROCEDURES[name], p, level=LEVEL)
    for index, value in enumerate(p):
        expected = CLOSED[name](ascending, ascending.index(value)) if rejected[index] else 0
        assert found[index] == min(expected, LARGEST_TRIED)
        assert largest_family(PROCEDURES[name], p, index, level=LEVEL) == found[index]


@pytest.mark.parametrize("name", [name for name in PROCEDURES if can_grow(PROCEDURES[name])])
def test_one_more_would_be_one_too_many(name: str) -> None:
    p = [0.001, 0.02, 0.004, 0.9, 0.012]
    options = options_for(PROCEDURES[name])
    for index, size in enumerate(largest_families(PROCEDURES[name], p, level=LEVEL, **options)):
        if 0 < size < LARGEST_TRIED:
            for m, expected in ((size, True), (size + 1, False)):
                grown = [*p, *[1.0] * (int(m) - len(p))]
                assert is_rejected(PROCEDURES[name](grown, **options), LEVEL)[index] == expected


def test_all_or_none_allows_no_further_hypothesis() -> None:
    found = largest_families(PROCEDURES["all_or_none"], [0.01, 0.02, 0.001], level=LEVEL)
    assert found.tolist() == [3, 3, 3]


def test_nothing_is_lost_without_adjustment() -> None:
    found = largest_families(PROCEDURES["unadjusted"], [0.01, 0.2], level=LEVEL)
    assert found.tolist() == [LARGEST_TRIED, 0]


def test_a_p_of_zero_survives_everything() -> None:
    assert largest_family(PROCEDURES["holm"], [0.0, 0.5], 0, level=LEVEL) == LARGEST_TRIED


def test_a_family_that_is_larger_itself() -> None:
    p = np.ones(LARGEST_TRIED + 5)
    p[3] = 1e-9
    assert largest_family(PROCEDURES["bonferroni"], p, 3, level=LEVEL) == LARGEST_TRIED + 5
