"""Serial gates: what opens one, what keeps one closed, and p_study by its definition."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
import yaml

from beforehand.multiplicity.across.serial import serial
from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.scheme import FamilyResult

LEVEL = 0.05


def family(name: str, *p: float | None, against: tuple[int, ...] = ()) -> FamilyResult:
    return FamilyResult(
        id=name,
        p_family=np.array([1.0 if value is None else value for value in p]),
        has_result=np.array([value is not None for value in p], dtype=bool),
        against_claim=np.isin(np.arange(len(p)), against),
        level=LEVEL,
    )


def test_all_rejected_opens_the_gate_at_the_full_level() -> None:
    energy, frost = serial([family("energy", 0.01, 0.05), family("frost", 0.05, 0.051)])
    assert energy.states == ("rejected", "rejected")
    assert frost.states == ("rejected", "not_rejected")
    assert frost.threshold.tolist() == [LEVEL, LEVEL]
    assert frost.p_study.tolist() == [0.05, 0.051]
    assert frost.p_family.tolist() == [0.05, 0.051]


def test_one_not_rejected_closes_everything_behind_it() -> None:
    families = [family("energy", 0.01, 0.06), family("frost", 0.001, None), family("alarms", 0.3)]
    _, frost, alarms = serial(families)
    assert frost.closed_by == alarms.closed_by == "energy"
    assert frost.states == ("not_tested", "no_result")
    assert frost.p_study.tolist() == [0.06, 1.0]
    assert alarms.p_study.tolist() == [1.0]
    assert np.isnan(frost.p_family).all()
    assert np.isnan(frost.threshold).all()
    assert frost.decides == ("", "")
    assert not frost.tested


@pytest.mark.parametrize(
    "first",
    [family("energy", 0.01, None), family("energy", 0.01, 0.001, against=(1,)), family("energy")],
    ids=["no result", "against the claim", "no members"],
)
def test_what_is_not_rejected_for_its_claim_opens_nothing(first: FamilyResult) -> None:
    frost = serial([first, family("frost", 0.0)])[1]
    assert frost.states == ("not_tested",)
    assert frost.p_study.tolist() == [1.0]  # no study level would reject it


def test_a_finding_of_harm_keeps_its_place() -> None:
    (energy,) = serial([family("energy", 0.01, 0.001, against=(1,))])
    assert energy.states == ("rejected", "rejected_against_claim")
    assert energy.decides == ("p_study", "p_study")


def test_single_hypotheses_are_a_fixed_sequence() -> None:
    path = Path(__file__).parents[2] / "references" / "p_values" / "serial.yaml"
    (known,) = yaml.safe_load(path.read_text("utf-8"))  # grade C, derived by two routes: see the file
    families = [family(f"family_{i}", p) for i, p in enumerate(known["inputs"]["p"])]
    decisions = serial(families)
    p_study = [float(decided.p_study[0]) for decided in decisions]
    assert p_study == pytest.approx(known["expected"]["adjusted_p"], abs=known["tolerance"]["abs"])
    rejected = [i for i, decided in enumerate(decisions, start=1) if decided.states == ("rejected",)]
    assert rejected == known["expected"]["rejected"]


@pytest.mark.parametrize("seed", range(20))
def test_p_study_is_the_smallest_level_at_which_the_scheme_rejects(seed: int) -> None:
    random = np.random.default_rng(seed)
    families = [family(f"family_{k}", *(np.round(random.random(2) ** 2, 3) + 0.001)) for k in range(3)]
    at_any_level = serial(families)
    for k, decided in enumerate(at_any_level):
        for i, p_study in enumerate(decided.p_study):
            for level, expected in ((p_study, "rejected"), (p_study * (1 - 1e-9), "not")):
                again = serial([replace(one, level=float(level)) for one in families])[k]
                assert again.states[i].startswith(expected)


def test_the_gate_uses_the_one_comparison() -> None:
    just = LEVEL * (1 + 5e-13)
    assert is_rejected(just, LEVEL)
    assert serial([family("energy", just), family("frost", 0.01)])[1].states == ("rejected",)
