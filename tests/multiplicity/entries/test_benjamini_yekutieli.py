"""Benjamini and Yekutieli's procedure against values from elsewhere."""

from typing import Any

import numpy as np
from scipy.stats import false_discovery_control
from statsmodels.stats.multitest import multipletests

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.benjamini_yekutieli import benjamini_yekutieli


def test_reference(reference: Any) -> None:
    adjusted = benjamini_yekutieli(reference.p)
    assert reference.agrees(adjusted)
    if reference.rejections is not None:
        assert np.count_nonzero(is_rejected(adjusted, reference.level)) == reference.rejections


def test_base_r(r_case: Any) -> None:
    # a sum, a quotient and two products each, in any order
    np.testing.assert_allclose(benjamini_yekutieli(r_case.p), r_case.adjusted, rtol=2e-15)


def test_second_opinions() -> None:
    # statsmodels: only its adjusted p, for its `reject` is computed on its own; both accept no missing values here.
    p = np.random.default_rng(61).random(200) ** 3
    adjusted = benjamini_yekutieli(p)
    np.testing.assert_allclose(adjusted, multipletests(p, method="fdr_by")[1], rtol=2e-15)
    np.testing.assert_allclose(adjusted, false_discovery_control(p, method="by"), rtol=2e-15)


def test_the_price(entry: Any) -> None:
    known = entry("benjamini_yekutieli", "by-harmonic")
    found = [benjamini_yekutieli.steps(np.ones(m)).factor[-1] for m in known["inputs"]["m"]]
    np.testing.assert_allclose(found, known["expected"]["c"], rtol=0, atol=known["tolerance"]["abs"])
