"""The first threshold that the p of a hypothesis would have to meet, with all that others could pass on to it."""

import math

import numpy as np

from beforehand.analysis.families import EnteredFamily, order_of, scheme_of
from beforehand.multiplicity.graph import Graph
from beforehand.multiplicity.scheme import SCHEMES
from beforehand.spec.model import Exact
from beforehand.spec.planned import PlannedFamily, Spec


def first_thresholds(spec: Spec) -> dict[str, float]:
    """Give the first threshold of every hypothesis, by its id."""
    shares = largest_shares(spec)
    return {
        member.id: _threshold(family, place, shares.get(member.id, shares.get(family.id, 1.0)))
        for family in spec.families
        for place, member in enumerate(family.members)
    }


def largest_shares(spec: Spec) -> dict[str, float]:
    """Give the largest share of the level that each node or family could ever hold; 1 where none is named."""
    graph = spec.document.graph
    covered = [spec.family(name) for name in order_of(spec)]
    if scheme_of(spec) == "shares":
        return {family.id: family.sure_share or 1.0 for family in covered}
    if graph is None:
        return {}
    of_families = graph.nodes_are == "families"
    nodes = [node for one in covered for node in ([one.id] if of_families else [m.id for m in one.members])]
    start = {node: share.canonical() for node, share in graph.start.items()}
    passes = [(a.from_, a.to, a.share.canonical() if isinstance(a.share, Exact) else a.share) for a in graph.pass_]
    before = Graph.written(nodes, start, passes)
    alone = (before.without(other for other in range(len(nodes)) if other != node) for node in range(len(nodes)))
    return {node: float(graph_of_one.held[0]) for node, graph_of_one in zip(nodes, alone, strict=True)}


def _threshold(family: PlannedFamily, place: int, share: float) -> float:
    """Give the threshold of one p when all others of its family are 1: the first step of any procedure.

    The threshold of a statistic needs degrees of freedom and sizes; Bonferroni's share of the level stands for it.
    """
    level, m = share * float(family.promise.level), len(family.members)
    nobody = np.full(m, False)
    entered = EnteredFamily(family=family, p=np.ones(m), second_p=(), has_result=nobody, against_claim=nobody)
    procedure = entered.procedure
    if procedure.name in SCHEMES:
        return level  # a node by itself
    if procedure.compares != "anything":
        return level / family.planned
    p = entered.p.copy()
    p[place] = 0.0
    first = float(procedure.steps(p, **entered.given).thresholds(level)[0])
    return first if math.isfinite(first) else level
