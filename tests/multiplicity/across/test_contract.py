"""What every scheme of the catalogue has to do."""

import inspect
import os
from dataclasses import replace
from pathlib import Path
from typing import get_args

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.scheme import SCHEMES, FamilyDecision, FamilyResult, Scheme
from beforehand.terms import AcrossFamilies

EXAMPLES = settings(
    derandomize=True, deadline=None, max_examples=2000 if os.environ.get("BEFOREHAND_THOROUGH") else 150
)
# mostly small, so that gates open; with ties and values that equal the level
P = st.one_of(st.sampled_from([0.0, 0.001, 0.02, 0.025, 0.05, 0.2, 1.0]), st.floats(0, 1))
MEMBERS = st.lists(st.tuples(P, st.sampled_from("rrrrra-")), max_size=4)  # with a result, against the claim, without
FAMILIES = st.lists(MEMBERS, min_size=1, max_size=4)
LEVELS = st.sampled_from([0.01, 0.025, 0.05])


def results(families: list[list[tuple[float, str]]], level: float) -> list[FamilyResult]:
    return [
        FamilyResult(
            id=f"family_{k}",
            p_family=np.array([1.0 if kind == "-" else p for p, kind in family]),
            has_result=np.array([kind != "-" for _, kind in family], dtype=bool),
            against_claim=np.array([kind == "a" for _, kind in family], dtype=bool),
            level=level,
        )
        for k, family in enumerate(families)
    ]


def schemes() -> list[Scheme]:
    return [SCHEMES[name] for name in SCHEMES]


def claimed(decisions: tuple[FamilyDecision, ...]) -> list[bool]:
    return [state == "rejected" for family in decisions for state in family.states]


@pytest.mark.parametrize("name", list(SCHEMES))
def test_one_word(name: str) -> None:
    scheme = SCHEMES[name]
    assert scheme.name == name == Path(inspect.getfile(scheme.across)).stem
    assert name in get_args(AcrossFamilies)
    assert (Path(__file__).parent / f"test_{name}.py").is_file()
    assert scheme.title
    assert scheme.keeps
    assert scheme.reference


@pytest.mark.parametrize("name", list(SCHEMES))
def test_replay_needs_nothing_around_it(name: str) -> None:
    text = inspect.getsource(SCHEMES.module(name).replay)
    alone: dict[str, object] = {}
    exec("from __future__ import annotations\n" + text, alone)
    lists = (["one"], [[0.01]], [[True]], [[True]])
    assert alone["replay"](*lists) == SCHEMES[name].replay(*lists)  # type: ignore[operator]


@EXAMPLES
@given(FAMILIES, LEVELS)
def test_replay_is_the_same(families: list[list[tuple[float, str]]], level: float) -> None:
    given_ = results(families, level)
    for scheme in schemes():
        again = scheme.replay(
            [family.id for family in given_],
            [family.p_family.tolist() for family in given_],
            [family.may_open.tolist() for family in given_],
            [is_rejected(family.p_family, level).tolist() for family in given_],
        )
        for decided, family in zip(scheme(given_), again, strict=True):
            assert family["closed_by"] == decided.closed_by
            p_study = [np.nan if p is None else p for p in family["p_study"]]
            assert np.array_equal(p_study, decided.p_study, equal_nan=True)


@EXAMPLES
@given(FAMILIES, LEVELS)
def test_states_follow_from_value_and_threshold(families: list[list[tuple[float, str]]], level: float) -> None:
    given_ = results(families, level)
    for scheme in schemes():
        for family, decided in zip(given_, scheme(given_), strict=True):
            assert decided.id == family.id
            assert len(decided.states) == len(decided.decides) == decided.p_study.size == family.p_family.size
            for i, state in enumerate(decided.states):
                compared = state in ("rejected", "rejected_against_claim", "not_rejected")
                assert (state == "no_result") == (not family.has_result[i])
                assert compared == (decided.decides[i] == scheme.decides) == (not np.isnan(decided.threshold[i]))
                assert np.isnan(decided.p_family[i]) == bool(decided.closed_by)
                if compared:
                    assert decided.threshold[i] == level
                    value = getattr(decided, decided.decides[i])[i]
                    assert is_rejected(float(value), level) == (state != "not_rejected")
                    assert (state == "rejected_against_claim") == (state != "not_rejected" and family.against_claim[i])


@EXAMPLES
@given(FAMILIES, LEVELS, LEVELS)
def test_a_higher_level_never_takes_a_claim_back(
    families: list[list[tuple[float, str]]], one: float, other: float
) -> None:
    for scheme in schemes():
        low, high = (claimed(scheme(results(families, level))) for level in sorted((one, other)))
        assert all(now or not was for was, now in zip(low, high, strict=True))


@EXAMPLES
@given(FAMILIES, LEVELS, st.integers(0, 3), st.integers(0, 3))
def test_raising_a_p_never_adds_a_claim(
    families: list[list[tuple[float, str]]], level: float, family: int, member: int
) -> None:
    before = results(families, level)
    after = list(before)
    chosen = after[family % len(after)]
    if chosen.p_family.size:
        raised = chosen.p_family.copy()
        raised[member % raised.size] = 1.0
        after[family % len(after)] = replace(chosen, p_family=raised)
    for scheme in schemes():
        pairs = zip(claimed(scheme(before)), claimed(scheme(after)), strict=True)
        assert all(was or not now for was, now in pairs)


def test_input_is_left_alone() -> None:
    given_ = results([[(0.01, "r"), (0.2, "r")], [(0.03, "r")]], 0.05)
    for family in given_:
        family.p_family.flags.writeable = False
    for scheme in schemes():
        scheme(given_)


@pytest.mark.parametrize("p_family", [[0.1], [0.1, np.nan], [0.1, 1.5]])
def test_a_family_that_cannot_be_is_refused(p_family: list[float]) -> None:
    with pytest.raises(ValueError, match="family 'doors'"):
        FamilyResult(
            id="doors",
            p_family=np.array(p_family),
            has_result=np.array([True, True]),
            against_claim=np.array([False, False]),
            level=0.05,
        )
