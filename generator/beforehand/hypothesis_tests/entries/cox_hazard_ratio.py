"""Cox's hazard ratio: how many times as high is the hazard of an event in one group as in another."""

import math
from decimal import Decimal
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests import normal, normal_again, risk_sets_again, survival
from beforehand.hypothesis_tests.beside import Strata, Time
from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, statistical_test
from beforehand.hypothesis_tests.risk_sets import Partial, RiskSets
from beforehand.hypothesis_tests.risk_sets_again import Product
from beforehand.hypothesis_tests.sides import Asked
from beforehand.terms import Alternative

Events = NDArray[np.bool_]
Method = Literal["likelihood_ratio", "wald"]


@statistical_test(
    title="Cox's hazard ratio",
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
        "the ratio of the hazards is the same at all times",
    ),
    second_route=(
        "units walked one by one in the order of their times, the likelihood as one product of 40-digit decimals, "
        "roots by false position; shares which times count as equal, what is refused, and the remarks"
    ),
    bound=1e-9,
    reference="Cox (1972), Journal of the Royal Statistical Society B 34:187-220; Efron (1977), JASA 72:557-565",
)
def cox_hazard_ratio(
    first: Events,
    second: Events,
    *,
    time: Time,
    strata: Strata | None = None,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "likelihood_ratio",
) -> Result:
    """Test the ratio of the hazards of two groups under proportional hazards.

    Parameters
    ----------
    first, second : ndarray of bool, shapes (n1,) and (n2,)
        Whether the event happened to each independent unit, or watching ended without it.
    time : tuple of two ndarrays, shapes (n1,) and (n2,)
        When it did; 0 or more, one unit for both groups.
    strata : tuple of two ndarrays, shapes (n1,) and (n2,), optional
        The stratum of each unit: each stratum has a hazard of its own, and all have the same ratio.
    null_value : float
        The hazard ratio, first / second, under the null hypothesis, above 0. A ratio above 1 means that the event
        comes earlier in the first group.
    alternative : {"above", "below", "two_sided"}
        The side on which the hazard ratio is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    method : {"likelihood_ratio", "wald"}
        z as the signed root of twice the logarithm of the likelihood ratio; or the logarithm of the estimate by its
        standard error.

    Returns
    -------
    Outcome or NotComputed
        The ratio that makes the data most likely (equal times after Efron) with the interval that its method keeps, z,
        and p. Estimate and an end are 0 or infinite where no event speaks against it; by ``wald`` there is no result
        then. No result when a group is empty, or when no event happened while both groups were under watch.

    Raises
    ------
    ValueError
        When the null value is not above 0, or ``method`` is not one of its words.

    Notes
    -----
    The partial likelihood compares, at each event, the unit it befell with all that were under watch; of equal times it
    takes the units away in parts. Both methods have an interval that holds exactly the null values that the two-sided
    test does not reject. The likelihood ratio is the default: it is nearer to its nominal level with few events, and
    has an answer where all events fall into one group. Whether the ratio is the same at all times is not tested here.

    References
    ----------
    Cox (1972), Regression models and life-tables, Journal of the Royal Statistical Society B 34:187-220.
    Efron (1977), The efficiency of Cox's likelihood function for censored data, Journal of the American Statistical
    Association 72:557-565 (equal times).
    """
    asked = _asked(null_value, alternative, confidence, method)
    sets, n = RiskSets.of(first, second, time, strata), (first.size, second.size)
    if refused := survival.refusal(first, second, sets):
        return refused
    partial = Partial.of(sets)
    if method == "likelihood_ratio":
        z, ends = partial.root(math.log(null_value)), partial.interval(normal.critical(asked.tail))
    elif math.isinf(partial.estimate):
        return _no_error(n)
    else:
        z, ends = partial.z(math.log(null_value)), partial.around(normal.critical(asked.tail))
    return Outcome(
        estimate=partial.ratio,
        lower=ends.lower,
        upper=ends.upper,
        statistic=z,
        p=normal.p_of(asked, z),
        n=n,
        remarks=survival.remarks(sets, partial.ratio),
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
    method: Method = "likelihood_ratio",
) -> Result:
    """Compute the same with ``risk_sets_again``, which names what it does not share."""
    asked = _asked(null_value, alternative, confidence, method)
    sets, n = RiskSets.of(first, second, time, strata), (len(first), len(second))
    if refused := survival.refusal(first, second, sets):
        return refused
    product = Product.of(risk_sets_again.moments_of(first, second, time, strata))
    null, critical = Decimal(null_value), normal_again.critical(asked.tail)
    if method == "likelihood_ratio":
        z, ends = product.root(null), product.interval(critical)
    elif product.estimate.is_infinite() or not product.estimate:
        return _no_error(n)
    else:
        z, ends = product.z(null), product.around(critical)
    return Outcome(
        estimate=float(product.estimate),
        lower=ends.lower,
        upper=ends.upper,
        statistic=float(z),
        p=normal_again.p_of(asked, z),
        n=n,
        remarks=survival.remarks(sets, float(product.estimate)),
    )


def _asked(null_value: float, alternative: Alternative, confidence: float, method: str) -> Asked:
    if method not in ("likelihood_ratio", "wald"):
        raise ValueError(f"method is likelihood_ratio or wald; found {method!r}")
    return survival.asked_of(null_value, alternative, confidence)


def _no_error(n: tuple[int, int]) -> NotComputed:
    return NotComputed("the estimate is 0 or infinite, and has no standard error. Use method: likelihood_ratio", n)
