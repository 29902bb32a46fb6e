"""Unadjusted p-values stay what they are, and say loudly that nothing was done."""

import numpy as np

from beforehand.multiplicity.contract import FDR, FWER
from beforehand.multiplicity.entries.unadjusted import unadjusted


def test_nothing_changes() -> None:
    p = np.random.default_rng(53).random(50)
    assert np.array_equal(unadjusted(p), p)


def test_it_says_so() -> None:
    assert "NOT ADJUSTED" in unadjusted.title
    assert "NOTHING IS ADJUSTED" in (unadjusted.adjust.__doc__ or "")


def test_it_keeps_no_promise_about_a_family() -> None:
    assert unadjusted.keeps("per_comparison_error_rate")
    assert not unadjusted.keeps(FWER)
    assert not unadjusted.keeps(FDR)
