"""Simes' test of the i largest p-values, against the definition for every i."""

import numpy as np
import pytest
from numpy.typing import NDArray

from beforehand.multiplicity.simes import largest_sets


def by_definition(p: NDArray[np.float64]) -> NDArray[np.float64]:
    m = p.size
    return np.array([np.min(i / np.arange(1, i + 1) * p[m - i :]) for i in range(1, m + 1)])


SHAPES = {
    "uniform": lambda random, m: random.random(m),
    "small": lambda random, m: random.random(m) ** 6,
    "tied": lambda random, m: np.round(random.random(m), 2),
    "many zeros": lambda random, m: np.where(random.random(m) < 0.4, 0.0, random.random(m)),
    "every point on the hull": lambda random, m: (np.arange(1, m + 1) / m) ** 2,
    "all on one line": lambda random, m: 0.05 * np.arange(1, m + 1) / m,
    "on a line that starts late": lambda random, m: np.maximum(0.0, np.arange(1, m + 1) - m // 3) * 1e-4,
    "over 300 powers of ten": lambda random, m: 10.0 ** -random.uniform(0, 300, m),
    "equal": lambda random, m: np.full(m, 0.03),
}


@pytest.mark.parametrize("m", [1, 2, 3, 10, 100, 2_000])
@pytest.mark.parametrize("shape", SHAPES)
def test_every_size_of_set(shape: str, m: int) -> None:
    for seed in range(3 if m == 2_000 else 20):
        p = np.sort(SHAPES[shape](np.random.default_rng(seed), m))
        found = largest_sets(p)
        # a quotient and a product on either side
        np.testing.assert_allclose(found.p, by_definition(p), rtol=5e-16)
        assert np.all(np.diff(found.p) <= 0)
        sizes = np.arange(1, m + 1)
        np.testing.assert_allclose(sizes / (found.rank + 1 - (m - sizes)) * p[found.rank], found.p, rtol=5e-16)


def test_the_largest_set_that_is_not_rejected() -> None:
    # 3 largest: min(3 x 0.04, 3/2 x 0.05, 0.06) = 0.06; all 4: min(4 x 0.001, ...) = 0.004
    sets = largest_sets(np.array([0.001, 0.04, 0.05, 0.06]))
    assert sets.unrejected(0.05) == 3
    assert sets.unrejected(0.003) == 4
    assert sets.unrejected(0.06) == 0
