"""The graph as a scheme: of hypotheses over several families, and of families that pass on only when all fell."""

from pathlib import Path
from typing import Any

import numpy as np
import pytest
import yaml

from beforehand.multiplicity.across.graph import graph
from beforehand.multiplicity.across.serial import serial

KNOWN = yaml.safe_load((Path(__file__).parents[2] / "references" / "p_values" / "graph.yaml").read_text("utf-8"))


def as_written(weights: list[float], transitions: list[list[float]]) -> dict[str, Any]:
    nodes = [f"family_{k}_1" for k in range(len(weights))]
    passes = [[a, b, share] for a, row in zip(nodes, transitions, strict=True)
              for b, share in zip(nodes, row, strict=True) if share]  # fmt: skip
    return {"start": dict(zip(nodes, map(float, weights), strict=True)), "passes": passes}


@pytest.mark.parametrize("known", KNOWN, ids=lambda known: f"{known['id']}-{known['known_from']['grade']}")
def test_known_graphs_over_several_families(family: Any, known: dict[str, Any]) -> None:
    families = [family(f"family_{k}", p, level=known["params"]["alpha"]) for k, p in enumerate(known["inputs"]["p"])]
    given = as_written(known["params"]["weights"], known["params"]["transitions"])
    decided = graph(families, nodes_are="hypotheses", **given)
    p_study = [float(one.p_study[0]) for one in decided]
    assert p_study == pytest.approx(known["expected"]["adjusted_p"], abs=known["tolerance"]["abs"])
    rejected = [k for k, one in enumerate(decided, start=1) if one.states == ("rejected",)]
    assert rejected == known["expected"]["rejected"]


CHAIN = {"start": {"a_1": 0.5, "a_2": 0.5}, "passes": [["a_1", "b_1", 1], ["a_2", "b_1", 1], ["b_1", "b_2", 1]]}


def test_who_holds_nothing_is_not_tested_and_says_for_whom_it_waits(family: Any) -> None:
    a, b = graph([family("a", 0.2, 0.3), family("b", 0.001, 0.001)], nodes_are="hypotheses", **CHAIN)
    assert a.states == ("not_rejected", "not_rejected")
    assert b.states == ("not_tested", "not_tested")
    assert b.decides == ("", "")
    assert b.tested, "no gate stands before a family of hypotheses that each have their own"
    assert b.falls is not None
    assert b.falls.waits_for == (("a_1", "a_2"), ("b_1",))
    assert np.isnan(a.p_family).all()
    assert np.isnan(a.local_level)
    # the first falls at 0.2 / 0.5, and passes half of the level on
    assert a.p_study.tolist() == pytest.approx([0.4, 0.6])
    assert b.p_study.tolist() == pytest.approx([0.4, 0.4])


def test_the_arithmetic_of_each_step(family: Any) -> None:
    a, b = graph([family("a", 0.01, 0.3), family("b", 0.015, 0.001)], nodes_are="hypotheses", **CHAIN)
    assert a.falls is not None
    assert b.falls is not None
    # by hand: a_1 at 0.01 / 0.5; b_1 then holds 0.5: 0.015 / 0.5; b_2 holds 0.5: 0.002, lifted; a_2: 0.3 / 0.5
    assert a.falls.step.tolist() == [1, 4]
    assert b.falls.step.tolist() == [2, 3]
    assert [*a.falls.factor, *b.falls.factor] == pytest.approx([2, 2, 2, 2])
    assert [*a.falls.product, *b.falls.product] == pytest.approx([0.02, 0.6, 0.03, 0.002])
    assert [*a.falls.from_step, *b.falls.from_step] == [1, 4, 2, 2]
    assert b.p_study.tolist() == pytest.approx([0.03, 0.03])


def test_a_finding_of_harm_passes_nothing_on(family: Any) -> None:
    a, b = graph([family("a", 0.01, 0.3, against=(0,)), family("b", 0.001, 0.001)], nodes_are="hypotheses", **CHAIN)
    assert a.states == ("rejected_against_claim", "not_rejected")
    assert b.states == ("not_tested", "not_tested")
    assert b.falls is not None
    assert b.falls.waits_for[0] == ("a_1", "a_2")
    missing, _ = graph([family("a", None, 0.3), family("b", 0.001, 0.001)], nodes_are="hypotheses", **CHAIN)
    assert missing.states == ("no_result", "not_rejected")
    assert missing.p_study.tolist() == pytest.approx([1.0, 0.6])


def test_a_node_that_nothing_reaches_has_no_step(family: Any) -> None:
    (a,) = graph([family("a", 0.01, None, 0.001)], nodes_are="hypotheses", start={"a_1": 1},
                 passes=[["a_1", "a_2", 1], ["a_2", "a_3", 1]])  # fmt: skip
    assert a.states == ("rejected", "no_result", "not_tested")
    assert a.falls is not None
    assert a.falls.step.tolist() == [1, 2, 0]
    assert np.isnan(a.falls.factor[2])
    assert a.falls.product[2] == 1.0
    assert a.p_study.tolist() == [0.01, 1.0, 1.0]


SHARED = {"nodes_are": "families", "start": {"a": 0.6, "b": 0.4}, "passes": [["a", "b", 1], ["b", "c", "1/2"]]}


def test_a_family_passes_on_only_when_all_of_it_fell(family: Any) -> None:
    a, b, c = graph([family("a", 0.01, 0.04), family("b", 0.015, 0.03), family("c", 0.001)], **SHARED)
    assert (a.local_level, b.local_level, c.local_level) == pytest.approx((0.03, 0.02, 0))
    assert a.states == ("rejected", "not_rejected")
    assert b.states == ("rejected", "not_rejected")
    assert c.states == ("not_tested",)
    assert c.closed_by == "b"
    # by hand: all of a at 0.04 / 0.6, from where b holds everything and fell at 0.03 / 0.4 before it could: 0.0667
    assert a.p_study.tolist() == pytest.approx([0.01 / 0.6, 0.04 / 0.6])
    assert b.p_study.tolist() == pytest.approx([0.015 / 0.4, 0.04 / 0.6])
    assert c.p_study.tolist() == pytest.approx([0.04 / 0.6])


def test_all_of_a_family_frees_its_share(family: Any) -> None:
    a, b, c = graph([family("a", 0.01, 0.03), family("b", 0.015, 0.03), family("c", 0.03)], **SHARED)
    assert (a.local_level, b.local_level, c.local_level) == pytest.approx((0.03, 0.05, 0.025))
    assert [one.states for one in (a, b, c)] == [("rejected",) * 2, ("rejected",) * 2, ("not_rejected",)]
    assert c.p_study.tolist() == pytest.approx([0.06])


@pytest.mark.parametrize("seed", range(10))
def test_one_chain_of_families_is_serial(family: Any, seed: int) -> None:
    random = np.random.default_rng(seed)
    families = [family(f"f{k}", *(random.random(2) ** 3)) for k in range(3)]
    chain = graph(families, nodes_are="families", start={"f0": 1}, passes=[["f0", "f1", 1], ["f1", "f2", 1]])
    for one, other in zip(chain, serial(families), strict=True):
        assert one.p_study == pytest.approx(other.p_study, rel=1e-14)
        assert one.states == other.states
