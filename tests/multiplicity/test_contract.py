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
# two roundings on either route: a quotient and a product
LAST_DIGITS = 1e-15


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
    again = alone["replay"]([0.01, 0.04, 0.03], 0.05)  # type: ignore[operator]
    assert again == PROCEDURES[name].replay([0.01, 0.04, 0.03], 0.05)


@EXAMPLES
@given(FAMILIES)
def test_range_and_order(p: list[float]) -> None:
    for procedure in map(PROCEDURES.__getitem__, PROCEDURES):
        adjusted = procedure(p)
        assert np.all((adjusted >= p) & (adjusted <= 1)), procedure.name
        in_order = adjusted[np.argsort(p)]
        assert np.all(np.diff(in_order) >= 0), procedure.name
        for value in set(p):
            assert len(set(adjusted[np.array(p) == value])) == 1, procedure.name


@EXAMPLES
@given(FAMILIES, st.randoms(use_true_random=False))
def test_order_of_the_hypotheses_does_not_matter(p: list[float], random: object) -> None:
    moved = list(range(len(p)))
    random.shuffle(moved)  # type: ignore[attr-defined]
    for procedure in map(PROCEDURES.__getitem__, PROCEDURES):
        assert np.array_equal(procedure(np.array(p)[moved]), procedure(p)[moved]), procedure.name


@EXAMPLES
@given(FAMILIES)
def test_steps_are_the_arithmetic(p: list[float]) -> None:
    ascending = np.sort(np.array(p))
    for procedure in map(PROCEDURES.__getitem__, PROCEDURES):
        steps = procedure.steps(p)
        assert np.array_equal(steps.product, steps.factor * ascending), procedure.name
        assert np.array_equal(steps.adjusted, np.minimum(steps.product[steps.taken_from], 1)), procedure.name


@EXAMPLES
@given(FAMILIES, LEVELS)
def test_replay_is_the_same(p: list[float], level: float) -> None:
    for procedure in map(PROCEDURES.__getitem__, PROCEDURES):
        adjusted, again = procedure(p), procedure.replay(p, level)
        # 5e-324: below the smallest normal number digits are lost
        np.testing.assert_allclose(again["adjusted"], adjusted, rtol=LAST_DIGITS, atol=1e-322)
        assert again["rejected"] == is_rejected(adjusted, level).tolist(), procedure.name


@EXAMPLES
@given(FAMILIES, LEVELS, st.integers(0, 11), P)
def test_raising_a_p_never_adds_a_rejection(p: list[float], level: float, at: int, other: float) -> None:
    raised = list(p)
    raised[at % len(p)] = max(raised[at % len(p)], other)
    for procedure in map(PROCEDURES.__getitem__, PROCEDURES):
        assert np.all(procedure(raised) >= procedure(p)), procedure.name
        before, after = (procedure.replay(values, level)["rejected"] for values in (p, raised))
        assert all(was or not now for was, now in zip(before, after, strict=True)), procedure.name


@EXAMPLES
@given(FAMILIES, LEVELS, LEVELS)
def test_a_higher_level_never_takes_a_rejection_back(p: list[float], one: float, other: float) -> None:
    for procedure in map(PROCEDURES.__getitem__, PROCEDURES):
        low, high = (procedure.replay(p, level)["rejected"] for level in sorted((one, other)))
        assert all(now or not was for was, now in zip(low, high, strict=True)), procedure.name


@pytest.mark.parametrize("level", ["0.05", "0.025", "0.1", "1/30"])
@pytest.mark.parametrize("m", [1, 3, 7, 100, 600])
def test_a_p_that_equals_its_threshold_is_rejected(procedure: Procedure, level: str, m: int) -> None:
    # at rank i the threshold is level / factor[i], in exact arithmetic: all ranks at once stand on the staircase
    a = Fraction(level)
    factors = [Fraction(factor).limit_denominator(m) for factor in procedure.steps(np.full(m, 0.5)).factor]
    on_it = [float(a / factor) for factor in factors]
    for p, expected in ((on_it, True), ([value * (1 + 1e-9) for value in on_it], False)):
        assert is_rejected(procedure(p), float(a)).tolist() == [expected] * m
        assert procedure.replay(p, float(a))["rejected"] == [expected] * m


def test_input_is_left_alone(procedure: Procedure) -> None:
    p = np.array([0.04, 0.01, 0.03])
    p.flags.writeable = False
    procedure(p)
    plain = [0.04, 0.01, 0.03]
    procedure.replay(plain, 0.05)
    assert plain == p.tolist()


def test_a_sort_is_shared(procedure: Procedure) -> None:
    p = np.random.default_rng(5).random(30)
    assert np.array_equal(procedure(Ordered.of(p)), procedure(p))


def test_a_family_of_none(procedure: Procedure) -> None:
    assert procedure([]).size == 0
    assert procedure.replay([], 0.05) == {"adjusted": [], "rejected": []}


def test_replay_of_a_large_family_is_quick(procedure: Procedure) -> None:
    p = (np.random.default_rng(6).random(20_000) ** 4).tolist()
    began = time.process_time()
    again = procedure.replay(p, 0.05)
    assert time.process_time() - began < 1  # a quadratic one takes minutes
    assert again["rejected"] == is_rejected(procedure(p), 0.05).tolist()


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
