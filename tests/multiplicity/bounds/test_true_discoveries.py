"""The bounds on true discoveries against closed testing over all sets, and check values."""

from itertools import product
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from beforehand.multiplicity.bounds.true_discoveries import Local, TrueDiscoveries, true_discoveries
from beforehand.multiplicity.contract import Ordered
from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.holm import holm
from beforehand.multiplicity.entries.hommel import hommel

LOCALS: list[Local] = ["simes", "bonferroni"]
SHAPES = {
    "uniform": lambda random, m: random.random(m),
    "small": lambda random, m: random.random(m) * 0.06,
    "very small": lambda random, m: random.random(m) ** 4,
    "tied": lambda random, m: np.round(random.random(m) * 0.1, 2),
    "on thresholds": lambda random, m: 0.05 * random.integers(0, m + 1, m) / random.integers(1, m + 1),
    "with 0 and 1": lambda random, m: random.choice([0.0, 0.012, 0.03, 1.0], m),
}


def local_p(p: NDArray[np.float64], local: Local) -> float:
    ascending = np.sort(p)
    quotients = p.size / np.arange(1, p.size + 1) * ascending
    return float(quotients[0] if local == "bonferroni" else np.min(quotients))


def by_closed_testing(p: NDArray[np.float64], level: float, local: Local) -> NDArray[np.int64]:
    """Give the bound of every set, by its bits: its size less that of its largest subset that isn't rejected.

    A set is rejected when every set that holds it is rejected by its local test (Goeman & Solari 2011; from memory).
    """
    m = p.size
    size = np.array([bin(bits).count("1") for bits in range(2**m)])
    members = [[i for i in range(m) if bits >> i & 1] for bits in range(2**m)]
    kept = np.array([bits > 0 and not is_rejected(local_p(p[members[bits]], local), level) for bits in range(2**m)])
    for i in range(m):  # not rejected as soon as a set with one more is not
        for bits in range(2**m):
            if not bits >> i & 1:
                kept[bits] |= kept[bits | 1 << i]
    kept[0] = True
    largest = np.where(kept, size, 0)
    for i in range(m):  # the largest such set among the subsets
        for bits in range(2**m):
            if bits >> i & 1:
                largest[bits] = max(largest[bits], largest[bits ^ 1 << i])
    found: NDArray[np.int64] = size - largest
    return found


@pytest.mark.parametrize("local", LOCALS)
@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize(("m", "seeds"), [(1, 3), (4, 10), (7, 4), (10, 1)])
def test_every_set(m: int, seeds: int, shape: str, local: Local) -> None:
    for seed, level in product(range(seeds), (0.05, 0.2)):
        p = np.minimum(SHAPES[shape](np.random.default_rng(seed), m), 1.0)
        bounds = true_discoveries(p, level=level, local=local)
        expected = by_closed_testing(p, level, local)
        for bits in range(2**m):
            assert bounds.of([i for i in range(m) if bits >> i & 1]) == expected[bits]
        top = np.cumsum(1 << Ordered.of(p).order)
        assert bounds.curve().tolist() == expected[top].tolist()


@pytest.mark.parametrize("name", ["closed-testing-nonconsonant", "closed-testing-nonconsonant-2"])
def test_reference(name: str, entry: Any) -> None:
    known = entry("bounds", name)
    p, level = known["inputs"]["p"], known["params"]["alpha"]
    bounds = true_discoveries(p, level=level)
    assert bounds.unrejected == known["expected"]["h_alpha"]
    found = [bounds.of([i - 1 for i in chosen]) for chosen in known["params"]["sets"]]
    assert found == known["expected"]["lower_bounds"]
    assert np.count_nonzero(is_rejected(hommel(p), level)) == known["expected"]["hommel_rejections"]


@pytest.mark.parametrize("seed", range(20))
def test_large_families(seed: int) -> None:
    random = np.random.default_rng(seed)
    p = random.random(3_000) ** random.integers(1, 6)
    ascending = Ordered.of(p)
    simes, bonferroni = (true_discoveries(ascending, level=0.05, local=local) for local in LOCALS)
    curve = simes.curve()
    for k in (1, 2, 10, 500, 2_999, 3_000):
        assert simes.of(ascending.order[:k]) == curve[k - 1]
        assert bonferroni.of(ascending.order[:k]) == bonferroni.curve()[k - 1]
    assert np.all(np.isin(np.diff(curve), (0, 1)))
    # Bonferroni's test is never below Simes', and one hypothesis alone is Hommel's, or Holm's, decision
    assert np.all(bonferroni.curve() <= curve)
    for bounds, procedure in ((simes, hommel), (bonferroni, holm)):
        rejected = is_rejected(procedure(p), 0.05)
        assert [bounds.of([i]) for i in range(200)] == rejected[:200].astype(int).tolist()


def test_ways_to_name_a_set() -> None:
    bounds: TrueDiscoveries = true_discoveries([0.001, 0.9, 0.002], level=0.05)
    assert bounds.of([0, 2]) == bounds.of([2, 0, 2]) == bounds.of(np.array([True, False, True])) == 2
    assert bounds.of([]) == 0
    assert true_discoveries([], level=0.05).curve().size == 0
    for wrong in ([3], [-1], [0.5]):
        with pytest.raises(ValueError, match="places from 0 to 2"):
            bounds.of(wrong)


@pytest.mark.parametrize("level", [0.0, 1.0, 5.0])
def test_what_is_no_level_is_refused(level: float) -> None:
    with pytest.raises(ValueError, match="between 0 and 1"):
        true_discoveries([0.1], level=level)
