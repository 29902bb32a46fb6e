"""A graph: what is rejected passes its share of the level on, along arrows fixed beforehand."""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from beforehand.multiplicity.contract import WHOLE, Vector
from beforehand.multiplicity.graph import Graph, Walk, walk
from beforehand.multiplicity.rising import RisingShare
from beforehand.multiplicity.scheme import (
    Decisions,
    Falls,
    Families,
    FamilyDecision,
    FamilyResult,
    decide,
    one_level,
    scheme,
)

NodesAre = Literal["hypotheses", "families"]
Passes = Iterable[Sequence[float | str]]


@scheme(
    title="Graph",
    keeps=(
        "The error rate of the whole study stays at the level: what the nodes hold never sums to more than the level, "
        "and no node holds less after another was rejected."
    ),
    decides="p_study",
    replays=WHOLE,
    reference="Bretz, Maurer, Brannath & Posch (2009), Statistics in Medicine 28:586-604",
)
def graph(families: Families, *, nodes_are: NodesAre, start: Mapping[str, float | str], passes: Passes) -> Decisions:
    """Test each node at the share of the level that it holds; a rejected one passes its share on.

    Where the nodes are families, each family's own procedure is run at the level that it holds, and it passes its
    share on only when every member is rejected for its claim. Where they are hypotheses, each is tested by itself.

    p_study is exact: the level rises from 0, and each node falls at the smallest level at which its share of it is
    enough (``multiplicity.graph.walk``).

    Parameters
    ----------
    families : sequence of FamilyResult
        In any order; where the nodes are hypotheses, with their members and unadjusted p.
    nodes_are : {"hypotheses", "families"}
        What the nodes are.
    start : mapping from id to number, or fraction as text
        The shares of the level with which nodes start; a node that isn't named starts with none.
    passes : iterable of (from, to, share)
        A share is a number, a fraction as text, "epsilon" or "1 - epsilon".

    Returns
    -------
    tuple of FamilyDecision
        One for each family.

    Raises
    ------
    ValueError
        When the families don't share one level, or the shares are no graph.

    Notes
    -----
    Nothing is assumed of the dependence between nodes; families need a procedure that keeps the family-wise error rate
    strongly. A shortcut to closed testing with weighted Bonferroni tests (Bretz et al. 2009).
    """
    walked = walk_over(families, nodes_are=nodes_are, start=start, passes=passes)
    return _hypotheses(families, walked) if nodes_are == "hypotheses" else _families(families, walked)


@dataclass(frozen=True, kw_only=True)
class Walked:
    """A graph with its walk, and how far the walk comes at the level of the study."""

    nodes: tuple[str, ...]
    p: Vector
    """Shape (n,): of each node; of a family, the smallest level at which all of it is rejected."""
    before: Graph
    walk: Walk
    level: float
    steps: int
    """How many steps are taken at the level."""
    staying: tuple[int, ...]
    """The nodes that have not passed their share on at the level."""
    after: Graph
    """The graph of those."""

    def waits_for(self, node: int) -> tuple[str, ...]:
        """Name the nodes that would have to pass their share on before a node that holds none has any."""
        senders = self.after.passes[:, self.staying.index(node)].astype(bool)
        return tuple(self.nodes[self.staying[place]] for place in np.flatnonzero(senders))


def walk_over(families: Families, *, nodes_are: NodesAre, start: Mapping[str, float | str], passes: Passes) -> Walked:
    """Walk the graph of a study; the parameters are those of ``graph``."""
    level = one_level(families)
    if nodes_are == "hypotheses":
        nodes = tuple(member for family in families for member in family.members)
        p, passing = (
            np.concatenate([getattr(family, name) for family in families]) for name in ("p_family", "may_open")
        )
    else:
        nodes = tuple(family.id for family in families)
        p = np.array([family.opens_at for family in families])
        passing = np.array([bool(family.may_open.size and family.may_open.all()) for family in families])
    before = Graph.written(nodes, start, passes)
    walked = walk(before, p, passing=passing)
    steps = walked.steps_at(level)
    left = [node for node in walked.order[:steps] if passing[node]]
    staying = tuple(node for node in range(len(nodes)) if node not in left)
    return Walked(
        nodes=nodes,
        p=p,
        before=before,
        walk=walked,
        level=level,
        steps=steps,
        staying=staying,
        after=before.without(left),
    )


def _hypotheses(families: Families, walked: Walked) -> Decisions:
    path = walked.walk
    fallen = (path.step > 0) & (path.step <= walked.steps)
    reached = fallen | (path.held[walked.steps] > 0)
    decisions, first = [], 0
    for family in families:
        here = slice(first, first + family.p_family.size)
        first = here.stop
        decided = decide(
            family, decides="p_study", p_study=path.adjusted[here], local_level=np.nan, reached=reached[here]
        )
        falls = _falls(walked, here, reached)
        decisions.append(replace(decided, p_family=np.full_like(family.p_family, np.nan), falls=falls))
    return tuple(decisions)


def _falls(walked: Walked, here: slice, reached: NDArray[np.bool_]) -> Falls:
    path, places = walked.walk, range(here.start, here.stop)
    return Falls(
        step=path.step[here],
        factor=1 / path.weight[here],
        product=np.where(path.step[here] > 0, path.product[here], 1.0),
        from_step=path.taken_from[here],
        waits_for=tuple(() if reached[place] else walked.waits_for(place) for place in places),
    )


