"""Whether a graph names what there is, passes on no more than it holds, and reaches every node."""

from collections.abc import Iterator
from fractions import Fraction

import numpy as np

from beforehand.multiplicity.graph import NONE, Graph, polynomial, unpassed, walk
from beforehand.spec.checks.sizes import members_of
from beforehand.spec.hints import nearest
from beforehand.spec.model import Document, Exact, Family, Passing
from beforehand.spec.model import Graph as WrittenGraph
from beforehand.spec.places import Finding


def check_graph(document: Document) -> Iterator[Finding]:
    """Check the graph, and that families are adjusted as its nodes ask for."""
    graph, asked = document.graph, document.promise.across_families == "graph"
    yield from _procedures(document)
    if graph is None:
        if asked:
            yield Finding(("promise", "across_families"), "'graph' needs the key 'graph': its nodes, start and arrows")
        return
    if not asked:
        yield Finding(("graph",), "the spec has a 'graph', which needs across_families: graph", at_key=True)
        return
    nodes = _nodes(document, graph)
    if nodes is not None:
        faults = [*_start(graph, nodes), *_arrows(graph, nodes)]
        yield from faults or _unreached(graph, nodes)


def _covered(document: Document) -> Iterator[tuple[int, Family]]:
    return ((number, family) for number, family in enumerate(document.families) if family.promise is None)


def _nodes(document: Document, graph: WrittenGraph) -> list[str] | None:
    """Name all nodes; None where some come from the rows of the data, or can't be told."""
    if graph.nodes_are == "families":
        return [family.id for _, family in _covered(document)]
    members = [members_of(document, family) for _, family in _covered(document)]
    return None if None in members else [member for those in members for member in those or ()]


def _procedures(document: Document) -> Iterator[Finding]:
    graph = document.graph if document.promise.across_families == "graph" else None
    for number, family in enumerate(document.families):
        nodes_are = graph.nodes_are if graph and family.promise is None else None
        why = _unfit(family, nodes_are)
        if why:
            yield Finding(("families", number, "procedure"), why)
        from_rows = family.hypotheses_from is not None and not family.hypotheses_from.outcomes
        if nodes_are == "hypotheses" and from_rows:
            yield Finding(
                ("families", number, "hypotheses_from"),
                f"the hypotheses of family '{family.id}' come from the rows of the data, so a graph can't name them. "
                "Write them one by one, or nodes_are: families.",
                at_key=True,
            )


def _unfit(family: Family, nodes_are: str | None) -> str | None:
    """Say why a family can't be adjusted as it asks for."""
    if family.procedure != "graph":
        return (
            f"the nodes of the graph are hypotheses, so it adjusts those of family '{family.id}'. "
            "Write procedure: graph."
            if nodes_are == "hypotheses"
            else None
        )
    if nodes_are == "families":
        return (
            f"the nodes of the graph are families, so family '{family.id}' needs a procedure of its own. "
            "Name it, or write nodes_are: hypotheses."
        )
    return (
        f"the hypotheses of family '{family.id}' are adjusted by a graph, which needs across_families: graph, and a "
        "graph with nodes_are: hypotheses"
        if nodes_are is None
        else None
    )


def _start(graph: WrittenGraph, nodes: list[str]) -> Iterator[Finding]:
    for node, share in graph.start.items():
        if node not in nodes:
            yield Finding(("graph", "start", node), _unknown(graph, node, nodes), at_key=True)
        if not 0 <= share.fraction <= 1:
            yield Finding(("graph", "start", node), f"'{node}' starts with {share.fraction}, which is no share of 1")
    total = sum((share.fraction for share in graph.start.values()), Fraction(0))
    if total > 1 and all(0 <= share.fraction <= 1 for share in graph.start.values()):
        yield Finding(("graph", "start"), f"the nodes start with {total} of the level. Together they have at most 1.")


def _unknown(graph: WrittenGraph, node: str, nodes: list[str]) -> str:
    noun = "hypothesis" if graph.nodes_are == "hypotheses" else "family"
    return f"'{node}' is no {noun} that the promise of the study covers. {nearest(node, nodes)}"


def _arrows(graph: WrittenGraph, nodes: list[str]) -> Iterator[Finding]:
    pairs = [(one.from_, one.to) for one in graph.pass_]
    for place, one in enumerate(graph.pass_):
        for key, node in (("from", one.from_), ("to", one.to)):
            if node not in nodes:
                yield Finding(("graph", "pass", place, key), _unknown(graph, node, nodes))
        if one.from_ == one.to:
            yield Finding(("graph", "pass", place, "to"), f"'{one.to}' passes a share to itself. Take it out.")
        if pairs[place] in pairs[:place]:
            yield Finding(
                ("graph", "pass", place), f"there is an arrow from '{one.from_}' to '{one.to}' already. Take one out."
            )
    for node in dict.fromkeys(one.from_ for one in graph.pass_):
        places = [place for place, one in enumerate(graph.pass_) if one.from_ == node]
        if unpassed(polynomial(_share(graph.pass_[place])) for place in places) < NONE:
            yield Finding(
                ("graph", "pass", places[-1], "share"),
                f"'{node}' passes on more than it holds: {' + '.join(_text(graph.pass_[i]) for i in places)}. "
                "Together its shares are at most 1.",
            )


def _share(one: Passing) -> float | str:
    return one.share.canonical() if isinstance(one.share, Exact) else one.share


def _text(one: Passing) -> str:
    share = _share(one)
    return f"{share:g}" if isinstance(share, float) else f"({share})" if " " in share else share


def _unreached(graph: WrittenGraph, nodes: list[str]) -> Iterator[Finding]:
    """Find nodes that hold nothing even when everything that can fall has fallen."""
    start = {node: share.canonical() for node, share in graph.start.items()}
    arrows = Graph.written(nodes, start, [(one.from_, one.to, _share(one)) for one in graph.pass_])
    walked = walk(arrows, np.zeros(len(nodes)), passing=np.full(len(nodes), True))
    never = [node for node, step in zip(nodes, walked.step, strict=True) if not step]
    if never:
        yield Finding(
            ("graph",),
            f"no share of the level ever reaches: {', '.join(never)}. Let each start with one, or receive one (more "
            "than epsilon) from a node that has one.",
            at_key=True,
        )
