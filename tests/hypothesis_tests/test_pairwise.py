"""The k-th pairwise sum, both routes, against sorting all of them."""

import numpy as np
import pytest

from beforehand.hypothesis_tests.pairwise import PairwiseSums
from beforehand.hypothesis_tests.rank_sums_again import Sums


@pytest.mark.parametrize("decimals", [0, 1, 15])
@pytest.mark.parametrize("sizes", [(1, 1), (1, 7), (6, 1), (13, 9), (30, 41)])
def test_differences(sizes: tuple[int, int], decimals: int) -> None:
    random = np.random.default_rng(26)
    first, second = (np.round(random.normal(3, 2, n), decimals) for n in sizes)
    ascending = np.sort(np.subtract.outer(first, second), axis=None)
    sums = PairwiseSums.of_differences(first, second)
    again = Sums(np.sort(first), np.sort(-second), np.zeros(sizes[0], dtype=np.intp))
    assert sums.size == ascending.size
    for k in {1, 2, ascending.size // 3, ascending.size} - {0}:
        if k <= ascending.size:
            # decimals: which of two doubles of one difference comes is left open to the last digits
            assert sums.kth(k) == pytest.approx(ascending[k - 1], abs=1e-13)
            assert again.kth(k) == sums.kth(k)
    assert sums.median() == again.median() == pytest.approx(np.median(ascending), abs=1e-13)


@pytest.mark.parametrize("decimals", [0, 1, 15])
@pytest.mark.parametrize("size", [1, 2, 9, 40])
def test_sums_of_one_sample(size: int, decimals: int) -> None:
    values = np.sort(np.round(np.random.default_rng(27).normal(0, 2, size), decimals))
    ascending = np.sort(np.add.outer(values, values)[np.triu_indices(size)])
    sums, again = PairwiseSums.of_sample(values), Sums(values, values, np.arange(size))
    assert sums.size == ascending.size
    for k in range(1, ascending.size + 1, 1 + ascending.size // 17):
        assert sums.kth(k) == pytest.approx(ascending[k - 1], abs=1e-13)
        assert again.kth(k) == sums.kth(k)


def test_many_sums_need_little_memory() -> None:
    # 4e8 differences of whole numbers: the counts are known
    sums = PairwiseSums.of_differences(np.arange(20_000.0), np.arange(20_000.0))
    assert sums.median() == 0
    assert sums.kth(1) == -19_999
    assert sums.kth(sums.size - 1) == 19_998