def _families(families: Families, walked: Walked) -> Decisions:
    at = np.append(0.0, walked.walk.adjusted[list(walked.walk.order)])
    return tuple(_family(family, node, at, walked) for node, family in enumerate(families))


def _family(family: FamilyResult, node: int, at: Vector, walked: Walked) -> FamilyDecision:
    # once it has passed its share on, a family needs none: all of it is rejected
    share = RisingShare(at, np.maximum.accumulate(walked.walk.held[:, node]))
    held = share.at_level(walked.level)
    return decide(
        family,
        decides="p_study",
        p_study=share.first_level(family.p_family),
        local_level=held * walked.level,
        closed_by="" if held > 0 else ", ".join(walked.waits_for(node)),
    )


def replay(  # noqa: PLR0915 -- one text, which recheck.py holds
    families: list[dict[str, Any]], nodes_are: str, start: dict[str, Any], passes: list[list[Any]]
) -> list[dict[str, Any]]:
    """Reject and pass on in the order of the list: at the level itself, and for p_study while it rises from 0.

    A share is kept as its leading term c x epsilon^k, as (c, k). Nothing is subtracted, so the limits are exact.
    """
    from fractions import Fraction

    single = nodes_are == "hypotheses"
    members: dict[str, list[tuple[int, int]]] = {}
    for k, family in enumerate(families):
        places = [(k, i) for i in range(len(family["p"]))]
        members.update({family["members"][i]: [(k, i)] for k, i in places} if single else {family["id"]: places})
    adjusted = [family["p"] if single else family["judge"](1.0)["adjusted"] for family in families]

    def plus(x: Any, y: Any) -> Any:
        if not x or not y or x[1] != y[1]:
            return min((one for one in (x, y) if one), key=lambda one: one[1])
        return x[0] + y[0], x[1]

    def times(x: Any, y: Any) -> Any:
        return x[0] * y[0], x[1] + y[1]

    def arrows_from(node: str) -> dict[str, Any]:
        """Give what a node passes to each receiver, and to "" what it passes to nobody."""
        written = {"epsilon": (Fraction(0), Fraction(1)), "1 - epsilon": (Fraction(1), Fraction(-1))}
        sent = {b: written.get(x) or (Fraction(str(x)), Fraction(0)) for a, b, x in passes if a == node}
        rest = (Fraction(1), Fraction(0))
        for c, multiple in sent.values():
            rest = rest[0] - c, rest[1] - multiple
        sent[""] = rest
        return {b: (float(c), 0) if c else (float(multiple), 1) for b, (c, multiple) in sent.items() if c or multiple}

    def leave(node: str, held: dict[str, Any], arrows: dict[str, Any]) -> None:
        sent = arrows.pop(node) or {"": (1.0, 0)}  # all of it would come back: it goes to nobody
        whole: Any = None
        for part in sent.values():
            whole = plus(whole, part)
        into = {a: own.pop(node) for a, own in arrows.items() if node in own}
        for b, part in sent.items():
            share = part[0] / whole[0], part[1] - whole[1]
            if b:
                held[b] = plus(held.get(b), times(held[node], share))
            for a, term in into.items():
                if a != b:
                    arrows[a][b] = plus(arrows[a].get(b), times(term, share))

    def run(level: float | None) -> tuple[dict[str, float], dict[str, Any], dict[Any, float]]:
        """Give the shares held, the arrows left, and the level at which each member fell; None: the level rises."""
        arrows = {node: arrows_from(node) for node in members}
        held = {node: (float(Fraction(str(start[node]))), 0) for node in members if start.get(node)}
        fell: dict[Any, float] = {}
        top = level or 0.0
        while True:
            before = len(fell)
            shares = {node: term[0] for node, term in held.items() if term[1] == 0}
            for node in [one for one in arrows if one in shares and members[one]]:
                if level is None:
                    met = [one for one in members[node] if adjusted[one[0]][one[1]] / shares[node] <= top]
                elif single:
                    (k, i) = members[node][0]
                    met = members[node] if families[k]["p"][i] <= shares[node] * top * (1 + 1e-12) else []
                else:
                    judged = families[members[node][0][0]]["judge"](shares[node] * top)["rejected"]
                    met = [one for one in members[node] if judged[one[1]]]
                fell.update({one: top for one in met if one not in fell})
                if all(one in fell and families[one[0]]["may_open"][one[1]] for one in members[node]):
                    leave(node, held, arrows)
            if len(fell) == before:
                next_up = [adjusted[one[0]][one[1]] / shares[node] for node in arrows if node in shares
                           for one in members[node] if one not in fell]  # fmt: skip
                if level is not None or min(next_up, default=1.0) >= 1:
                    return shares, arrows, fell
                top = min(next_up)

    level = families[0]["level"] if families else 0.0
    shares, arrows, fell = run(level)
    _, _, falls_at = run(None)
    waits_for = {node: [a for a in arrows if node not in shares and node in arrows[a]] for node in members}
    again = []
    for k, family in enumerate(families):
        places = [(k, i) for i in range(len(family["p"]))]
        nodes = family["members"] if single else [family["id"]] * len(places)
        again.append({
            "closed_by": "" if single else ", ".join(waits_for[family["id"]]),
            "local_level": None if single else shares.get(family["id"], 0.0) * level,
            "p_family": [None] * len(places) if single else adjusted[k],
            "p_study": [min(1.0, falls_at.get(one, 1.0)) for one in places],
            "tested": [node in shares for node in nodes],
            "rejected": [one in fell for one in places],
            "waits_for": [waits_for[node] for node in nodes],
        })  # fmt: skip
    return again
