"""Log-rank test: does an event come earlier, or later, in one group than in another."""

from decimal import Decimal

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests import normal, normal_again, risk_sets_again, survival
from beforehand.hypothesis_tests.beside import Strata, Time
from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, statistical_test
from beforehand.hypothesis_tests.risk_sets import Partial, RiskSets
from beforehand.hypothesis_tests.risk_sets_again import Product
from beforehand.terms import Alternative

Events = NDArray[np.bool_]

BUILT_DIFFERENTLY = (
    "p is that of the log-rank test; estimate and interval are those of proportional hazards (likelihood ratio, equal "
    "times after Efron): they are built differently, and may disagree where p is close to 1 - confidence."
)


@statistical_test(
    title="Log-rank test",
    design="two_groups",
    outcome="event",
    scale="ratio",
    estimates="hazard ratio",
    parameter="h₁ / h₂",
    statistic="z",
    p_is="approximate, for many events",
    null="at every time the hazard of the first group is the null value times that of the second",
    assumptions=(
        "the units are independent of each other",
        "the end of watching tells nothing of the event to come, alike in both groups",
        "for the estimate and its interval: the ratio of the hazards is the same at all times",
    ),
    second_route=(
        "units walked one by one in the order of their times, all sums in 40-digit decimal arithmetic, the likelihood "
        "as one product, roots by false position; shares which times count as equal, what is refused, and the remarks"
    ),
    bound=1e-9,
    reference="Mantel (1966), Cancer Chemotherapy Reports 50:163-170; Peto and Peto (1972), JRSS A 135:185-207",
    interval_inverts_p=False,
)
def log_rank(
    first: Events,
    second: Events,
    *,
    time: Time,
    strata: Strata | None = None,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Compare the times until an event in two groups.

    Parameters
    ----------
    first, second : ndarray of bool, shapes (n1,) and (n2,)
        Whether the event happened to each independent unit, or watching ended without it.
    time : tuple of two ndarrays, shapes (n1,) and (n2,)
        When it did; 0 or more, one unit for both groups.
    strata : tuple of two ndarrays, shapes (n1,) and (n2,), optional
        The stratum of each unit: units are compared within their stratum only.
    null_value : float
        The hazard ratio, first / second, under the null hypothesis, above 0. A ratio above 1 means that the event
        comes earlier in the first group.
    alternative : {"above", "below", "two_sided"}
        The side on which the hazard ratio is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.

    Returns
    -------
    Outcome or NotComputed
        The hazard ratio of proportional hazards with its likelihood ratio interval, z of the log-rank test, and p.
        Estimate and an end are 0 or infinite where no event speaks against it. No result when a group is empty, when no
        event happened while both groups were under watch, or when every event time takes all that are left.

    Notes
    -----
    At each time of an event, the events of the first group are held against those to be expected of its share of the
    units under watch, weighed by the null value; z divides the sum of the differences by its standard deviation
    (hypergeometric at the null value 1). The test keeps its level whatever the hazards are when they are equal; it sees
    proportional hazards best, and crossing ones hardly. A unit whose watching ends at the time of an event is still
    under watch then; times that differ by rounding only are equal.

    References
    ----------
    Mantel (1966), Evaluation of survival data and two new rank order statistics arising in its consideration, Cancer
    Chemotherapy Reports 50:163-170.
    Peto and Peto (1972), Asymptotically efficient rank invariant test procedures, Journal of the Royal Statistical
    Society A 135:185-207.
    Efron (1977), The efficiency of Cox's likelihood function for censored data, Journal of the American Statistical
    Association 72:557-565 (equal times).
    """
    asked = survival.asked_of(null_value, alternative, confidence)
    sets = RiskSets.of(first, second, time, strata)
    if refused := survival.refusal(first, second, sets) or _no_variance(first, second, sets):
        return refused
    z, partial = sets.log_rank(null_value), Partial.of(sets)
    ends = partial.interval(normal.critical(asked.tail))
    return Outcome(
        estimate=partial.ratio,
        lower=ends.lower,
        upper=ends.upper,
        statistic=z,
        p=normal.p_of(asked, z),
        n=(first.size, second.size),
        remarks=(*survival.remarks(sets, partial.ratio), BUILT_DIFFERENTLY),
    )


def second_route(
    first: Events,
    second: Events,
    *,
    time: Time,
    strata: Strata | None = None,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Compute the same with ``risk_sets_again``, which names what it does not share."""
    asked = survival.asked_of(null_value, alternative, confidence)
    sets = RiskSets.of(first, second, time, strata)
    if refused := survival.refusal(first, second, sets) or _no_variance(first, second, sets):
        return refused
    moments = risk_sets_again.moments_of(first, second, time, strata)
    product, z = Product.of(moments), risk_sets_again.log_rank(moments, Decimal(null_value))
    ends = product.interval(normal_again.critical(asked.tail))
    return Outcome(
        estimate=float(product.estimate),
        lower=ends.lower,
        upper=ends.upper,
        statistic=float(z),
        p=normal_again.p_of(asked, z),
        n=(len(first), len(second)),
        remarks=(*survival.remarks(sets, float(product.estimate)), BUILT_DIFFERENTLY),
    )


def _no_variance(first: Events, second: Events, sets: RiskSets) -> NotComputed | None:
    if sets.variance(1.0) > 0:
        return None
    told = "every event time takes all units that are still under watch: nothing is left to compare them with"
    return NotComputed(told, (first.size, second.size))
