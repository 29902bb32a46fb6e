"""The numbers of a graph for its figure: what its nodes hold before and after, and each step of its walk."""

from collections.abc import Sequence
from typing import Any

import numpy as np

from beforehand.analysis.families import JudgedFamily, covered, given_to_scheme, result_of, scheme_of
from beforehand.multiplicity.across.graph import Walked, walk_over
from beforehand.multiplicity.graph import Leading
from beforehand.record.model import HypothesisRecord
from beforehand.spec.planned import Spec
from beforehand.terms import State

MOST_NODES = 18
"""Graphs with more nodes are not drawn; their steps stand in the decision trails."""


def graph_drawn(
    spec: Spec, judged: Sequence[JudgedFamily], words: dict[str, HypothesisRecord]
) -> dict[str, Any] | None:
    """Give what the figure of the graph draws; None where there is no graph, or too large a one."""
    if scheme_of(spec) != "graph":
        return None
    entered = covered(spec, [one.entered for one in judged])
    given = given_to_scheme(spec, entered)
    walked = walk_over([result_of(one) for one in entered], **given)
    if len(walked.nodes) > MOST_NODES:
        return None
    states = _states(judged)
    labels = {node: words[node].label if node in words else node for node in walked.nodes}
    return {
        "nodes_are": given["nodes_are"],
        "level": walked.level,
        "nodes": [
            {"id": node, "label": labels[node], "state": states[node]} | _shares(walked, at)
            for at, node in enumerate(walked.nodes)
        ],
        "arrows_before": given["passes"],
        "arrows_after": _arrows_after(walked),
        "steps": [_step(walked, number) for number in range(1, len(walked.walk.order) + 1)],
    }


def _states(judged: Sequence[JudgedFamily]) -> dict[str, State]:
    """Give the state of every hypothesis, and of every family: rejected when all of it is for its claim."""
    found: dict[str, State] = {}
    for one in judged:
        states = one.decision.states
        found |= {member.id: state for member, state in zip(one.entered.family.members, states, strict=True)}
        tested: State = "rejected" if states and set(states) == {"rejected"} else "not_rejected"
        found[one.entered.family.id] = tested if one.decision.tested else "not_tested"
    return found


def _shares(walked: Walked, node: int) -> dict[str, float]:
    """Give what a node holds at the start, and at the level: once it has passed that on, what it was."""
    path = walked.walk
    fallen = 0 < path.step[node] <= walked.steps
    at_level = path.weight[node] if fallen else path.held[walked.steps, node]
    return {"start": float(path.held[0, node]), "share": float(at_level)}


def _arrows_after(walked: Walked) -> list[list[float | str]]:
    nodes = [walked.nodes[at] for at in walked.staying]
    senders, receivers = np.nonzero(walked.after.passes[:, :-1].astype(bool))
    return [
        [nodes[a], nodes[b], _share(walked.after.passes[a, b])] for a, b in zip(senders, receivers, strict=True)
    ]  # fmt: skip


def _share(share: Leading | float) -> float | str:
    return "epsilon" if isinstance(share, Leading) and share.order else float(share)


def _step(walked: Walked, number: int) -> dict[str, Any]:
    """Give one step: who falls, by which arithmetic, and what those hold then that received something."""
    path = walked.walk
    node = path.order[number - 1]
    before, after = path.held[number - 1], path.held[number]
    return {
        "step": number,
        "id": walked.nodes[node],
        "share": float(path.weight[node]),
        "p": float(walked.p[node]),
        "product": float(path.product[node]),
        "adjusted": float(path.adjusted[node]),
        "from_step": int(path.taken_from[node]),
        "taken": number <= walked.steps,
        "then": {walked.nodes[other]: float(after[other]) for other in np.flatnonzero(after > before)},
    }
