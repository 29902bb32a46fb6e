"""Supportive analyses: computed twice like every hypothesis, and held beside the one whose question they ask."""

import numpy as np

from beforehand.analysis.changes import changes_in_words
from beforehand.analysis.computed import Computed
from beforehand.analysis.records import hypothesis_record
from beforehand.analysis.twice import STANDARD_ERRORS, TwoComputations
from beforehand.hypothesis_tests.contract import Outcome
from beforehand.multiplicity.decision import is_rejected
from beforehand.record.model import SupportiveRecord
from beforehand.spec.planned import PlannedSupportive, Spec


def supported(spec: Spec, compute: TwoComputations) -> tuple[Computed, ...]:
    """Compute every supportive analysis under the promise of its hypothesis, in the order of the spec."""
    return tuple(compute(spec.family(one.hypothesis.family), one.hypothesis).first for one in spec.supportive)


def supportive_records(
    spec: Spec, computed: dict[str, Computed], supporting: tuple[Computed, ...]
) -> tuple[SupportiveRecord, ...]:
    """Put supportive analyses into words, each with what it has in common with its hypothesis."""
    return tuple(
        _record(spec, planned, computed[planned.of], one)
        for planned, one in zip(spec.supportive, supporting, strict=True)
    )


def _record(spec: Spec, planned: PlannedSupportive, base: Computed, one: Computed) -> SupportiveRecord:
    family = spec.family(one.hypothesis.family)
    level = float(family.promise.level)
    both = isinstance(base.result, Outcome) and isinstance(one.result, Outcome)
    return SupportiveRecord(
        of=planned.of,
        analysis=planned.analysis,
        because=planned.because,
        changes=changes_in_words(base.hypothesis, one.hypothesis),
        hypothesis=hypothesis_record(spec, family, one, label=planned.id),
        p_read=one.p_entered if isinstance(one.result, Outcome) else None,
        read_as=one.entered_as,
        same_direction=_signs(base) == _signs(one, turned=_swapped(base, one)) if both else None,
        same_side=is_rejected(base.p_entered, level) == is_rejected(one.p_entered, level) if both else None,
    )


def _signs(one: Computed, *, turned: bool = False) -> tuple[float, ...]:
    """Say on which side of each value of its null hypothesis an estimate lies; ``turned`` where first and second are.

    -1 stands for below, 1 for above, 0 for an estimate that is nearer to the value than two computations agree.
    """
    assert isinstance(one.result, Outcome)
    away = np.array([one.result.estimate - value for value in one.null.values])
    signs = np.where(np.abs(away) <= STANDARD_ERRORS * one.result.standard_error, 0.0, np.sign(away))
    return tuple((-signs[::-1] if turned else signs).tolist())


def _swapped(base: Computed, one: Computed) -> bool:
    before, after = base.hypothesis.groups, one.hypothesis.groups
    return bool(before and after and (before.first, before.second) == (after.second, after.first))
