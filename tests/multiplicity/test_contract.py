"""What every procedure of the catalogue has to do; an entry is tested the moment its file exists."""

import inspect
import os
import re
import time
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from multiplicity.given import given_for, judges_by_p, moved_as, options_for

from beforehand.multiplicity.contract import PROCEDURES, Ordered, Procedure
from beforehand.multiplicity.decision import is_rejected

EXAMPLES = settings(derandomize=True, deadline=None, max_examples=1000 if os.environ.get("BEFOREHAND_THOROUGH") else 60)
LEVELS = st.sampled_from([0.01, 0.025, 0.05, 0.1])
# any p, and many that tie or that equal a threshold of some staircase in exact arithmetic
P = st.one_of(
    st.floats(0, 1),
    st.sampled_from([0.0, 5e-324, 1e-300, 1e-12, 0.5, 1.0]),
    st.builds(lambda level, i, m: level * i / m, LEVELS, st.integers(1, 8), st.integers(1, 12)),
)
FAMILIES = st.lists(P, min_size=1, max_size=12)
# about a dozen roundings on either route: quotients, products, short sums
LAST_DIGITS = 3e-15
# a spline by eigenvectors and by elimination
ITERATED = {"storey_q": 1e-11}
# below the smallest normal number digits are lost
BELOW_NORMAL = 1e-321

ON_P = [procedure for procedure in map(PROCEDURES.__getitem__, PROCEDURES) if judges_by_p(procedure)]
"""Those that judge by p and the plan alone; the others have these tests beside them, on statistics of their own."""
BELOW_P = {"two_stage_adaptive", "storey_q", "weighted_benjamini_hochberg"}
"""Whose adjusted p may be below p: an estimated number of true nulls, or a weight above the average, makes it so."""
THRESHOLDS_OF_THEIR_OWN = {"hommel", "two_stage_adaptive", "storey_q"}
"""Whose thresholds depend on the p-values, so that no staircase is known beforehand; their own files have the test."""
NOT_MONOTONE = {"storey_q"}
"""Whose estimate of the true nulls can fall when a p is raised."""


@pytest.fixture(params=list(PROCEDURES))
def name(request: pytest.FixtureRequest) -> str:
    return str(request.param)


@pytest.fixture
def procedure(name: str) -> Procedure:
    return PROCEDURES[name]


def test_one_word(name: str, procedure: Procedure) -> None:
    assert procedure.name == name
    assert Path(inspect.getfile(procedure.adjust)).stem == name
    assert (Path(__file__).parent / "entries" / f"test_{name}.py").is_file()


def test_declares_where_it_comes_from(procedure: Procedure) -> None:
    assert re.search(r"\(\d{4}\)", procedure.reference)
    assert procedure.title
    assert procedure.valid_under
    assert bool(procedure.no_intervals_because) == (procedure.intervals is None)
    text = inspect.getdoc(procedure.adjust) or ""
    for section in ("Parameters\n", "Returns\n", "References\n"):
        assert section in text


def test_replay_needs_nothing_around_it(name: str) -> None:
    text = inspect.getsource(PROCEDURES.module(name).replay)
    alone: dict[str, object] = {}
    exec("from __future__ import annotations\n" + text, alone)
    if judges_by_p(PROCEDURES[name]):
        given = given_for(PROCEDURES[name], 3)
        again = alone["replay"]([0.01, 0.04, 0.03], 0.05, **given)  # type: ignore[operator]
        assert again == PROCEDURES[name].replay([0.01, 0.04, 0.03], 0.05, **given)


def test_who_is_exempt() -> None:
    for others in (BELOW_P, THRESHOLDS_OF_THEIR_OWN):
        assert others <= set(PROCEDURES)
    assert {procedure.name for procedure in ON_P if not procedure.monotone} == NOT_MONOTONE


