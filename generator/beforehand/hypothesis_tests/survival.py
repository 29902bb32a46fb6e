"""What the tests of times until an event share: refusals and remarks."""

import math

import numpy as np

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.refusals import first_reason, too_few
from beforehand.hypothesis_tests.risk_sets import Events, RiskSets
from beforehand.hypothesis_tests.sides import Asked
from beforehand.spelling import decimal, integer
from beforehand.terms import Alternative

NO_EVENT_FIRST = "Nothing speaks against a hazard ratio of 0: estimate and lower end are 0."
NO_EVENT_SECOND = "Nothing speaks against an infinite hazard ratio: estimate and upper end are infinite."


def asked_of(null_value: float, alternative: Alternative, confidence: float) -> Asked:
    """Refuse a null value that no ratio has."""
    if null_value <= 0:
        raise ValueError(f"a hazard ratio under the null hypothesis is above 0; found {null_value!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def refusal(first: Events, second: Events, sets: RiskSets) -> NotComputed | None:
    """Say why two groups can't be compared by their times."""
    together = None if sets.informative else "no event has happened while units of both groups were under watch"
    return first_reason(
        too_few(first.size, 1, noun="unit", whose=" of the first group"),
        too_few(second.size, 1, noun="unit", whose=" of the second group"),
        None if first.any() or second.any() else "no event has happened in either group",
        together,
        n=(first.size, second.size),
    )


def remarks(sets: RiskSets, estimate: float) -> tuple[str, ...]:
    """Say what was observed and what is expected of the first group, and where the estimate has no end."""
    expected = float(np.sum(sets.expected(1.0)))
    said = [
        f"Events in the first group: {integer(int(sets.events_first.sum()))} observed, {decimal(expected, 2)} expected "
        "with equal hazards."
    ]
    if estimate == 0:
        said.append(NO_EVENT_FIRST)
    if math.isinf(estimate):
        said.append(NO_EVENT_SECOND)
    return tuple(said)
