"""What every scheme of the catalogue has to do."""

import inspect
import os
from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any, get_args

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.scheme import SCHEMES, FamilyDecision, FamilyResult, Scheme
from beforehand.terms import AcrossFamilies

EXAMPLES = settings(derandomize=True, deadline=None, max_examples=1000 if os.environ.get("BEFOREHAND_THOROUGH") else 60)
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
            members=tuple(f"h_{k}_{i}" for i in range(len(family))),
        )
        for k, family in enumerate(families)
    ]


@dataclass(frozen=True)
class Case:
    """A scheme with what a plan could say of it."""

    scheme: Scheme
    given_to: Callable[[list[FamilyResult]], dict[str, Any]]

    def __call__(self, families: list[FamilyResult]) -> tuple[FamilyDecision, ...]:
        return self.scheme(families, **self.given_to(families))

    def replay(self, families: list[FamilyResult]) -> list[dict[str, Any]]:
        return self.scheme.replay([plain(family) for family in families], **self.given_to(families))


def plain(family: FamilyResult) -> dict[str, Any]:
    p = family.p_family.tolist()
    return {
        "id": family.id, "members": list(family.members), "level": family.level, "p": p,
        "may_open": family.may_open.tolist(),
        "judge": lambda level: {"adjusted": p, "rejected": [value <= level * (1 + 1e-12) for value in p]},
    }  # fmt: skip


def nothing(_: list[FamilyResult]) -> dict[str, Any]:
    return {}


def unequal_shares(families: list[FamilyResult]) -> dict[str, Any]:
    total = sum(range(1, len(families) + 1))
    return {"shares": {family.id: f"{k}/{total}" for k, family in enumerate(families, start=1)}}


def truncated(families: list[FamilyResult]) -> dict[str, Any]:
    parts = {family.id: range(1, family.p_family.size + 1) for family in families[1::2]}
    return {
        "truncations": {family.id: k / 4 for k, family in enumerate(families[:-1])},
        "weights": {name: [part / sum(those) for part in those] for name, those in parts.items()},
    }


def arrows(nodes: list[str]) -> dict[str, Any]:
    """Start with the first and the last; pass on to the next, all but an infinitesimal part, or in halves."""
    passes: list[list[Any]] = []
    for k, node in enumerate(nodes):
        following, previous = nodes[(k + 1) % len(nodes)], nodes[k - 1]
        if following not in (node, previous):
            parts = ("1 - epsilon", "epsilon") if k % 2 else (0.5, "1/3")
            passes += [[node, following, parts[0]], [node, previous, parts[1]]]
        elif following != node:
            passes.append([node, following, 1])
    return {"start": dict.fromkeys([*nodes[:1], *nodes[-1:]], 0.5), "passes": passes}


def graph_of_families(families: list[FamilyResult]) -> dict[str, Any]:
    return {"nodes_are": "families"} | arrows([family.id for family in families])


def graph_of_hypotheses(families: list[FamilyResult]) -> dict[str, Any]:
    return {"nodes_are": "hypotheses"} | arrows([member for family in families for member in family.members])


def graph_that_traps(families: list[FamilyResult]) -> dict[str, Any]:
    """Start everywhere; the last two nodes pass all to each other, so that nothing ever leaves them."""
    nodes = [member for family in families for member in family.members]
    passes: list[list[Any]] = []
    for k, node in enumerate(nodes):
        if len(nodes) - k > 2:
            passes += [[node, nodes[k + 1], 0.25], [node, nodes[-1], 0.5], [nodes[k + 1], node, 0.25]]
        elif len(nodes) > 1:
            passes.append([node, nodes[-1] if k == len(nodes) - 2 else nodes[-2], 1])
    passes = [one for one in passes if len(nodes) == 2 or one[0] not in nodes[-2:] or one[2] == 1]
    return {"nodes_are": "hypotheses", "start": {node: f"1/{len(nodes)}" for node in nodes}, "passes": passes}


CASES = {
    "parallel": Case(SCHEMES["parallel"], truncated),
    "separate": Case(SCHEMES["separate"], nothing),
    "serial": Case(SCHEMES["serial"], nothing),
    "shares": Case(SCHEMES["shares"], unequal_shares),
    "graph of families": Case(SCHEMES["graph"], graph_of_families),
    "graph of hypotheses": Case(SCHEMES["graph"], graph_of_hypotheses),
    "graph that traps": Case(SCHEMES["graph"], graph_that_traps),
}


def claimed(decisions: tuple[FamilyDecision, ...]) -> list[bool]:
    return [state == "rejected" for family in decisions for state in family.states]


def test_every_scheme_has_its_case() -> None:
    assert {case.scheme.name for case in CASES.values()} == set(SCHEMES)


@pytest.mark.parametrize("name", list(SCHEMES))
def test_one_word(name: str) -> None:
    scheme = SCHEMES[name]
    assert scheme.name == name == Path(inspect.getfile(scheme.across)).stem
    assert name in get_args(AcrossFamilies)
    assert (Path(__file__).parent / f"test_{name}.py").is_file()
    assert scheme.title
    assert scheme.keeps
    assert scheme.reference


@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_replay_needs_nothing_around_it(case: Case) -> None:
    text = inspect.getsource(SCHEMES.module(case.scheme.name).replay)
    alone: dict[str, Any] = {}
    exec("from __future__ import annotations\n" + text, {"Any": Any}, alone)
    families = results([[(0.01, "r"), (0.3, "r")], [(0.02, "r")], [(0.02, "r")]], 0.05)
    again = alone["replay"]([plain(family) for family in families], **case.given_to(families))
    assert again == case.replay(families)


