"""Which procedure is never stricter than which."""

import os
from itertools import pairwise

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from beforehand.multiplicity.entries.benjamini_hochberg import benjamini_hochberg
from beforehand.multiplicity.entries.bonferroni import bonferroni
from beforehand.multiplicity.entries.holm import holm
from beforehand.multiplicity.entries.unadjusted import unadjusted


@settings(derandomize=True, deadline=None, max_examples=5000 if os.environ.get("BEFOREHAND_THOROUGH") else 200)
@given(st.lists(st.floats(0, 1), min_size=1, max_size=40))
def test_from_the_mildest_to_the_strictest(p: list[float]) -> None:
    # m / i <= m - i + 1 <= m at every rank i, and rounding keeps the order: no tolerance is needed
    adjusted = [procedure(p) for procedure in (unadjusted, benjamini_hochberg, holm, bonferroni)]
    for milder, stricter in pairwise(adjusted):
        assert np.all(milder <= stricter)
