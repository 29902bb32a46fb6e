"""One hypothesis computed: the test on its samples, the p that enters the procedure, the intervals."""

import math
from dataclasses import dataclass
from typing import Any

from beforehand.analysis.levels import Reading
from beforehand.data.dataset import Dataset
from beforehand.data.samples import Samples, take
from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS, NotComputed, Outcome, Result, StatisticalTest
from beforehand.hypothesis_tests.nulls import Null, judge_null
from beforehand.multiplicity.contract import PROCEDURES
from beforehand.spec.model import Hypothesis
from beforehand.spec.planned import PlannedFamily
from beforehand.terms import Alternative, EnteredAs

EQUAL_SIDES = 1e-6
"""One-sided p-values that differ by no more than this, relatively, lie on no side: an estimate at its null value."""


@dataclass(frozen=True, kw_only=True)
class Computed:
    """One hypothesis with its result."""

    hypothesis: Hypothesis
    test: StatisticalTest[...]
    samples: Samples
    result: Result
    p_entered: float
    entered_as: EnteredAs
    side_agrees: str
    """Whether the estimate lies on the side of the claim: yes, no, or "" where the claim has no side."""
    confidence: float
    """Of the unadjusted interval; NaN where the interval was supplied."""
    null: Null
    matching: Outcome | None
    matching_confidence: float


def compute(family: PlannedFamily, hypothesis: Hypothesis, dataset: Dataset) -> Computed:
    """Take the samples of one hypothesis and test it."""
    test = STATISTICAL_TESTS[hypothesis.test]
    samples = take(dataset, hypothesis)
    reading = Reading(float(family.promise.level), family.promise.level_is)
    confidence = float(hypothesis.intervals.unadjusted_level or reading.confidence())
    asked = _Asked(hypothesis, test, samples)
    result = asked.result(confidence)
    matches = PROCEDURES[family.procedure].intervals == "bonferroni" and family.sure_share is not None
    shares = matches and test.design != "supplied" and test.interval_inverts_p
    shared = Reading(reading.level * (family.sure_share or 1.0), reading.level_is).confidence(family.planned)
    matching = asked.result(shared) if shares else None
    p_entered, entered_as = _entered(asked, result, reading)
    return Computed(
        hypothesis=hypothesis,
        test=test,
        samples=samples,
        result=result,
        p_entered=p_entered,
        entered_as=entered_as,
        side_agrees=_side_agrees(asked) if isinstance(result, Outcome) else "",
        confidence=math.nan if test.design == "supplied" else confidence,
        null=asked.null,
        matching=matching if isinstance(matching, Outcome) else None,
        matching_confidence=shared if isinstance(matching, Outcome) else math.nan,
    )


@dataclass(frozen=True)
class _Asked:
    """A hypothesis, its test and its samples: what can be asked of them."""

    hypothesis: Hypothesis
    test: StatisticalTest[...]
    samples: Samples

    @property
    def null(self) -> Null:
        null = self.hypothesis.null_hypothesis
        return Null(null.form, tuple(float(margin) for margin in null.margins))

    @property
    def one_sided(self) -> bool:
        """Whether p is that of one side (an equivalence test is two one-sided ones)."""
        return self.hypothesis.side != "two_sided" or self.null.form == "outside"

    def result(self, confidence: float, *, alternative: Alternative | None = None) -> Result:
        judged: Result = judge_null(
            self.test,
            self.samples.arrays,
            null=self.null,
            alternative=alternative or self.hypothesis.side,
            confidence=confidence,
            options={**self.hypothesis.options, **self.samples.beside},
        )
        return judged

    def one_sided_p(self, side: Alternative) -> float:
        """Give the p of one side of a two-sided hypothesis."""
        result = self.result(0.95, alternative=side)
        return result.p if isinstance(result, Outcome) else 1.0


def _entered(asked: _Asked, result: Result, reading: Reading) -> tuple[float, EnteredAs]:
    """Give the p that enters the procedure, and how it follows from p."""
    if isinstance(result, NotComputed):
        return 1.0, "no result"
    direction = asked.hypothesis.claim_direction
    how = reading.how_p_enters(one_sided=asked.one_sided, direction=direction)
    if how == "doubled":
        return min(1.0, 2 * result.p), how
    if how == "claim side" and direction in ("above", "below"):
        return asked.one_sided_p(direction), how
    return result.p, how


def _side_agrees(asked: _Asked) -> str:
    """Say whether the smaller of the two one-sided p-values is that of the claim; where they are equal, it is."""
    direction: Any = asked.hypothesis.claim_direction
    if asked.one_sided or asked.null.form != "at" or direction not in ("above", "below"):
        return ""
    other: Alternative = "below" if direction == "above" else "above"
    return "yes" if asked.one_sided_p(direction) <= asked.one_sided_p(other) * (1 + EQUAL_SIDES) else "no"
