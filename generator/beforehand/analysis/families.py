"""Families judged: each by its own procedure, all together by the scheme; and both a second time on plain lists."""

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from beforehand.analysis.agreement import Agreement, bound_near
from beforehand.analysis.succeeding import success_again, success_of
from beforehand.multiplicity.contract import PROCEDURES, Ordered, Procedure, Steps, Vector
from beforehand.multiplicity.further_groups import largest_with_further_groups
from beforehand.multiplicity.scheme import SCHEMES, Falls, FamilyDecision, FamilyResult, Plain
from beforehand.multiplicity.success import Success
from beforehand.multiplicity.survival import largest_families
from beforehand.spec.model import Exact
from beforehand.spec.planned import PlannedFamily, Spec
from beforehand.terms import AcrossFamilies, State

REJECTED: tuple[State, ...] = ("rejected", "rejected_against_claim")
ADJUSTED_BOUND = 1e-9
"""Largest relative disagreement of an adjusted p with its replay (closed forms)."""


@dataclass(frozen=True, kw_only=True)
class EnteredFamily:
    """One family as it enters its procedure; arrays and tuples have one item for each member."""

    family: PlannedFamily
    p: Vector
    """The p that enters: 1 where there is no result."""
    second_p: tuple[float, ...]
    """The same from the second computation."""
    has_result: NDArray[np.bool_]
    against_claim: NDArray[np.bool_]
    measured: dict[str, Any] = field(default_factory=dict)
    """What the tests found, where the procedure judges that instead of p: statistics, degrees of freedom, sizes."""
    second_measured: dict[str, Any] = field(default_factory=dict)
    """The same from the second computation."""

    @property
    def procedure(self) -> Procedure:
        """The family's procedure."""
        return PROCEDURES[self.family.procedure]

    @property
    def adjusted_by_scheme(self) -> bool:
        """Whether the family has no adjusted p of its own: the scheme of the procedure's name adjusts its members."""
        return self.procedure.name in SCHEMES

    @property
    def may_open(self) -> NDArray[np.bool_]:
        """Whether each member counts as rejected where it is: with a result, and not against its claim."""
        return self.has_result & ~self.against_claim

    @property
    def level(self) -> float:
        """The level of the promise that covers the family."""
        return float(self.family.promise.level)

    @property
    def given(self) -> dict[str, Any]:
        """What the procedure asks for beyond p, by name: ingredients in the order of the members, and its options."""
        m = len(self.family.members)
        ingredients: dict[str, Any] = {
            "weights": [1 / m if one.weight is None else float(one.weight) for one in self.family.members],
            "positions": list(range(m)),
            "level": self.level,
            **self.measured,
        }
        needed = {name: value for name, value in ingredients.items() if name in self.procedure.needs}
        return needed | dict(self.family.procedure_options)

    @property
    def replayed_with(self) -> dict[str, Any]:
        """The same for a replay, to which the level comes by itself."""
        return {name: value for name, value in self.given.items() if name != "level"}

    @property
    def second_replayed_with(self) -> dict[str, Any]:
        """The same from the second computation."""
        return {name: self.second_measured.get(name, value) for name, value in self.replayed_with.items()}


@dataclass(frozen=True, kw_only=True)
class JudgedFamily:
    """One family with its decisions; arrays have one item for each member, ranks count from 1."""

    entered: EnteredFamily
    decision: FamilyDecision
    rank: NDArray[np.int64]
    """Its rank by p; its step, where a graph adjusts it."""
    factor: Vector
    product: Vector
    from_rank: NDArray[np.int64]
    survives_up_to: NDArray[np.int64]
    thresholds: Vector
    """For each member the p-value that its rank has to meet."""
    arithmetic: tuple[str, ...]
    """For each member where its product comes from, where it is no multiple of p."""
    success: Success | None
    """What its claim about several hypotheses together came to; None where any rejection is a success."""

    @property
    def thresholds_by_id(self) -> dict[str, float]:
        """The thresholds of its members, by their ids; NaN where there is none."""
        members = self.entered.family.members
        return {member.id: float(value) for member, value in zip(members, self.thresholds, strict=True)}


