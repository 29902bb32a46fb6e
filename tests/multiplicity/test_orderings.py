"""Which procedure is never stricter than which."""

import os
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from multiplicity.given import options_for

from beforehand.multiplicity.contract import PROCEDURES

# Each of a pair rejects whatever the next one does. In the chain from `unadjusted` to `bonferroni` each rank's factors
# are in order, and rounding keeps that; beside it, equal values may be reached by other quotients.
# Below the smallest normal number no quotient has its digits.
CHAINS = [
    ("unadjusted", "benjamini_hochberg", "holm", "bonferroni"),
    ("unadjusted", "sidak", "bonferroni"),
    ("holm_sidak", "holm"),
    ("hochberg", "holm"),
    ("benjamini_hochberg", "benjamini_yekutieli"),
]
NEARLY = [
    ("benjamini_hochberg", "hommel", "hochberg"),
    ("holm_sidak", "sidak"),
    ("lehmann_romano", "holm"),
    ("storey_q", "benjamini_hochberg"),
]


@pytest.mark.parametrize(
    ("chain", "rounding"), [(chain, 0.0) for chain in CHAINS] + [(chain, 4e-16) for chain in NEARLY]
)
@settings(derandomize=True, deadline=None, max_examples=5000 if os.environ.get("BEFOREHAND_THOROUGH") else 200)
@given(p=st.lists(st.floats(0, 1, allow_subnormal=False), min_size=1, max_size=40))
def test_from_the_mildest_to_the_strictest(chain: tuple[str, ...], rounding: float, p: list[float]) -> None:
    adjusted = [PROCEDURES[name](p, **options_for(PROCEDURES[name])) for name in chain]
    for milder, stricter in pairwise(adjusted):
        assert np.all(milder <= stricter * (1 + rounding))
