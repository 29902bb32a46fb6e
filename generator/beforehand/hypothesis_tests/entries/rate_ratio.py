"""Poisson test of a rate ratio: how many times as high is the rate of an event in one group as in another."""

import math
from decimal import Decimal
from typing import Literal

import numpy as np

from beforehand.hypothesis_tests import binomial, binomial_again, normal, normal_again, poisson, poisson_again
from beforehand.hypothesis_tests.beside import Exposure
from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, Values, statistical_test
from beforehand.hypothesis_tests.poisson import Rate
from beforehand.hypothesis_tests.refusals import first_reason, too_few
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.two_by_two_again import EXACT
from beforehand.terms import Alternative

Method = Literal["exact", "score"]

NO_EVENT_FIRST = "The first group has no event: estimate and lower end of the ratio are 0."
NO_EVENT_SECOND = "The second group has no event: estimate and upper end of the ratio are infinite."


@statistical_test(
    title="Poisson test of a rate ratio",
    design="two_groups",
    outcome="count",
    scale="ratio",
    estimates="rate ratio",
    parameter="λ₁ / λ₂",
    statistic="events in the first group",
    p_is="exact for Poisson counts, given the events of both groups together (approximate by the method score)",
    null="the ratio of rates (first / second) equals the null value",
    assumptions=(
        "events happen independently of each other, within a group at one rate in all rows",
        "the exposure of each row is known without error",
    ),
    second_route=(
        "probabilities of all divisions of the events relative to the observed one in 40-digit decimal arithmetic, "
        "ends of the interval by false position; shares no beta function, no inverse function and no sum with the first"
    ),
    bound=1e-9,
    reference=(
        "Przyborowski and Wilenski (1940), Biometrika 31:313-323; Gu and others (2008), Biometrical Journal 50:283"
    ),
)
def rate_ratio(
    first: Values,
    second: Values,
    *,
    exposure: Exposure,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "exact",
) -> Result:
    """Test the ratio of the rates of an event in two groups, counted in rows of different exposure.

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        The number of events in each independent row of the group: whole numbers from 0 on; n1, n2 >= 1.
    exposure : tuple of two ndarrays, shapes (n1,) and (n2,)
        In how much each row was counted: time, distance, number of uses; above 0, one unit for both groups.
    null_value : float
        The ratio of rates, first / second, under the null hypothesis, above 0.
    alternative : {"above", "below", "two_sided"}
        The side on which the ratio is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    method : {"exact", "score"}
        Exact tails of the binomial distribution that the events of the first group have given all events; or z with
        the variance of the null value, for many events.

    Returns
    -------
    Outcome or NotComputed
        The ratio of the observed rates with an interval, the events of the first group, and p. Estimate and an end are
        0 or infinite where a group has no event. No result when a group is empty, or no event has happened at all.

    Raises
    ------
    ValueError
        When the null value is not above 0, or ``method`` is not one of its words.

    Notes
    -----
    Given all m events, those of the first group are binomial with odds ρ t1 / t2, with ρ the ratio of rates and t the
    exposures. Each end of the exact interval is the ratio at which one tail equals (1 - confidence) / 2 (Clopper and
    Pearson): its confidence is at least the one asked for, and it holds exactly the null values that twice the smaller
    tail does not reject: hence the default. The score method inverts its own z in the same way. Events that come in
    clusters, or rows that differ in their rate, scatter more than Poisson counts; a remark says where the rows show it.

    References
    ----------
    Przyborowski and Wilenski (1940), Homogeneity of results in testing samples from Poisson series, Biometrika
    31:313-323.
    Gu, Ng, Tang and Schucany (2008), Testing the ratio of two Poisson rates, Biometrical Journal 50:283-298 (score).
    """
    asked = _asked(null_value, alternative, confidence, method)
    one, two = Rate.of(first, exposure[0]), Rate.of(second, exposure[1])
    if refusal := _refusal(one, two):
        return refusal
    x, m, times = one.events, one.events + two.events, one.exposure / two.exposure
    null = binomial.Share.of_odds(null_value * times)
    if method == "exact":
        p = asked.p(above=binomial.at_least(x, m, null), below=binomial.at_most(x, m, null))
        ends = binomial.exact_ends(x, m, asked.tail)
    else:
        # x - m × share without the cancellation of a share near 1
        p = normal.p_of(asked, (x * null.rest - two.events * null.share) / math.sqrt(m * null.share * null.rest))
        ends = binomial.score_ends(x, m, normal.critical(asked.tail))
    return Outcome(
        estimate=x / two.events / times if two.events else math.inf,
        lower=ends.lower.odds / times,
        upper=ends.upper.odds / times,
        statistic=float(x),
        p=p,
        n=(one.rows, two.rows),
        remarks=_remarks(one, two, (first, second), exposure),
    )