def scheme_of(spec: Spec) -> AcrossFamilies:
    """Name the scheme; a single family is a series of one."""
    return spec.document.promise.across_families or "serial"


def judge(spec: Spec, entered: tuple[EnteredFamily, ...], agreement: Agreement) -> tuple[JudgedFamily, ...]:
    """Judge every family, in the order of the spec."""
    together = covered(spec, entered)
    apart = [one for one in entered if one.family.stands_apart]
    decisions: dict[str, FamilyDecision] = {}
    for scheme, group in ((scheme_of(spec), together), ("separate", apart)):
        given = given_to_scheme(spec, group) if group is together else {}
        results = [result_of(one) for one in group]
        decided = SCHEMES[scheme](results, **given)
        decisions |= {decision.id: decision for decision in decided}
        _judge_again(group, results, decided, agreement, scheme=scheme, given=given)
    return tuple(_judged(one, decisions[one.family.id]) for one in entered)


def order_of(spec: Spec) -> list[str]:
    """Name the families that the study's promise covers, in the order in which they are tested."""
    covered = [family.id for family in spec.families if not family.stands_apart]
    return [name for name in spec.document.promise.order or covered if name in covered]


def covered(spec: Spec, entered: Sequence[EnteredFamily]) -> list[EnteredFamily]:
    """Give the families that the study's promise covers, in the order in which they are tested."""
    by_id = {one.family.id: one for one in entered}
    return [by_id[name] for name in order_of(spec)]


def given_to_scheme(spec: Spec, entered: Sequence[EnteredFamily]) -> dict[str, Any]:
    """Give what the plan says of the scheme across the families that it covers, in their order, as values of JSON."""
    scheme, graph = scheme_of(spec), spec.document.graph
    if scheme == "shares":
        shares = {family.id: family.share for family in spec.document.families}
        return {"shares": {name: share.canonical() for name, share in shares.items() if share is not None}}
    if scheme == "parallel":
        options = {one.family.id: (one.family.procedure_options, one.given) for one in entered[:-1]}
        return {
            "truncations": {name: float(option.get("truncation", 0)) for name, (option, _) in options.items()},
            "weights": {name: list(given["weights"]) for name, (_, given) in options.items() if "weights" in given},
        }
    if graph is not None:
        passes = [(one.from_, one.to, one.share) for one in graph.pass_]
        return {
            "nodes_are": graph.nodes_are,
            "start": {node: share.canonical() for node, share in graph.start.items()},
            "passes": [[a, b, x.canonical() if isinstance(x, Exact) else x] for a, b, x in passes],
        }
    return {}


def result_of(entered: EnteredFamily) -> FamilyResult:
    """Give one family as its procedure leaves it to the scheme."""
    p_family = entered.p if entered.adjusted_by_scheme else entered.procedure(entered.p, **entered.given)
    return FamilyResult(
        id=entered.family.id,
        p_family=p_family,
        has_result=entered.has_result,
        against_claim=entered.against_claim,
        level=entered.level,
        members=tuple(member.id for member in entered.family.members),
    )


def _judged(entered: EnteredFamily, decision: FamilyDecision) -> JudgedFamily:
    if decision.falls is not None:
        return _fallen(entered, decision, decision.falls)
    ordered = Ordered.of(entered.p)
    steps: Steps = entered.procedure.steps(ordered, **entered.given)
    options = dict(entered.family.procedure_options)
    return JudgedFamily(
        entered=entered,
        decision=decision,
        success=success_of(entered.family, entered.p, entered.may_open, decision),
        rank=ordered.unsorted(np.arange(1, entered.p.size + 1)),
        factor=ordered.unsorted(steps.factor),
        product=ordered.unsorted(steps.product),
        from_rank=ordered.unsorted(steps.taken_from + 1),
        thresholds=ordered.unsorted(steps.thresholds(decision.local_level)),
        arithmetic=tuple(ordered.unsorted(np.array(list(steps.arithmetic) or [""] * entered.p.size, dtype=object))),
        survives_up_to=np.where(
            [state in REJECTED for state in decision.states],
            _stands_up_to(entered, ordered, level=decision.local_level, **options),
            0,
        ),
    )


