"""Exact binomial test: is the share of an event equal to a value fixed beforehand, or does it lie above or below it."""

from decimal import Decimal
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests import binomial, binomial_again
from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, statistical_test
from beforehand.hypothesis_tests.refusals import first_reason, too_few
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.two_by_two_again import EXACT
from beforehand.terms import Alternative

Events = NDArray[np.bool_]
TwoSidedBy = Literal["smaller_tail", "smaller_probability"]

BY_PROBABILITY = (
    "The two-sided p adds up the counts that are no more probable than the observed one, the interval is cut from two "
    "equal tails: they are built differently, and may disagree where p is close to 1 - confidence."
)


@statistical_test(
    title="Exact binomial test",
    design="one_sample",
    outcome="event",
    scale="location",
    estimates="share",
    parameter="π",
    statistic="events",
    p_is="exact",
    null="the share of units with the event equals the null value",
    assumptions=(
        "the units are independent of each other",
        "every unit has the same probability of the event, or the units are a random sample",
    ),
    second_route=(
        "probabilities of all counts relative to the observed one in 40-digit decimal arithmetic, ends of the interval "
        "by false position; shares no beta function, no logarithm of a probability and no inverse function with the "
        "first"
    ),
    bound=1e-9,
    reference="Clopper and Pearson (1934), Biometrika 26:404-413",
    null_default=0.5,
    null_between=(0.0, 1.0),
)
def binomial_exact(
    values: Events,
    *,
    null_value: float = 0.5,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    two_sided_by: TwoSidedBy = "smaller_tail",
) -> Result:
    """Test the share of an event in one sample.

    Parameters
    ----------
    values : ndarray of bool, shape (n,)
        Whether the event happened to each of n >= 1 independent units.
    null_value : float
        The share under the null hypothesis, between 0 and 1. The default of one half is that of a fair choice between
        two; for any other question a spec names it.
    alternative : {"above", "below", "two_sided"}
        The side on which the share is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    two_sided_by : {"smaller_tail", "smaller_probability"}
        Two-sided p as twice the smaller tail, or as the sum over counts no more probable than the observed one.

    Returns
    -------
    Outcome or NotComputed
        The observed share with its exact interval, the number of events, and p; no result for an empty sample.

    Raises
    ------
    ValueError
        When the null value does not lie between 0 and 1, or ``two_sided_by`` is not one of its words.

    Notes
    -----
    The number of events is binomial. Each end of the interval is the share at which one tail equals
    (1 - confidence) / 2: its confidence is at least the one asked for, and it holds exactly the null values that twice
    the smaller tail does not reject. The other two-sided p is often smaller, but inverts to another set, which can have
    gaps: hence the default. As counts are few, the true level lies below the nominal one.

    References
    ----------
    Clopper and Pearson (1934), The use of confidence or fiducial limits illustrated in the case of the binomial,
    Biometrika 26:404-413.
    """
    asked = _asked(null_value, alternative, confidence, two_sided_by)
    n, events = values.size, int(values.sum())
    if refusal := _refusal(n):
        return refusal
    null, ends = binomial.Share.of(null_value), binomial.exact_ends(events, n, asked.tail)
    p = asked.p(above=binomial.at_least(events, n, null), below=binomial.at_most(events, n, null))
    if _by_probability(asked, two_sided_by):
        p = binomial.no_more_probable(events, n, null)
    return Outcome(
        estimate=events / n,
        lower=ends.lower.share,
        upper=ends.upper.share,
        statistic=float(events),
        p=p,
        n=(n,),
        remarks=_remarks(asked, two_sided_by),
    )


def second_route(
    values: Events,
    *,
    null_value: float = 0.5,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    two_sided_by: TwoSidedBy = "smaller_tail",
) -> Result:
    """Compute the same in 40-digit decimals, the lower side as the upper side of the units without the event.

    Shared with the first route: what is refused, the remarks, and the share of 1e-9 within which counts count as
    equally probable.
    """
    asked = _asked(null_value, alternative, confidence, two_sided_by)
    n, events = len(values), int(np.count_nonzero(values))
    if refusal := _refusal(n):
        return refusal
    others = n - events
    null = EXACT.divide(Decimal(null_value), EXACT.subtract(Decimal(1), Decimal(null_value)))
    above = binomial_again.at_least(events, n, null)
    below = binomial_again.at_least(others, n, EXACT.divide(Decimal(1), null))
    p = {"above": above, "below": below, "two_sided": 2 * min(above, below)}[alternative]
    if _by_probability(asked, two_sided_by):
        p = binomial_again.no_more_probable(events, n, null)
    lower = binomial_again.odds_at(events, n, asked.tail) if events else Decimal(0)
    upper = binomial_again.odds_at(others, n, asked.tail) if others else Decimal(0)
    return Outcome(
        estimate=float(Decimal(events) / Decimal(n)),
        lower=float(lower / (1 + lower)),
        upper=float(1 / (1 + upper)),
        statistic=float(events),
        p=min(1.0, float(p)),
        n=(n,),
        remarks=_remarks(asked, two_sided_by),
    )


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Events | None,
    *,
    alternative: Alternative,
    null_value: float,
    two_sided_by: TwoSidedBy = "smaller_tail",
) -> float:
    """Give the smallest attainable p: that of no event, or of events only; what was observed plays no part."""
    n = sizes[0]
    samples = (np.zeros(n, dtype=np.bool_), np.ones(n, dtype=np.bool_))
    results = [
        binomial_exact(sample, null_value=null_value, alternative=alternative, two_sided_by=two_sided_by)
        for sample in samples
    ]
    return min((found.p for found in results if isinstance(found, Outcome)), default=1.0)


def _asked(null_value: float, alternative: Alternative, confidence: float, two_sided_by: str) -> Asked:
    if not 0 < null_value < 1:
        raise ValueError(f"a share under the null hypothesis lies between 0 and 1; found {null_value!r}")
    if two_sided_by not in ("smaller_tail", "smaller_probability"):
        raise ValueError(f"two_sided_by is smaller_tail or smaller_probability; found {two_sided_by!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _by_probability(asked: Asked, two_sided_by: TwoSidedBy) -> bool:
    return asked.alternative == "two_sided" and two_sided_by == "smaller_probability"


def _refusal(n: int) -> NotComputed | None:
    return first_reason(too_few(n, 1, noun="unit"), n=(n,))


def _remarks(asked: Asked, two_sided_by: TwoSidedBy) -> tuple[str, ...]:
    return (BY_PROBABILITY,) if _by_probability(asked, two_sided_by) else ()
