"""The graph and its walk: published examples, closed testing over all subsets, limits of infinitesimal shares."""

import itertools
import os
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.holm import holm
from beforehand.multiplicity.graph import Graph, Leading, Walk, walk

EXAMPLES = settings(derandomize=True, deadline=None, max_examples=1500 if os.environ.get("BEFOREHAND_THOROUGH") else 60)
REFERENCES = yaml.safe_load((Path(__file__).parents[1] / "references" / "p_values" / "graph.yaml").read_text("utf-8"))
# a number so small that no weight of these graphs, which have 6 nodes and shares of few digits, could be mistaken
EPSILON = Fraction(1, 10**40)
Shares = list[list[Fraction]]


def walked(graph: Graph, p: list[float]) -> Walk:
    return walk(graph, np.array(p), passing=np.full(len(p), True))


@pytest.mark.parametrize("known", REFERENCES, ids=lambda known: f"{known['id']}-{known['known_from']['grade']}")
def test_known_graphs(known: dict[str, Any]) -> None:
    level, expected, allowed = known["params"]["alpha"], known["expected"], known["tolerance"]["abs"]
    found = walked(Graph.of(known["params"]["weights"], known["params"]["transitions"]), known["inputs"]["p"])
    assert found.adjusted == pytest.approx(expected["adjusted_p"], abs=allowed)
    assert (np.flatnonzero(is_rejected(found.adjusted, level)) + 1).tolist() == expected["rejected"]
    if "final_weights" in expected:
        assert found.held[found.steps_at(level)] == pytest.approx(expected["final_weights"], abs=allowed)


def by_the_formula(weights: list[Fraction], shares: Shares, leaves: tuple[int, ...]) -> list[Fraction]:
    """Give the weights after some nodes left, by the published update in exact numbers."""
    w, g = list(weights), [list(row) for row in shares]
    nodes = list(range(len(w)))
    for i in leaves:
        nodes.remove(i)
        for k in nodes:
            w[k] += w[i] * g[i][k]
        g = [
            [
                Fraction(0)
                if l == k or i in (l, k) or g[l][i] * g[i][l] == 1
                else (g[l][k] + g[l][i] * g[i][k]) / (1 - g[l][i] * g[i][l])
                for k in range(len(w))
            ]
            for l in range(len(w))  # noqa: E741 -- the letter of the paper
        ]
    return [w[k] if k in nodes else Fraction(0) for k in range(len(w))]


def closed_testing(weights: list[Fraction], shares: Shares, p: list[float]) -> list[float]:
    """Test every intersection by weighted Bonferroni; a hypothesis falls when all that hold it do."""
    m, adjusted = len(p), [0.0] * len(p)
    for size in range(1, m + 1):
        for those in itertools.combinations(range(m), size):
            w = by_the_formula(weights, shares, tuple(i for i in range(m) if i not in those))
            held = [float(x) if x > Fraction(1, 10**20) else 0.0 for x in w]
            local = min((p[i] / held[i] for i in those if held[i]), default=1.0)
            for i in those:
                adjusted[i] = max(adjusted[i], min(local, 1.0))
    return adjusted


PARTS = st.integers(0, 4)
P = st.one_of(st.sampled_from([0.0, 0.001, 0.0125, 0.025, 0.05, 1.0]), st.floats(1e-6, 1))


@st.composite
def graphs(draw: Any, *, epsilon: bool) -> tuple[list[Fraction], list[list[tuple[Fraction, str]]], list[float]]:
    """Draw start weights, for each node the shares with how they are written, and p-values."""
    m = draw(st.integers(1, 6))
    parts = draw(st.lists(PARTS, min_size=m, max_size=m).filter(any))
    weights = [Fraction(part, sum(parts)) for part in parts]
    shares = []
    for i in range(m):
        row = draw(st.lists(PARTS, min_size=m, max_size=m))
        row[i] = 0
        total = sum(row) + draw(st.sampled_from([0, 0, 1]))  # now and then a node keeps something
        others = [k for k in range(m) if k != i]
        if epsilon and len(others) > 1 and draw(st.booleans()):
            most, least = draw(st.permutations(others))[:2]
            texts = {most: (1 - EPSILON, "1 - epsilon"), least: (EPSILON, "epsilon")}
            shares.append([texts.get(k, (Fraction(0), "0")) for k in range(m)])
        else:
            shares.append([(Fraction(part, total or 1), str(Fraction(part, total or 1))) for part in row])
    return weights, shares, draw(st.lists(P, min_size=m, max_size=m))