def _stands_up_to(entered: EnteredFamily, ordered: Ordered, *, level: float, **options: Any) -> NDArray[np.int64]:
    if entered.procedure.compares == "anything":
        return largest_families(entered.procedure, ordered, level=level, **options)
    return largest_with_further_groups(entered.procedure, level=level, **entered.replayed_with)


def _fallen(entered: EnteredFamily, decision: FamilyDecision, falls: Falls) -> JudgedFamily:
    """Take the arithmetic from the walk of the graph, in which further hypotheses would have no place."""
    return JudgedFamily(
        entered=entered,
        decision=decision,
        rank=falls.step,
        factor=falls.factor,
        product=falls.product,
        from_rank=falls.from_step,
        thresholds=np.full(entered.p.size, np.nan),
        arithmetic=tuple("" if step else "no share of the level reaches it" for step in falls.step),
        success=None,
        survives_up_to=np.zeros(entered.p.size, dtype=np.int64),
    )


def _judge_again(
    entered: list[EnteredFamily],
    results: list[FamilyResult],
    decided: tuple[FamilyDecision, ...],
    agreement: Agreement,
    *,
    scheme: str,
    given: dict[str, Any],
) -> None:
    """Adjust and decide again from the second computation's p, and compare everything."""
    again = SCHEMES[scheme].replay([_plain(one) for one in entered], **given)
    for e, result, first, second in zip(entered, results, decided, again, strict=True):
        local = e.level if second["local_level"] is None else second["local_level"]
        if not e.adjusted_by_scheme:
            _compare(agreement, e, "adjusted p within the family", result.p_family, second["p_family"], near=local)
        if scheme != "separate":
            _compare(agreement, e, "adjusted p across families", first.p_study, second["p_study"], near=e.level)
        agreement.same(e.family.id, "gate", first.closed_by, second["closed_by"])
        _compare_success(agreement, e, first, level=0.0 if second["closed_by"] else local)
        for index, member in enumerate(e.family.members):
            state = _state_again(e, index, tested=second["tested"][index], rejected=second["rejected"][index])
            agreement.same(member.id, "decision", first.states[index], state)


def _plain(entered: EnteredFamily) -> Plain:
    p = list(entered.second_p)
    return {
        "id": entered.family.id,
        "members": [member.id for member in entered.family.members],
        "level": entered.level,
        "p": p,
        "may_open": entered.may_open.tolist(),
        "judge": lambda level: entered.procedure.replay(p, level, **entered.second_replayed_with),
    }


def _compare(
    agreement: Agreement, e: EnteredFamily, quantity: str, first: Vector, second: list[Any], *, near: float
) -> None:
    for member, x, y in zip(e.family.members, first, second, strict=True):
        bound = bound_near(near, float(x), bound=ADJUSTED_BOUND)
        agreement.numbers(member.id, quantity, float(x), float(y), bound=bound)


def _compare_success(agreement: Agreement, e: EnteredFamily, decision: FamilyDecision, *, level: float) -> None:
    first = success_of(e.family, e.p, e.may_open, decision)
    if first is not None:
        again = success_again(list(e.second_p), e.may_open.tolist(), at_least=first.at_least, level=level)
        bound = bound_near(level, first.p, bound=ADJUSTED_BOUND)
        agreement.numbers(e.family.id, "joint p of a family", first.p, again.p, bound=bound)
        agreement.same(e.family.id, "success of a family", first.reached, again.reached)


def _state_again(e: EnteredFamily, index: int, *, tested: bool, rejected: bool) -> State:
    if not e.has_result[index]:
        return "no_result"
    if not tested:
        return "not_tested"
    if not rejected:
        return "not_rejected"
    return "rejected_against_claim" if e.against_claim[index] else "rejected"
