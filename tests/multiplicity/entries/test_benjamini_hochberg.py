"""Benjamini and Hochberg's procedure against values from elsewhere."""

from typing import Any

import numpy as np
from scipy.stats import false_discovery_control
from statsmodels.stats.multitest import multipletests

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.benjamini_hochberg import benjamini_hochberg


def test_reference(reference: Any) -> None:
    adjusted = benjamini_hochberg(reference.p)
    assert reference.agrees(adjusted)
    if reference.rejections is not None:
        assert np.count_nonzero(is_rejected(adjusted, reference.level)) == reference.rejections


def test_base_r(r_case: Any) -> None:
    # a quotient and a product each, in either order
    np.testing.assert_allclose(benjamini_hochberg(r_case.p), r_case.adjusted, rtol=1e-15)


def test_second_opinions() -> None:
    # statsmodels: only its adjusted p, for its `reject` is computed on its own; both accept no missing values here.
    p = np.random.default_rng(47).random(200) ** 3
    adjusted = benjamini_hochberg(p)
    np.testing.assert_allclose(adjusted, multipletests(p, method="fdr_bh")[1], rtol=1e-15)
    np.testing.assert_allclose(adjusted, false_discovery_control(p, method="bh"), rtol=1e-15)


def test_missing_results_left_out_give_other_numbers(entry: Any) -> None:
    # base R's example leaves two missing p out of the count; a missing result here counts as p = 1 instead
    complete = entry("bonferroni", "R-padjust-50-bonferroni")["inputs"]["p"]
    known = entry("benjamini_hochberg", "R-padjust-NA-bh")
    left_out = [p for p in known["inputs"]["p"] if p is not None]
    ratio = benjamini_hochberg(left_out)[:20] / benjamini_hochberg(complete)[:20]
    np.testing.assert_allclose(
        ratio, known["expected"]["ratio_to_complete_first20"], rtol=0, atol=known["tolerance"]["abs"]
    )
    counted = [1.0 if p is None else p for p in known["inputs"]["p"]]
    assert np.array_equal(benjamini_hochberg(counted)[:20], benjamini_hochberg(complete)[:20])
