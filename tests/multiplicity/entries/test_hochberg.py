"""Hochberg's procedure against values from elsewhere."""

from typing import Any

import numpy as np
from statsmodels.stats.multitest import multipletests

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.hochberg import hochberg


def test_reference(reference: Any) -> None:
    adjusted = hochberg(reference.p)
    assert reference.agrees(adjusted)
    if reference.rejections is not None:
        assert np.count_nonzero(is_rejected(adjusted, reference.level)) == reference.rejections


def test_base_r(r_case: Any) -> None:
    # one product each: equal to the last digit or next to it
    np.testing.assert_allclose(hochberg(r_case.p), r_case.adjusted, rtol=4e-16)


def test_statsmodels() -> None:
    # Only its adjusted p: its `reject` is computed on its own and differs at boundaries (its issues 764 and 768).
    p = np.random.default_rng(59).random(200) ** 3
    np.testing.assert_allclose(hochberg(p), multipletests(p, method="simes-hochberg")[1], rtol=4e-16)


def test_four_endpoints(entry: Any) -> None:
    known = entry("several_procedures", "fda-four-endpoints")
    rejected = is_rejected(hochberg(known["inputs"]["p"]), known["params"]["alpha"])
    assert rejected.tolist() == known["expected"]["reject"]["hochberg"]