def as_written(weights: list[Fraction], shares: list[list[tuple[Fraction, str]]]) -> Graph:
    nodes = [f"n{i}" for i in range(len(weights))]
    passes = [
        (nodes[i], nodes[k], text)
        for i, row in enumerate(shares)
        for k, (share, text) in enumerate(row)
        if share
    ]  # fmt: skip
    return Graph.written(nodes, dict(zip(nodes, map(str, weights), strict=True)), passes)


@EXAMPLES
@given(graphs(epsilon=False))
def test_the_walk_is_closed_testing(drawn: Any) -> None:
    weights, shares, p = drawn
    exact = [[share for share, _ in row] for row in shares]
    expected = closed_testing(weights, exact, p)
    assert walked(as_written(weights, shares), p).adjusted == pytest.approx(expected, rel=1e-13, abs=0)
    floats = Graph.of([float(w) for w in weights], [[float(share) for share in row] for row in exact])
    assert walked(floats, p).adjusted == pytest.approx(expected, rel=1e-13, abs=0)


@EXAMPLES
@given(graphs(epsilon=True))
def test_an_infinitesimal_share_is_a_limit(drawn: Any) -> None:
    weights, shares, p = drawn
    expected = closed_testing(weights, [[share for share, _ in row] for row in shares], p)
    assert walked(as_written(weights, shares), p).adjusted == pytest.approx(expected, rel=1e-13, abs=0)


