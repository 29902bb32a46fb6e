"""Simultaneous intervals of procedures that judge by a critical value: so many standard errors about an estimate."""

import math
from collections.abc import Iterable, Mapping
from dataclasses import replace

import numpy as np

from beforehand.analysis.computed import Computed
from beforehand.analysis.families import JudgedFamily
from beforehand.analysis.ingredients import judged_side
from beforehand.hypothesis_tests.contract import Outcome


def with_simultaneous(judged: Iterable[JudgedFamily], computed: Mapping[str, Computed]) -> dict[str, Computed]:
    """Give every hypothesis the interval that leaves out its null value if and only if it is rejected."""
    found = dict(computed)
    for family in judged:
        # a level that depends on what others found gives no confidence that is known beforehand
        known = family.entered.family.sure_share is not None
        if known and family.entered.procedure.intervals == "critical_value":
            found |= {one.hypothesis.id: one for one in _of_family(family, computed)}
    return found


def _of_family(judged: JudgedFamily, computed: Mapping[str, Computed]) -> Iterable[Computed]:
    entered = judged.entered
    given = {name: value for name, value in entered.given.items() if name != "level"}
    local = judged.decision.local_level
    level = local if 0 < local < 1 else entered.level  # a family whose gate stayed closed has intervals all the same
    confidence = 1 - level / 2 if given.get("doubled") else 1 - level
    values = entered.procedure.critical_values(level, **given)
    for member, c in zip(entered.family.members, values, strict=True):
        one = computed[member.id]
        if isinstance(one.result, Outcome) and np.isfinite(c):
            yield _with_interval(one, one.result, float(c), confidence)


def _with_interval(computed: Computed, result: Outcome, c: float, confidence: float) -> Computed:
    side, reach = judged_side(computed), c * result.standard_error
    lower = -math.inf if side == "below" else result.estimate - reach
    upper = math.inf if side == "above" else result.estimate + reach
    return replace(computed, matching=replace(result, lower=lower, upper=upper), matching_confidence=confidence)
