"""What a procedure asks for that judges statistics: from the results of a family's tests, as values of JSON."""

import math
from collections.abc import Sequence
from typing import Any

from beforehand.analysis.computed import Computed
from beforehand.analysis.second import SecondResult
from beforehand.hypothesis_tests.contract import Outcome, Result
from beforehand.multiplicity.contract import PROCEDURES
from beforehand.spec.model import Groups, Hypothesis
from beforehand.spec.planned import PlannedFamily
from beforehand.terms import Alternative


def measured(family: PlannedFamily, computed: Sequence[Computed]) -> dict[str, Any]:
    """Give what the family's procedure judges; nothing where it judges p alone."""
    if PROCEDURES[family.procedure].compares == "anything":
        return {}
    return _ingredients(family, [one.result for one in computed], [judged_side(one) for one in computed])


def measured_again(family: PlannedFamily, seconds: Sequence[SecondResult]) -> dict[str, Any]:
    """Give the same from the results of the second computation, with the sides read from the spec once more."""
    if PROCEDURES[family.procedure].compares == "anything":
        return {}
    sides = [_side_again(family, member) for member in family.members]
    return _ingredients(family, [one.result for one in seconds], sides)


def judged_side(computed: Computed) -> Alternative:
    """Give the side on which a hypothesis is judged: of its claim where the p of that side enters, else of its test."""
    direction = computed.hypothesis.claim_direction
    if computed.entered_as == "claim side" and direction in ("above", "below"):
        return direction
    return computed.hypothesis.side


def _side_again(family: PlannedFamily, member: Hypothesis) -> Alternative:
    match (member.null_hypothesis.form, member.alternative, family.promise.level_is, member.claim_direction):
        case ("at_most", _, _, _) | (_, "above", _, _) | (_, "two_sided", "one_sided", "above"):
            return "above"
        case ("at_least", _, _, _) | (_, "below", _, _) | (_, "two_sided", "one_sided", "below"):
            return "below"
    return "two_sided"


def _ingredients(family: PlannedFamily, results: Sequence[Result], sides: Sequence[Alternative]) -> dict[str, Any]:
    pairs = [member.groups for member in family.members if member.groups]
    found = [one if isinstance(one, Outcome) else None for one in results]
    dfs = [one.df if one else 0.0 for one in found]
    one_sided = any(side != "two_sided" for side in sides)
    control = set.intersection(*({pair.first, pair.second} for pair in pairs)) if pairs else set()
    return {
        "statistics": [
            (-one.statistic if side == "below" else one.statistic) if one else 0.0
            for one, side in zip(found, sides, strict=True)
        ],
        "dfs": dfs,
        "df": max(dfs, default=0.0),
        "groups": len({group for pair in pairs for group in (pair.first, pair.second)}),
        "sides": 1 if one_sided else 2,
        "doubled": one_sided and family.promise.level_is == "two_sided",
        "loadings": [
            _loading(one.n, pair, side, control) if one and control else 0.0
            for one, pair, side in zip(found, pairs, sides, strict=True)
        ],
    }


def _loading(n: tuple[int, ...], pair: Groups, side: Alternative, control: set[str]) -> float:
    """Give √(n / (n + n of the control)), negative where the statistic is control minus group."""
    group, shared = (n[0], n[1]) if pair.second in control else (n[1], n[0])
    turned = (pair.second not in control) != (side == "below")
    return (-1 if turned else 1) * math.sqrt(group / (group + shared))
