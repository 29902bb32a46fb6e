"""The graph as a procedure of one family: published examples, and what the contract asks of every procedure."""

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.graph import graph

EXAMPLES = settings(derandomize=True, deadline=None, max_examples=60)
P = st.one_of(st.sampled_from([0.0, 0.0125, 0.025, 0.05, 1.0]), st.floats(1e-6, 1))
PARTS = st.integers(0, 4)


@pytest.mark.parametrize(
    "name", ["bretz-2009-holm-graph", "successive-graph-4", "improved-fallback-3", "parallel-gatekeeping-4"]
)
def test_known_graphs(entry: Any, name: str) -> None:
    known = entry("graph", name)  # each with its grade in the file
    p, level = known["inputs"]["p"], known["params"]["alpha"]
    given_ = {
        "weights": known["params"]["weights"], "positions": list(range(len(p))),
        "passes": known["params"]["transitions"],
    }  # fmt: skip
    assert graph(p, **given_) == pytest.approx(known["expected"]["adjusted_p"], abs=known["tolerance"]["abs"])
    rejected = [i for i, yes in enumerate(graph.replay(p, level, **given_)["rejected"], start=1) if yes]
    assert rejected == known["expected"]["rejected"]


@st.composite
def families(draw: Any) -> tuple[list[float], dict[str, Any]]:
    m = draw(st.integers(1, 6))
    parts = draw(st.lists(PARTS, min_size=m, max_size=m).filter(any))
    rows = [draw(st.lists(PARTS, min_size=m, max_size=m)) for _ in range(m)]
    rows = [[0 if i == k else x for k, x in enumerate(row)] for i, row in enumerate(rows)]
    totals = [sum(row) + draw(st.integers(0, 1)) for row in rows]
    passes = [[x / (total or 1) for x in row] for row, total in zip(rows, totals, strict=True)]
    return draw(st.lists(P, min_size=m, max_size=m)), {
        "weights": [part / sum(parts) for part in parts], "positions": draw(st.permutations(range(m))),
        "passes": passes,
    }  # fmt: skip


@EXAMPLES
@given(families(), st.sampled_from([0.01, 0.025, 0.05]))
def test_replay_is_the_same(drawn: Any, level: float) -> None:
    p, given_ = drawn
    adjusted, again = graph(p, **given_), graph.replay(p, level, **given_)
    np.testing.assert_allclose(again["adjusted"], adjusted, rtol=1e-13)
    assert again["rejected"] == is_rejected(adjusted, level).tolist()


@EXAMPLES
@given(families())
def test_steps_are_the_arithmetic(drawn: Any) -> None:
    p, given_ = drawn
    steps = graph.steps(p, **given_)
    multiple = np.isfinite(steps.factor)
    np.testing.assert_allclose(steps.product[multiple], (steps.factor * np.sort(p))[multiple], rtol=1e-15)
    assert np.array_equal(steps.adjusted, np.minimum(steps.product[steps.taken_from], 1))
    assert [word == "" for word in steps.arithmetic] == multiple.tolist()


@EXAMPLES
@given(families(), st.randoms(use_true_random=False))
def test_order_of_the_hypotheses_does_not_matter(drawn: Any, random: Any) -> None:
    p, given_ = drawn
    moved = list(range(len(p)))
    random.shuffle(moved)
    other = {name: given_[name] if name == "passes" else [given_[name][i] for i in moved] for name in given_}
    np.testing.assert_allclose(graph(np.array(p)[moved], **other), graph(p, **given_)[moved], rtol=1e-13)


@EXAMPLES
@given(families(), st.integers(0, 5), P)
def test_raising_a_p_never_adds_a_rejection(drawn: Any, at: int, value: float) -> None:
    p, given_ = drawn
    raised = list(p)
    raised[at % len(p)] = max(raised[at % len(p)], value)
    assert np.all(graph(raised, **given_) * (1 + 1e-13) >= graph(p, **given_))


def test_a_family_of_none() -> None:
    given_ = {"weights": [], "positions": [], "passes": []}
    assert graph([], **given_).size == 0
    assert graph.replay([], 0.05, **given_) == {"adjusted": [], "rejected": []}
