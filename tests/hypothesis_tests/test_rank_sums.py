"""Distributions of rank sums, both routes, against tables and each other."""

import math

import numpy as np
import pytest

from beforehand.hypothesis_tests import rank_sums, rank_sums_again


def test_sums_of_three_out_of_five() -> None:
    # the ten subsets of {1, ..., 5} of size 3, written down: sums 6 7 8 8 9 9 10 10 11 12
    found = rank_sums.of_subsets(2 * np.arange(1, 6), 3)
    sums = [6, 7, 8, 8, 9, 9, 10, 10, 11, 12]
    for value in range(6, 13):
        assert found.above(2 * value) == pytest.approx(sum(s >= value for s in sums) / 10)
        assert found.below(2 * value) == pytest.approx(sum(s <= value for s in sums) / 10)


def test_sums_of_signs_of_three() -> None:
    # the eight subsets of {1, 2, 3}: sums 0 1 2 3 3 4 5 6
    found = rank_sums.of_signs(2 * np.arange(1, 4))
    sums = [0, 1, 2, 3, 3, 4, 5, 6]
    for value in range(7):
        assert found.above(2 * value) == sum(s >= value for s in sums) / 8


def test_printed_critical_values() -> None:
    # tables of the rank sum and of the signed rank sum, one-sided 5 % (any textbook; from memory):
    # U <= 27 for 10 and 10, W <= 60 for 20
    two = rank_sums.of_subsets(2 * np.arange(1, 21), 10)
    assert two.below(2 * (27 + 55)) <= 0.05 < two.below(2 * (28 + 55))
    one = rank_sums.of_signs(2 * np.arange(1, 21))
    assert one.below(2 * 60) <= 0.05 < one.below(2 * 61)


@pytest.mark.parametrize("seed", range(10))
def test_both_routes_count_the_same(seed: int) -> None:
    random = np.random.default_rng(seed)
    ranks = np.sort(random.integers(2, 40, int(random.integers(3, 25))))
    size = int(random.integers(1, ranks.size))
    plain = tuple(ranks.tolist())
    for first, again in (
        (rank_sums.of_subsets(ranks, size), rank_sums_again.subsets(plain, size)),
        (rank_sums.of_signs(ranks), rank_sums_again.signs(plain)),
    ):
        assert sum(again.ways) == again.total
        reachable = first.smallest + first.step * np.arange(first.share.size)
        for observed in reachable[:: max(1, reachable.size // 20)].tolist():
            assert first.above(observed) == pytest.approx(again.above(observed), rel=1e-12)
            assert first.below(observed) == pytest.approx(again.below(observed), rel=1e-12)


def test_all_ranks_tied() -> None:
    found = rank_sums.of_subsets(np.full(6, 7), 2)
    assert (found.above(14), found.below(14)) == (1, 1)


def test_tails_keep_their_digits() -> None:
    n = 60
    found = rank_sums.of_subsets(2 * np.arange(1, 2 * n + 1), n)
    largest = sum(range(n + 1, 2 * n + 1))
    assert found.above(2 * largest) == pytest.approx(1 / math.comb(2 * n, n), rel=1e-12)
    assert found.above(2 * largest - 2) == pytest.approx(2 / math.comb(2 * n, n), rel=1e-12)