@EXAMPLES
@given(FAMILIES)
def test_range(p: list[float]) -> None:
    for procedure in ON_P:
        adjusted = procedure(p, **given_for(procedure, len(p)))
        assert np.all((adjusted >= 0) & (adjusted <= 1)), procedure.name
        assert procedure.name in BELOW_P or np.all(adjusted >= p), procedure.name


@EXAMPLES
@given(FAMILIES)
def test_order_of_the_p_values_is_kept(p: list[float]) -> None:
    for procedure in ON_P:
        if not procedure.needs:  # weights and a written order tell hypotheses apart
            adjusted = procedure(p, **options_for(procedure))
            in_order = adjusted[np.argsort(p)]
            assert np.all(np.diff(in_order) >= 0), procedure.name
            for value in set(p):
                assert len(set(adjusted[np.array(p) == value])) == 1, procedure.name


@EXAMPLES
@given(FAMILIES, st.randoms(use_true_random=False))
def test_order_of_the_hypotheses_does_not_matter(p: list[float], random: object) -> None:
    moved = list(range(len(p)))
    random.shuffle(moved)  # type: ignore[attr-defined]
    for procedure in ON_P:
        given = given_for(procedure, len(p))
        adjusted = procedure(np.array(p)[moved], **moved_as(given, moved))
        assert np.array_equal(adjusted, procedure(p, **given)[moved]), procedure.name


@EXAMPLES
@given(FAMILIES)
def test_steps_are_the_arithmetic(p: list[float]) -> None:
    ascending = np.sort(np.array(p))
    for procedure in ON_P:
        steps = procedure.steps(p, **given_for(procedure, len(p)))
        multiple = np.isfinite(steps.factor)
        assert np.array_equal(steps.product[multiple], (steps.factor * ascending)[multiple]), procedure.name
        assert np.array_equal(steps.adjusted, np.minimum(steps.product[steps.taken_from], 1)), procedure.name
        words = list(steps.arithmetic) or [""] * len(p)
        assert [word == "" for word in words] == multiple.tolist(), procedure.name


@EXAMPLES
@given(FAMILIES, LEVELS)
def test_replay_is_the_same(p: list[float], level: float) -> None:
    for procedure in ON_P:
        given = given_for(procedure, len(p))
        adjusted, again = procedure(p, **given), procedure.replay(p, level, **given)
        digits = ITERATED.get(procedure.name, LAST_DIGITS)
        np.testing.assert_allclose(again["adjusted"], adjusted, rtol=digits, atol=BELOW_NORMAL, err_msg=procedure.name)
        assert again["rejected"] == is_rejected(adjusted, level).tolist(), procedure.name


@EXAMPLES
@given(FAMILIES, LEVELS, st.integers(0, 11), P)
def test_raising_a_p_never_adds_a_rejection(p: list[float], level: float, at: int, other: float) -> None:
    raised = list(p)
    raised[at % len(p)] = max(raised[at % len(p)], other)
    for procedure in ON_P:
        if procedure.monotone:
            given = given_for(procedure, len(p))
            lowest = procedure(p, **given) * (1 - LAST_DIGITS) - BELOW_NORMAL
            assert np.all(procedure(raised, **given) >= lowest), procedure.name
            before, after = (procedure.replay(values, level, **given)["rejected"] for values in (p, raised))
            assert all(was or not now for was, now in zip(before, after, strict=True)), procedure.name


@EXAMPLES
@given(FAMILIES, LEVELS, LEVELS)
def test_a_higher_level_never_takes_a_rejection_back(p: list[float], one: float, other: float) -> None:
    for procedure in ON_P:
        given = given_for(procedure, len(p))
        low, high = (procedure.replay(p, level, **given)["rejected"] for level in sorted((one, other)))
        assert all(now or not was for was, now in zip(low, high, strict=True)), procedure.name


