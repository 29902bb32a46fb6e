"""Shares of the level: each family at its own part of it, and nothing moves."""

from typing import Any

import pytest

from beforehand.multiplicity.across.shares import shares


def test_each_family_at_its_share(family: Any) -> None:
    # by hand: 0.8 and 0.2 of 0.05 are 0.04 and 0.01
    given = {"energy": 0.8, "frost": "1/5"}
    energy, frost = shares([family("energy", 0.04, 0.041), family("frost", 0.01, 0.0101, None, 0.3)], shares=given)
    assert energy.states == ("rejected", "not_rejected")
    assert frost.states == ("rejected", "not_rejected", "no_result", "not_rejected")
    assert energy.p_study == pytest.approx([0.05, 0.05125])
    assert frost.p_study == pytest.approx([0.05, 0.0505, 1.0, 1.0])
    assert (energy.local_level, frost.local_level) == pytest.approx((0.04, 0.01))
    assert energy.tested
    assert frost.tested
    assert frost.threshold[:2].tolist() == [0.05, 0.05]
    assert frost.decides == ("p_study", "p_study", "", "p_study")


def test_a_finding_of_harm_is_told_apart(family: Any) -> None:
    (frost,) = shares([family("frost", 0.001, against=(0,))], shares={"frost": 1})
    assert frost.states == ("rejected_against_claim",)
