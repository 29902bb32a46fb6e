"""The step-down procedure for the share of false rejections against check values."""

from fractions import Fraction
from typing import Any

import numpy as np
import pytest

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.exceedance_step_down import exceedance_step_down
from beforehand.multiplicity.entries.holm import holm


def test_reference(entry: Any) -> None:
    known = entry("exceedance_step_down", "bh95-fdp-stepdown")
    options = {"false_share": known["params"]["gamma"], "dependence": "independence"}
    steps = exceedance_step_down.steps(known["inputs"]["p"], **options)
    thresholds = steps.thresholds(known["params"]["alpha"])
    np.testing.assert_allclose(thresholds, known["expected"]["critical_values"], rtol=0, atol=1e-12)
    rejected = is_rejected(steps.adjusted, known["params"]["alpha"])
    assert np.count_nonzero(rejected) == known["expected"]["n_rejected"]


@pytest.mark.parametrize(("m", "share", "terms"), [(15, 0.1, 2), (100, 0.1, 11), (9, 0.1, 1), (100, 0.29, 30)])
def test_the_price_of_any_dependence(m: int, share: float, terms: int) -> None:
    # 1 + 1/2 + ... + 1/(floor(g m) + 1), Lehmann & Romano (2005; from memory)
    p = np.random.default_rng(m).random(m) ** 4
    dear, cheap = (exceedance_step_down.steps(p, false_share=share, dependence=d) for d in ("any", "independence"))
    price = float(sum(Fraction(1, j) for j in range(1, terms + 1)))
    np.testing.assert_allclose(dear.factor, price * cheap.factor, rtol=1e-15)


def test_no_false_rejection_is_holm() -> None:
    p = np.random.default_rng(69).random(50) ** 3
    assert np.array_equal(exceedance_step_down(p, false_share=0.0), holm(p))


@pytest.mark.parametrize("hundredths", range(1, 100))
def test_a_share_that_no_double_holds(hundredths: int) -> None:
    # 0.29 x 100 is 28.999999999999996 in doubles
    steps = exceedance_step_down.steps(np.full(300, 0.5), false_share=hundredths / 100, dependence="independence")
    allowed = [hundredths * i // 100 + 1 for i in range(1, 301)]
    expected = [(300 + j - i) / j for i, j in zip(range(1, 301), allowed, strict=True)]
    np.testing.assert_allclose(steps.factor, expected, rtol=1e-15)
    p = (np.arange(300) / 3000).tolist()
    options = {"false_share": hundredths / 100, "dependence": "any"}
    np.testing.assert_allclose(
        exceedance_step_down.replay(p, 0.05, **options)["adjusted"], exceedance_step_down(p, **options), rtol=2e-15
    )


def test_thirds() -> None:
    steps = exceedance_step_down.steps(np.full(6, 0.5), false_share=1 / 3, dependence="independence")
    assert steps.factor.tolist() == [6, 5, 2.5, 2, 1.5, 1]


@pytest.mark.parametrize("share", [-0.1, 1.0, float("nan")])
def test_what_is_no_share_is_refused(share: float) -> None:
    with pytest.raises(ValueError, match="from 0 to below 1"):
        exceedance_step_down([0.1], false_share=share)
