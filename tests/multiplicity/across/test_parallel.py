"""Parallel gates: what a family frees, and p_study by its definition."""

from pathlib import Path
from typing import Any

import numpy as np
import pytest
import yaml

from beforehand.multiplicity.across.parallel import SEPARABLE, parallel
from beforehand.multiplicity.contract import PROCEDURES
from beforehand.multiplicity.graph import Graph, walk

REFERENCES = Path(__file__).parents[2] / "references" / "p_values"


def known(file: str, name: str) -> dict[str, Any]:
    entries = yaml.safe_load((REFERENCES / f"{file}.yaml").read_text("utf-8"))
    return next(entry for entry in entries if entry["id"] == name)


def test_two_bonferroni_families_are_the_published_graph(family: Any) -> None:
    # grade C, derived by two routes: see the file; the second family by Holm
    entry = known("graph", "parallel-gatekeeping-4")
    p, expected = entry["inputs"]["p"], entry["expected"]
    families = [family("first", *p[:2], procedure="bonferroni"), family("second", *p[2:], procedure="holm")]
    first, second = parallel(families, truncations={"first": 0.0}, weights={})
    p_study = [*first.p_study, *second.p_study]
    assert p_study == pytest.approx(expected["adjusted_p"], abs=entry["tolerance"]["abs"])
    states = [*first.states, *second.states]
    assert [i for i, state in enumerate(states, start=1) if state == "rejected"] == expected["rejected"]
    assert second.local_level == pytest.approx(0.025)


def test_truncated_holm_then_holm(family: Any) -> None:
    # grade C: see the file
    entry = known("truncated_holm", "truncated-holm-two-families")
    inputs, gamma, expected = entry["inputs"], entry["params"]["gamma"], entry["expected"]
    families = [
        family("first", *inputs["family1_p"], procedure="truncated_holm", truncation=gamma),
        family("second", *inputs["family2_p"], procedure="holm"),
    ]
    first, second = parallel(families, truncations={"first": gamma}, weights={})
    assert first.states.count("rejected") == expected["family1_rejected"]
    assert second.states.count("rejected") == expected["family2_rejected"]
    assert second.local_level == pytest.approx(expected["alpha_family2"], abs=entry["tolerance"]["abs"])


@pytest.mark.parametrize(
    ("rejected", "carried"), [(3, "all"), (2, "two"), (1, "one"), (0, "none")], ids=["all", "two", "one", "none"]
)
def test_what_is_carried_on(family: Any, rejected: int, carried: str) -> None:
    entry = known("truncated_holm", "truncated-holm-levels")
    ending = "none" if carried == "none" else f"{carried}_rejected"
    p = [0.0] * rejected + [1.0] * (3 - rejected)
    _, second = parallel(
        [family("first", *p), family("second", 0.5)], truncations={"first": entry["params"]["gamma"]}, weights={}
    )
    assert second.local_level == pytest.approx(
        entry["expected"][f"alpha_carried_if_{ending}"], abs=entry["tolerance"]["abs"]
    )
    assert second.closed_by == ("" if rejected else "first")


@pytest.mark.parametrize("what", [{"against": (0,)}, {}], ids=["against the claim", "no result"])
def test_what_is_not_rejected_for_its_claim_frees_nothing(family: Any, what: dict[str, Any]) -> None:
    first = family("first", 0.001 if what else None, 0.001, procedure="bonferroni", **what)
    _, second = parallel([first, family("second", 0.03)], truncations={"first": 0.0}, weights={})
    assert second.local_level == 0.025
    assert second.states == ("not_rejected",)
    # half of the level at any level, so 0.03 / 0.5
    assert second.p_study.tolist() == pytest.approx([0.06])


def test_who_freed_nothing_keeps_everything_behind_it_closed(family: Any) -> None:
    families = [family("a", 0.2, 0.3), family("b", 0.001), family("c", 0.001, None)]
    a, b, c = parallel(families, truncations={"a": 0.0, "b": 0.0}, weights={})
    assert a.tested
    assert b.closed_by == c.closed_by == "a"
    assert b.states == ("not_tested",)
    assert c.states == ("not_tested", "no_result")
    assert b.local_level == 0
    assert np.isnan(b.p_family).all()
    # a frees half of the level from 0.2 on
    assert b.p_study.tolist() == pytest.approx([0.2])


def test_weights_count_instead_of_numbers(family: Any) -> None:
    # by hand: weights 0.8, 0.2 of 0.05; only the first is rejected, and frees 0.8 x 0.05
    first = family("first", 0.01, 0.02, procedure="weighted_bonferroni", weights=[0.8, 0.2])
    _, second = parallel([first, family("second", 0.04)], truncations={"first": 0.0}, weights={"first": [0.8, 0.2]})
    assert second.local_level == pytest.approx(0.04)
    assert second.states == ("rejected",)


@pytest.mark.parametrize("seed", range(10))
def test_bonferroni_families_are_a_graph(family: Any, seed: int) -> None:
    # another description of the same thing: each hypothesis of a family passes its share on to all of the next
    random = np.random.default_rng(seed)
    sizes = (3, 2, 3)
    p = [random.random(size) ** 4 for size in sizes]
    families = [family(f"f{k}", *values, procedure="bonferroni") for k, values in enumerate(p)]
    decided = parallel(families, truncations={"f0": 0.0, "f1": 0.0}, weights={})
    edges, weights = np.zeros((8, 8)), np.zeros(8)
    weights[:3] = 1 / 3
    edges[:3, 3:5], edges[3:5, 5:] = 1 / 2, 1 / 3
    walked = walk(Graph.of(weights, edges), np.concatenate(p), passing=np.full(8, True))
    assert np.concatenate([one.p_study for one in decided]) == pytest.approx(walked.adjusted, rel=1e-12)


def test_every_separable_procedure_is_there() -> None:
    assert set(SEPARABLE) <= set(PROCEDURES)
