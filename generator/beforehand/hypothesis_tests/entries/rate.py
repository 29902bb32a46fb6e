"""Poisson test of one rate: is the rate of an event equal to a value fixed beforehand, or above or below it."""

import math
from decimal import Decimal
from typing import Literal

from beforehand.hypothesis_tests import normal, normal_again, poisson, poisson_again
from beforehand.hypothesis_tests.beside import Exposure
from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, Values, statistical_test
from beforehand.hypothesis_tests.refusals import first_reason, too_few
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.two_by_two_again import EXACT
from beforehand.terms import Alternative

Method = Literal["exact", "score"]


@statistical_test(
    title="Poisson test of a rate",
    design="one_sample",
    outcome="count",
    scale="location",
    estimates="rate",
    parameter="λ",
    statistic="events",
    p_is="exact for Poisson counts (approximate by the method score)",
    null="the rate, events by exposure, equals the null value",
    assumptions=(
        "events happen independently of each other, at one rate in all rows",
        "the exposure of each row is known without error",
    ),
    second_route=(
        "probabilities of all counts relative to the observed one in 40-digit decimal arithmetic, ends of the interval "
        "by false position; shares no gamma function, no inverse function and no sum with the first"
    ),
    bound=1e-9,
    reference="Garwood (1936), Biometrika 28:437-442",
    null_default=1.0,
    null_between=(0.0, math.inf),
)
def rate(
    values: Values,
    *,
    exposure: Exposure,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "exact",
) -> Result:
    """Test the rate of an event, counted in rows of different exposure.

    Parameters
    ----------
    values : ndarray, shape (n,)
        The number of events in each of n >= 1 independent rows: whole numbers from 0 on.
    exposure : tuple of one ndarray, shape (n,)
        In how much each row was counted: time, distance, number of uses; above 0.
    null_value : float
        The rate under the null hypothesis, events per unit of exposure, above 0. The default of 1 is arbitrary: a spec
        names it.
    alternative : {"above", "below", "two_sided"}
        The side on which the rate is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    method : {"exact", "score"}
        Exact tails of the Poisson distribution; or z with the variance of the null value, for many events.

    Returns
    -------
    Outcome or NotComputed
        Events by exposure with an interval, the number of events, and p; no result for an empty sample.

    Raises
    ------
    ValueError
        When the null value is not above 0, or ``method`` is not one of its words.

    Notes
    -----
    The events of all rows together are Poisson with mean rate × exposure, however they are spread over the rows. Each
    end of the exact interval is the rate at which one tail equals (1 - confidence) / 2: its confidence is at least the
    one asked for, and it holds exactly the null values that twice the smaller tail does not reject: hence the default.
    The score method inverts its own z. Events that come in clusters, or rows that differ in their rate, scatter more
    than Poisson counts; a remark says where the rows show it.

    References
    ----------
    Garwood (1936), Fiducial limits for the Poisson distribution, Biometrika 28:437-442.
    """
    asked, seen = _asked(null_value, alternative, confidence, method), poisson.Rate.of(values, exposure[0])
    if refusal := _refusal(seen.rows):
        return refusal
    x, expected = seen.events, null_value * seen.exposure
    if method == "exact":
        p = asked.p(above=poisson.at_least(x, expected), below=poisson.at_most(x, expected))
        ends = poisson.expected_at_lower(x, asked.tail), poisson.expected_at_upper(x, asked.tail)
    else:
        p = normal.p_of(asked, (x - expected) / math.sqrt(expected))
        c = normal.critical(asked.tail)
        far = x + c * c / 2 + c * math.sqrt(x + c * c / 4)
        ends = x * (x / far), far  # the product of both ends is x²
    return Outcome(
        estimate=x / seen.exposure,
        lower=ends[0] / seen.exposure,
        upper=ends[1] / seen.exposure,
        statistic=float(x),
        p=p,
        n=(seen.rows,),
        remarks=poisson.scattered((values,), exposure),
    )


def second_route(
    values: Values,
    *,
    exposure: Exposure,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "exact",
) -> Result:
    """Compute the same in 40-digit decimals; only refusals and remarks are shared."""
    asked, n = _asked(null_value, alternative, confidence, method), len(values)
    if refusal := _refusal(n):
        return refusal
    x, amount = sum(int(value) for value in values), poisson_again.exact_total(exposure[0])
    expected = EXACT.multiply(Decimal(null_value), amount)
    if method == "exact":
        above, below = poisson_again.at_least(x, expected), poisson_again.at_most(x, expected)
        p = min(1.0, float({"above": above, "below": below, "two_sided": 2 * min(above, below)}[alternative]))
        lower = poisson_again.expected_at(x, asked.tail, upper=False) if x else Decimal(0)
        upper = poisson_again.expected_at(x, asked.tail, upper=True)
    else:
        p = normal_again.p_of(asked, EXACT.divide(x - expected, EXACT.sqrt(expected)))
        c = normal_again.critical(asked.tail)
        middle, half = x + c * c / 2, c * EXACT.sqrt(x + c * c / 4)
        lower, upper = EXACT.subtract(middle, half) if x else Decimal(0), EXACT.add(middle, half)
    return Outcome(
        estimate=float(EXACT.divide(Decimal(x), amount)),
        lower=float(EXACT.divide(lower, amount)),
        upper=float(EXACT.divide(upper, amount)),
        statistic=float(x),
        p=p,
        n=(n,),
        remarks=poisson.scattered((values,), exposure),
    )


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Values | None,
    *,
    alternative: Alternative,
    null_value: float,
    exposure: Exposure,
    method: Method = "exact",
) -> float:
    """Give the smallest attainable p: that of no event below; above, the number of events has no bound."""
    if alternative != "below":
        return 0.0
    expected = null_value * math.fsum(exposure[0])
    return math.exp(-expected) if method == "exact" else normal.upper_tail(math.sqrt(expected))


def _asked(null_value: float, alternative: Alternative, confidence: float, method: str) -> Asked:
    if null_value <= 0:
        raise ValueError(f"a rate under the null hypothesis is above 0; found {null_value!r}")
    if method not in ("exact", "score"):
        raise ValueError(f"method is exact or score; found {method!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _refusal(n: int) -> NotComputed | None:
    return first_reason(too_few(n, 1, noun="row"), n=(n,))