@pytest.mark.parametrize("level", ["0.05", "0.025", "0.1", "1/30"])
@pytest.mark.parametrize("m", [1, 3, 7, 100, 600])
@pytest.mark.parametrize("judging", [p for p in ON_P if p.name not in THRESHOLDS_OF_THEIR_OWN], ids=lambda p: p.name)
def test_a_p_that_equals_its_threshold_is_rejected(judging: Procedure, level: str, m: int) -> None:
    # all ranks at once stand on the staircase; equal p-values keep their order, so ranks are members
    a = Fraction(level)
    given = given_for(judging, m)
    steps = judging.steps(np.full(m, 0.5), **given)
    on_it = steps.thresholds(float(a)).tolist()
    if steps.critical is None:  # level / factor, in exact arithmetic
        on_it = [float(a / Fraction(factor).limit_denominator(10**9)) for factor in steps.factor]
    for p, expected in ((on_it, True), ([value * (1 + 1e-9) for value in on_it], False)):
        assert is_rejected(judging(p, **given), float(a)).tolist() == [expected] * m
        assert judging.replay(p, float(a), **given)["rejected"] == [expected] * m


@pytest.mark.parametrize("judging", ON_P, ids=lambda p: p.name)
def test_thresholds_are_those_of_the_decisions(judging: Procedure) -> None:
    # a hypothesis is rejected exactly when the rank whose product counts for it meets its threshold
    for seed in range(40):
        p = np.random.default_rng(seed).random(12) ** 4
        steps = judging.steps(p, **given_for(judging, p.size))
        meets = is_rejected(np.sort(p), steps.thresholds(0.05))
        assert np.array_equal(is_rejected(steps.adjusted, 0.05), meets[steps.taken_from]), seed


@pytest.mark.parametrize("judging", ON_P, ids=lambda p: p.name)
def test_input_is_left_alone(judging: Procedure) -> None:
    p = np.array([0.04, 0.01, 0.03])
    p.flags.writeable = False
    given = given_for(judging, 3)
    judging(p, **given)
    plain = [0.04, 0.01, 0.03]
    judging.replay(plain, 0.05, **given)
    assert plain == p.tolist()
    assert given == given_for(judging, 3)


@pytest.mark.parametrize("judging", ON_P, ids=lambda p: p.name)
def test_a_sort_is_shared(judging: Procedure) -> None:
    p = np.random.default_rng(5).random(30)
    given = given_for(judging, 30)
    assert np.array_equal(judging(Ordered.of(p), **given), judging(p, **given))


@pytest.mark.parametrize("judging", ON_P, ids=lambda p: p.name)
def test_a_family_of_none(judging: Procedure) -> None:
    given = given_for(judging, 0)
    assert judging([], **given).size == 0
    assert judging.replay([], 0.05, **given) == {"adjusted": [], "rejected": []}


@pytest.mark.parametrize("judging", ON_P, ids=lambda p: p.name)
def test_replay_of_a_large_family_is_quick(judging: Procedure) -> None:
    p = (np.random.default_rng(6).random(20_000) ** 4).tolist()
    given = given_for(judging, 20_000)
    began = time.process_time()
    again = judging.replay(p, 0.05, **given)
    assert time.process_time() - began < 1  # a quadratic one takes minutes
    adjusted = judging(p, **given)
    np.testing.assert_allclose(again["adjusted"], adjusted, rtol=1e-12)  # sums of 20,000
    assert again["rejected"] == is_rejected(adjusted, 0.05).tolist()


@pytest.mark.parametrize("digits", [1, 2, 3, 16])
def test_equal_values_keep_their_order(digits: int) -> None:
    p = np.round(np.random.default_rng(7).random(2_000), digits)
    assert np.array_equal(Ordered.of(p).order, np.argsort(p, kind="stable"))


@pytest.mark.parametrize(
    ("p", "complaint"),
    [
        ([0.1, float("nan")], "none is missing"),
        ([0.1, 1.0000001], "between 0 and 1"),
        ([-1e-300, 0.5], "between 0 and 1"),
        ([[0.1, 0.2]], "found 2 dimensions"),
    ],
)
def test_what_is_no_p_is_refused(p: list[float], complaint: str) -> None:
    with pytest.raises(ValueError, match=complaint):
        Ordered.of(p)
