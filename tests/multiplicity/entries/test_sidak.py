"""Šidák's adjustment against values from elsewhere and against fifty digits."""

from decimal import Decimal, localcontext
from typing import Any

import numpy as np
import pytest
from statsmodels.stats.multitest import multipletests

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.bonferroni import bonferroni
from beforehand.multiplicity.entries.sidak import sidak


def test_reference(reference: Any) -> None:
    adjusted = sidak(reference.p)
    assert reference.agrees(adjusted)
    if reference.rejections is not None:
        assert np.count_nonzero(is_rejected(adjusted, reference.level)) == reference.rejections


def test_statsmodels() -> None:
    # Only its adjusted p: its `reject` is computed on its own and differs at 112 of 232 boundaries. p = 1, at which it
    # warns, is left out.
    p = np.random.default_rng(53).random(200) ** 3
    np.testing.assert_allclose(sidak(p), multipletests(p, method="sidak")[1], rtol=1e-15)


@pytest.mark.parametrize("m", [1, 2, 7, 1_000])
@pytest.mark.parametrize("value", [1e-300, 1e-17, 1e-9, 0.0123, 0.5, 1 - 2**-53, 1.0])
def test_no_digit_is_lost(value: float, m: int) -> None:
    # 1 - (1 - p)^m computed as it is written gives 0 for every p below 1e-16
    with localcontext() as exactly:
        exactly.prec = 400
        expected = 1 - (1 - Decimal(value)) ** m
    p = [value] * m
    assert sidak(p)[0] == pytest.approx(float(expected), rel=2e-15)
    assert sidak.replay(p, 0.05)["adjusted"][0] == pytest.approx(float(expected), rel=1e-14)


def test_thresholds(entry: Any) -> None:
    known = entry("sidak", "sidak-constants")
    found = [sidak.steps(np.full(m, 0.5)).thresholds(known["params"]["alpha"])[0] for m in known["inputs"]["m"]]
    np.testing.assert_allclose(found, known["expected"]["level"], rtol=0, atol=known["tolerance"]["abs"])


def test_the_arithmetic_in_words() -> None:
    steps = sidak.steps([0.0123, 0.5, 1, 1, 1, 1, 1])
    assert steps.arithmetic[0] == "1 − (1 − 0.0123)^7"
    assert len(steps.arithmetic[:2]) == 2
    assert steps.product[0] == pytest.approx(1 - (1 - 0.0123) ** 7, rel=1e-12)


def test_never_stricter_than_bonferroni() -> None:
    p = np.random.default_rng(54).random(10_000) ** 20
    assert np.all(sidak(p) <= bonferroni(p))


def test_one_hypothesis_needs_no_adjustment() -> None:
    p = np.random.default_rng(55).random(1_000)
    assert [sidak([value])[0] for value in p] == p.tolist()
