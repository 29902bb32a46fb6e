"""Families judged: each by its own procedure, all together by the scheme; and both a second time on plain lists."""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from beforehand.analysis.agreement import Agreement, bound_near
from beforehand.multiplicity.contract import PROCEDURES, Ordered, Procedure, Steps, Vector
from beforehand.multiplicity.scheme import SCHEMES, FamilyDecision, FamilyResult
from beforehand.multiplicity.survival import largest_families
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

    @property
    def procedure(self) -> Procedure:
        """The family's procedure."""
        return PROCEDURES[self.family.procedure]

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
        }
        needed = {name: value for name, value in ingredients.items() if name in self.procedure.needs}
        return needed | dict(self.family.procedure_options)

    @property
    def replayed_with(self) -> dict[str, Any]:
        """The same for a replay, to which the level comes by itself."""
        return {name: value for name, value in self.given.items() if name != "level"}


@dataclass(frozen=True, kw_only=True)
class JudgedFamily:
    """One family with its decisions; arrays have one item for each member, ranks count from 1."""

    entered: EnteredFamily
    decision: FamilyDecision
    rank: NDArray[np.int64]
    factor: Vector
    product: Vector
    from_rank: NDArray[np.int64]
    survives_up_to: NDArray[np.int64]
    thresholds: Vector
    """For each member the p-value that its rank has to meet."""
    arithmetic: tuple[str, ...]
    """For each member where its product comes from, where it is no multiple of p."""


def scheme_of(spec: Spec) -> AcrossFamilies:
    """Name the scheme; a single family is a series of one."""
    return spec.document.promise.across_families or "serial"


def judge(spec: Spec, entered: tuple[EnteredFamily, ...], agreement: Agreement) -> tuple[JudgedFamily, ...]:
    """Judge every family, in the order of the spec."""
    results = {e.family.id: _result(e) for e in entered}
    together = order_of(spec)
    decisions: dict[str, FamilyDecision] = {}
    by_id = {e.family.id: e for e in entered}
    groups = [(scheme_of(spec), together), ("separate", [e.family.id for e in entered if e.family.id not in together])]
    for scheme, ids in groups:
        decided = SCHEMES[scheme]([results[i] for i in ids])
        decisions |= {decision.id: decision for decision in decided}
        _judge_again([by_id[i] for i in ids], decided, results, scheme, agreement)
    return tuple(_judged(e, decisions[e.family.id]) for e in entered)


def order_of(spec: Spec) -> list[str]:
    """Name the families that the study's promise covers, in the order in which they are tested."""
    covered = [family.id for family in spec.families if not family.stands_apart]
    return [name for name in spec.document.promise.order or covered if name in covered]


def _result(entered: EnteredFamily) -> FamilyResult:
    return FamilyResult(
        id=entered.family.id,
        p_family=entered.procedure(entered.p, **entered.given),
        has_result=entered.has_result,
        against_claim=entered.against_claim,
        level=entered.level,
    )


def _judged(entered: EnteredFamily, decision: FamilyDecision) -> JudgedFamily:
    ordered = Ordered.of(entered.p)
    steps: Steps = entered.procedure.steps(ordered, **entered.given)
    return JudgedFamily(
        entered=entered,
        decision=decision,
        rank=ordered.unsorted(np.arange(1, entered.p.size + 1)),
        factor=ordered.unsorted(steps.factor),
        product=ordered.unsorted(steps.product),
        from_rank=ordered.unsorted(steps.taken_from + 1),
        thresholds=ordered.unsorted(entered.level / steps.factor),
        arithmetic=tuple(ordered.unsorted(np.array(steps.arithmetic or [""] * entered.p.size, dtype=object))),
        survives_up_to=np.where(
            [state in REJECTED for state in decision.states],
            largest_families(entered.procedure, ordered, level=entered.level),
            0,
        ),
    )


def _judge_again(
    entered: list[EnteredFamily],
    decided: tuple[FamilyDecision, ...],
    results: dict[str, FamilyResult],
    scheme: str,
    agreement: Agreement,
) -> None:
    """Adjust and decide again from the second computation's p, and compare everything."""
    replays = [e.procedure.replay(list(e.second_p), e.level, **e.replayed_with) for e in entered]
    may_open = [[bool(x) for x in results[e.family.id].may_open] for e in entered]
    again = SCHEMES[scheme].replay(
        [e.family.id for e in entered],
        [replay["adjusted"] for replay in replays],
        may_open,
        [replay["rejected"] for replay in replays],
    )
    for e, decision, replay, second in zip(entered, decided, replays, again, strict=True):
        first = results[e.family.id]
        _compare(agreement, e, "adjusted p within the family", first.p_family, replay["adjusted"])
        if scheme != "separate":
            _compare(agreement, e, "adjusted p across families", decision.p_study, second["p_study"])
        for index, member in enumerate(e.family.members):
            state = _state_again(e, index, closed=bool(second["closed_by"]), rejected=replay["rejected"][index])
            agreement.same(member.id, "decision", decision.states[index], state)


def _compare(agreement: Agreement, e: EnteredFamily, quantity: str, first: Vector, second: list[Any]) -> None:
    for member, x, y in zip(e.family.members, first, second, strict=True):
        bound = bound_near(e.level, float(x), bound=ADJUSTED_BOUND)
        agreement.numbers(member.id, quantity, float(x), float(y), bound=bound)


def _state_again(e: EnteredFamily, index: int, *, closed: bool, rejected: bool) -> State:
    if not e.has_result[index]:
        return "no_result"
    if closed:
        return "not_tested"
    if not rejected:
        return "not_rejected"
    return "rejected_against_claim" if e.against_claim[index] else "rejected"
