"""Separate promises: nobody waits for anybody, and there is no study level."""

import numpy as np

from beforehand.multiplicity.across.separate import separate
from beforehand.multiplicity.scheme import FamilyResult


def test_each_family_at_its_own_level() -> None:
    families = [
        FamilyResult(
            id=name,
            p_family=np.array([0.04, 0.04, 1.0]),
            has_result=np.array([True, True, False]),
            against_claim=np.array([False, True, False]),
            level=level,
        )
        for name, level in (("wear", 0.025), ("noise", 0.05))
    ]
    wear, noise = separate(families)
    assert wear.states == ("not_rejected", "not_rejected", "no_result")
    assert noise.states == ("rejected", "rejected_against_claim", "no_result")
    assert wear.tested
    assert noise.tested
    assert np.isnan(noise.p_study).all()
    assert noise.decides == ("p_family", "p_family", "")
    assert np.array_equal(noise.threshold, [0.05, 0.05, np.nan], equal_nan=True)