def second_route(
    first: Values,
    second: Values,
    *,
    exposure: Exposure,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "exact",
) -> Result:
    """Compute the same in 40-digit decimals, the lower side as the upper side of the second group.

    Shared with the first route: what is refused, and the remarks.
    """
    asked = _asked(null_value, alternative, confidence, method)
    one, two = (Rate(sum(map(int, x)), float(sum(t)), len(x)) for x, t in zip((first, second), exposure, strict=True))
    if refusal := _refusal(one, two):
        return refusal
    x, y, m = one.events, two.events, one.events + two.events
    times = EXACT.divide(poisson_again.exact_total(exposure[0]), poisson_again.exact_total(exposure[1]))
    odds = EXACT.multiply(Decimal(null_value), times)
    if method == "exact":
        above = binomial_again.at_least(x, m, odds)
        below = binomial_again.at_least(y, m, EXACT.divide(Decimal(1), odds))
        p = min(1.0, float({"above": above, "below": below, "two_sided": 2 * min(above, below)}[alternative]))
        lower = binomial_again.odds_at(x, m, asked.tail) if x else Decimal(0)
        upper = binomial_again.odds_at(y, m, asked.tail) if y else Decimal(0)
    else:
        p = normal_again.p_of(asked, EXACT.divide(x - odds * y, EXACT.sqrt(odds * m)))
        c = normal_again.critical(asked.tail)
        lower, upper = _score_end(x, y, c), _score_end(y, x, c)
    return Outcome(
        estimate=float(EXACT.divide(Decimal(x) / y, times)) if y else math.inf,
        lower=float(EXACT.divide(lower, times)),
        upper=float(EXACT.divide(1 / upper, times)) if upper else math.inf,
        statistic=float(x),
        p=p,
        n=(one.rows, two.rows),
        remarks=_remarks(one, two, (first, second), exposure),
    )


def _score_end(x: int, y: int, c: Decimal) -> Decimal:
    """Give the odds d with (x - d y) = c √(d (x + y)): the smaller root of a quadratic, 0 where x is 0."""
    if not x:
        return Decimal(0)
    middle = 2 * x * y + c * c * (x + y)
    root = EXACT.sqrt(middle * middle - 4 * Decimal(x * x) * (y * y))
    return EXACT.divide(2 * Decimal(x * x), middle + root)


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Values | None,
    *,
    alternative: Alternative,
    null_value: float,
    exposure: Exposure,
    method: Method = "exact",
) -> float:
    """Give the smallest attainable p: that of all events in one group; 0 where their number is not known."""
    if pooled is None:
        return 0.0
    m, rates = pooled.sum(), [math.fsum(amounts) for amounts in exposure]
    found = [
        rate_ratio(
            *(_one_row(events) for events in divided),
            exposure=tuple(_one_row(amount) for amount in rates),
            null_value=null_value,
            alternative=alternative,
            method=method,
        )
        for divided in ((m, 0), (0, m))
    ]
    return min((one.p for one in found if isinstance(one, Outcome)), default=1.0)


def _one_row(value: float) -> Values:
    return np.array([value], dtype=np.float64)


def _asked(null_value: float, alternative: Alternative, confidence: float, method: str) -> Asked:
    if null_value <= 0:
        raise ValueError(f"a ratio under the null hypothesis is above 0; found {null_value!r}")
    if method not in ("exact", "score"):
        raise ValueError(f"method is exact or score; found {method!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _refusal(one: Rate, two: Rate) -> NotComputed | None:
    return first_reason(
        too_few(one.rows, 1, noun="row", whose=" of the first group"),
        too_few(two.rows, 1, noun="row", whose=" of the second group"),
        None if one.events + two.events else "no event has happened in either group",
        n=(one.rows, two.rows),
    )


def _remarks(one: Rate, two: Rate, counts: tuple[Values, ...], exposure: Exposure) -> tuple[str, ...]:
    found = [] if one.events else [NO_EVENT_FIRST]
    found += [] if two.events else [NO_EVENT_SECOND]
    return (*found, *poisson.scattered(counts, exposure))