@EXAMPLES
@given(graphs(epsilon=True), st.randoms(use_true_random=False))
def test_the_order_in_which_nodes_leave_does_not_matter(drawn: Any, random: Any) -> None:
    weights, shares, _ = drawn
    nodes = list(range(len(weights)))
    random.shuffle(nodes)
    leaving = nodes[: len(nodes) // 2]
    one, other = (as_written(weights, shares).without(order) for order in (leaving, sorted(leaving)))
    assert one.held == pytest.approx(other.held, rel=1e-13, abs=0)
    for x, y in zip(one.passes.ravel(), other.passes.ravel(), strict=True):
        assert float(x) == pytest.approx(float(y), rel=1e-13, abs=0)
    exact = by_the_formula(weights, [[share for share, _ in row] for row in shares], tuple(leaving))
    assert one.held == pytest.approx([float(w) for i, w in enumerate(exact) if i not in leaving], rel=1e-13, abs=1e-20)


@EXAMPLES
@given(graphs(epsilon=True), st.sampled_from([0.01, 0.025, 0.05]), st.sampled_from([0.01, 0.05, 0.2]))
def test_a_higher_level_takes_no_step_back(drawn: Any, one: float, other: float) -> None:
    weights, shares, p = drawn
    found = walked(as_written(weights, shares), p)
    assert np.all(np.diff(found.adjusted[list(found.order)]) >= 0)
    low, high = (found.steps_at(level) for level in sorted((one, other)))
    assert low <= high
    for steps in (low, high):
        there = [node for node in range(len(p)) if node not in found.order[:steps]]
        assert np.all(found.held[steps][there] >= found.held[0][there] * (1 - 1e-13))


def test_equal_shares_to_all_others_are_holm() -> None:
    m = 40
    p = np.random.default_rng(8).random(m) ** 6
    passes = (np.ones((m, m)) - np.eye(m)) / (m - 1)
    assert walked(Graph.of(np.full(m, 1 / m), passes), p.tolist()).adjusted == pytest.approx(holm(p), rel=1e-12)


def test_each_step_says_where_it_comes_from() -> None:
    # by hand: start 1/2 1/2 0, the second passes all to the third, that all to the first, that nothing.
    # p/w = .06, .02, -: the second falls at .02; the third holds 1/2 now, .04/.5 = .08: the first is next at .06;
    # it passes nothing, so the third falls at .08
    found = walked(Graph.of([0.5, 0.5, 0], [[0, 0, 0], [0, 0, 1], [1, 0, 0]]), [0.03, 0.01, 0.04])
    assert found.order == (1, 0, 2)
    assert found.step.tolist() == [2, 1, 3]
    assert found.weight.tolist() == [0.5, 0.5, 0.5]
    assert found.product.tolist() == pytest.approx([0.06, 0.02, 0.08])
    assert found.taken_from.tolist() == [2, 1, 3]
    assert found.held.tolist() == [[0.5, 0.5, 0], [0.5, 0, 0.5], [0, 0, 0.5], [0, 0, 0]]
    later = walked(Graph.of([0.5, 0.5, 0], [[0, 0, 0], [0, 0, 1], [1, 0, 0]]), [0.03, 0.01, 0.001])
    assert later.order == (1, 2, 0)
    assert later.taken_from.tolist() == [3, 1, 1]  # the third counts with the level of the first step
    assert later.adjusted.tolist() == pytest.approx([0.03, 0.02, 0.02])


def test_who_passes_nothing_keeps_its_share_and_holds_up_the_others() -> None:
    graph = Graph.of([1, 0], [[0, 1], [1, 0]])
    found = walk(graph, np.array([0.01, 0.02]), passing=np.array([False, True]))
    assert found.adjusted.tolist() == [0.01, 1.0]
    assert found.order == (0,)
    assert found.step.tolist() == [1, 0]
    assert np.isnan(found.product[1])
    assert found.held.tolist() == [[1, 0], [1, 0]]


def test_an_infinitesimal_share_alone_rejects_nothing() -> None:
    graph = Graph.written(["a", "b", "c"], {"a": 1}, [("a", "b", "1 - epsilon"), ("a", "c", "epsilon"), ("b", "c", 1)])
    assert walked(graph, [0.01, 0.2, 0.0]).held[1].tolist() == [0, 1, 0]
    assert walked(graph, [0.01, 0.2, 0.0]).adjusted.tolist() == [0.01, 0.2, 0.2]
    # serial gates by hand: c waits for b
    assert walked(graph, [0.01, 0.02, 0.03]).adjusted.tolist() == [0.01, 0.02, 0.03]


def test_all_of_an_absorbing_cycle_may_fall() -> None:
    found = walked(Graph.of([0.5, 0.5], [[0, 1], [1, 0]]), [0.01, 0.04])
    assert found.adjusted.tolist() == [0.02, 0.04]


def test_what_falls_into_a_trap_is_lost() -> None:
    # by hand: b passes one half to a, the other to d; c and d pass all to each other, and what they hold stays there
    passes = [[0, 0, 0, 0], [0.5, 0, 0, 0.5], [0, 0, 0, 1], [0, 0, 1, 0]]
    for leaving in itertools.permutations([1, 2, 3]):
        assert Graph.of([0, 0.5, 0, 0.5], passes).without(leaving).held.tolist() == [0.25]
    assert walked(Graph.of([0, 0.5, 0, 0.5], passes), [0.125, 0.001, 0.0, 0.0]).adjusted[0] == 0.5


def test_leading_terms() -> None:
    one, small = Leading(2.0), Leading(3.0, 1)
    assert one + small == one
    assert small + small == Leading(6.0, 1)
    assert one * small == Leading(6.0, 1)
    assert one / small == Leading(2 / 3, -1)
    assert float(small) == 0.0
    assert not Leading(0.0)
    assert Leading(0.0) + small == small


@pytest.mark.parametrize(
    ("weights", "passes"),
    [
        ([0.6, 0.5], [[0, 1], [1, 0]]),
        ([0.5, 0.5], [[0, 1.1], [1, 0]]),
        ([0.5, 0.5], [[0, -0.1], [1, 0]]),
        ([-0.5, 0.5], [[0, 1], [1, 0]]),
        ([0.5, 0.5], [[0.1, 0.5], [1, 0]]),
    ],
)
def test_what_is_no_graph_is_refused(weights: list[float], passes: list[list[float]]) -> None:
    with pytest.raises(ValueError, match=r"at least 0 and at most 1|nothing to itself"):
        Graph.of(weights, passes)


@pytest.mark.parametrize("share", ["epsilon", 1, "2/3"])
def test_more_than_all_cannot_be_passed_on(share: str | float) -> None:
    with pytest.raises(ValueError, match="at most all that it holds"):
        Graph.written(["a", "b", "c"], {"a": 1}, [("a", "b", 1), ("a", "c", share)])