@EXAMPLES
@given(FAMILIES, LEVELS)
@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_replay_is_the_same(case: Case, families: list[list[tuple[float, str]]], level: float) -> None:
    given_ = results(families, level)
    for first, decided, again in zip(given_, case(given_), case.replay(given_), strict=True):
        assert again["closed_by"] == decided.closed_by
        assert np.isnan(decided.local_level) if again["local_level"] is None else True
        for name in ("p_study", "p_family"):
            values = [np.nan if p is None else p for p in again[name]]
            values = [np.nan] * len(values) if decided.closed_by and name == "p_family" else values
            np.testing.assert_allclose(values, getattr(decided, name), rtol=1e-13, atol=1e-320)
        if again["local_level"] is not None:
            assert again["local_level"] == pytest.approx(decided.local_level, rel=1e-13)
        for i, state in enumerate(decided.states):
            assert again["tested"][i] == (state not in ("not_tested", "no_result")) or state == "no_result"
            met = again["rejected"][i] and again["tested"][i] and bool(first.has_result[i])
            assert met == (state in ("rejected", "rejected_against_claim"))


@EXAMPLES
@given(FAMILIES, LEVELS)
@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_states_follow_from_value_and_threshold(
    case: Case, families: list[list[tuple[float, str]]], level: float
) -> None:
    given_ = results(families, level)
    for family, decided in zip(given_, case(given_), strict=True):
        assert decided.id == family.id
        assert len(decided.states) == len(decided.decides) == decided.p_study.size == family.p_family.size
        for i, state in enumerate(decided.states):
            compared = state in ("rejected", "rejected_against_claim", "not_rejected")
            assert (state == "no_result") == (not family.has_result[i])
            assert compared == (decided.decides[i] == case.scheme.decides) == (not np.isnan(decided.threshold[i]))
            assert np.isnan(decided.p_family[i]) == (bool(decided.closed_by) or decided.falls is not None)
            assert np.isnan(decided.p_study[i]) or 0 <= decided.p_study[i] <= 1
            value = getattr(decided, case.scheme.decides)[i]
            if compared:
                assert decided.threshold[i] == level
                assert is_rejected(float(value), level) == (state != "not_rejected")
                assert (state == "rejected_against_claim") == (state != "not_rejected" and family.against_claim[i])
            elif state == "not_tested":
                assert not is_rejected(float(decided.p_study[i]), level)


@EXAMPLES
@given(FAMILIES, LEVELS, LEVELS)
@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_a_higher_level_never_takes_a_claim_back(
    case: Case, families: list[list[tuple[float, str]]], one: float, other: float
) -> None:
    low, high = (claimed(case(results(families, level))) for level in sorted((one, other)))
    assert all(now or not was for was, now in zip(low, high, strict=True))


@EXAMPLES
@given(FAMILIES, LEVELS, st.integers(0, 3), st.integers(0, 3))
@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_raising_a_p_never_adds_a_claim(
    case: Case, families: list[list[tuple[float, str]]], level: float, family: int, member: int
) -> None:
    before = results(families, level)
    after = list(before)
    chosen = after[family % len(after)]
    if chosen.p_family.size:
        raised = chosen.p_family.copy()
        raised[member % raised.size] = 1.0
        after[family % len(after)] = replace(chosen, p_family=raised)
    pairs = zip(claimed(case(before)), claimed(case(after)), strict=True)
    assert all(was or not now for was, now in pairs)


SCHEMES_WITH_A_STUDY_LEVEL = {name: case for name, case in CASES.items() if case.scheme.decides == "p_study"}


@pytest.mark.parametrize("seed", range(15))
@pytest.mark.parametrize("case", SCHEMES_WITH_A_STUDY_LEVEL.values(), ids=SCHEMES_WITH_A_STUDY_LEVEL)
def test_p_study_is_the_smallest_level_at_which_the_scheme_rejects(case: Case, seed: int) -> None:
    random = np.random.default_rng(seed)
    families = [[(float(p), "r") for p in random.random(size) ** 3] for size in (3, 2, 2)]
    families[0][0] = (families[0][0][0], "ra-"[seed % 3])
    for k, decided in enumerate(case(results(families, 0.05))):
        for i, p_study in enumerate(decided.p_study):
            if p_study < 1 and families[k][i][1] != "-":
                for level, expected in ((float(p_study), True), (float(p_study) * (1 - 1e-9), False)):
                    again = case.replay(results(families, level))[k]  # decided at this level alone
                    assert (again["rejected"][i] and again["tested"][i]) == expected


def test_input_is_left_alone() -> None:
    given_ = results([[(0.01, "r"), (0.2, "r")], [(0.03, "r")]], 0.05)
    for family in given_:
        family.p_family.flags.writeable = False
    for case in CASES.values():
        options = case.given_to(given_)
        case.scheme(given_, **options)
        assert options == case.given_to(given_)


@pytest.mark.parametrize("case", SCHEMES_WITH_A_STUDY_LEVEL.values(), ids=SCHEMES_WITH_A_STUDY_LEVEL)
def test_families_of_one_promise_share_its_level(case: Case) -> None:
    one, other = results([[(0.01, "r")], [(0.01, "r")]], 0.05)
    with pytest.raises(ValueError, match="several levels"):
        case([one, replace(other, level=0.025)])


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
