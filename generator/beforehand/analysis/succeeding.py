"""Whether families succeed that need several rejections together, computed twice."""

import numpy as np

from beforehand.multiplicity.contract import Vector
from beforehand.multiplicity.scheme import FamilyDecision, Truths
from beforehand.multiplicity.success import Success, success
from beforehand.spec.model import AtLeast
from beforehand.spec.planned import PlannedFamily


def success_of(family: PlannedFamily, p: Vector, counts: Truths, decision: FamilyDecision) -> Success | None:
    """Judge the claim of one family about several hypotheses together; None where any rejection is a success."""
    at_least = _needed(family, p.size)
    if at_least is None or np.isnan(decision.local_level):
        return None
    level = decision.local_level if decision.tested else 0.0
    return success(p, counts, at_least=at_least, level=level)


def success_again(p: list[float], counts: list[bool], *, at_least: int, level: float) -> Success:
    """Judge it again on plain lists, by the arithmetic itself."""
    ascending = sorted(value if one else 1.0 for value, one in zip(p, counts, strict=True))
    joint = min(1.0, (len(ascending) - at_least + 1) * ascending[at_least - 1])
    return Success(at_least=at_least, p=joint, level=level, reached=level > 0 and joint <= level * (1 + 1e-12))


def _needed(family: PlannedFamily, m: int) -> int | None:
    if isinstance(family.success, AtLeast):
        return family.success.at_least
    return m if family.success == "all" else None
