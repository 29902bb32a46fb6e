"""Holm's procedure against values from elsewhere and against closed testing."""

from itertools import combinations
from typing import Any

import numpy as np
import pytest
from statsmodels.stats.multitest import multipletests

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.holm import holm


def test_reference(reference: Any) -> None:
    adjusted = holm(reference.p)
    assert reference.agrees(adjusted)
    if reference.rejections is not None:
        assert np.count_nonzero(is_rejected(adjusted, reference.level)) == reference.rejections


def test_base_r(r_case: Any) -> None:
    # one product each: equal to the last digit or next to it
    np.testing.assert_allclose(holm(r_case.p), r_case.adjusted, rtol=4e-16)


def test_statsmodels() -> None:
    # Only its adjusted p: its `reject` is computed on its own and differs at boundaries (its issues 764 and 768).
    p = np.random.default_rng(43).random(200) ** 3
    np.testing.assert_allclose(holm(p), multipletests(p, method="holm")[1], rtol=4e-16)


@pytest.mark.parametrize("seed", range(20))
def test_closed_testing(seed: int) -> None:
    # Holm is the closure of Bonferroni tests: adjusted p = largest |S| min p_S over all sets S that hold the
    # hypothesis (Marcus, Peritz & Gabriel 1976, Biometrika 63:655-660; from memory).
    random = np.random.default_rng(seed)
    p = np.round(random.random(7) ** 2, 2)  # with ties
    sets = [list(chosen) for size in range(1, 8) for chosen in combinations(range(7), size)]
    closed = [max(min(1.0, len(chosen) * p[chosen].min()) for chosen in sets if i in chosen) for i in range(7)]
    np.testing.assert_allclose(holm(p), closed, rtol=4e-16)


def test_missing_results_left_out_give_other_numbers(entry: Any) -> None:
    # base R's example leaves two missing p out of the count; a missing result here counts as p = 1 instead
    complete = entry("bonferroni", "R-padjust-50-bonferroni")["inputs"]["p"]
    known = entry("holm", "R-padjust-NA-holm")
    left_out = [p for p in known["inputs"]["p"] if p is not None]
    ratio = holm(left_out)[:20] / holm(complete)[:20]
    np.testing.assert_allclose(
        ratio, known["expected"]["ratio_to_complete_first20"], rtol=0, atol=known["tolerance"]["abs"]
    )
    counted = [1.0 if p is None else p for p in known["inputs"]["p"]]
    assert np.array_equal(holm(counted)[:20], holm(complete)[:20])


def test_four_endpoints(entry: Any) -> None:
    known = entry("several_procedures", "fda-four-endpoints")
    rejected = is_rejected(holm(known["inputs"]["p"]), known["params"]["alpha"])
    assert rejected.tolist() == known["expected"]["reject"]["holm"]


def test_three_against_one(entry: Any) -> None:
    known = entry("several_procedures", "demsar-2006-holm")
    steps = holm.steps(known["expected"]["p"])
    thresholds = known["params"]["alpha"] / steps.factor
    np.testing.assert_allclose(thresholds, known["expected"]["thresholds"], rtol=0, atol=known["tolerance"]["abs"])
    rejected = is_rejected(steps.adjusted, known["params"]["alpha"])
    assert np.count_nonzero(rejected) == known["expected"]["n_rejected"]


def test_ten_pairs(entry: Any) -> None:
    known = entry("several_procedures", "garcia-herrera-2008")
    adjusted = holm(known["expected"]["sorted_raw_p"])
    assert np.count_nonzero(is_rejected(adjusted, 0.05)) == known["expected"]["n_rejected"]["holm"]
