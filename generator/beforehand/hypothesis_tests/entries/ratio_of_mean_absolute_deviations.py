"""Bonett and Seier's test of spread: does one group vary more, or less, than another, normal or not."""

import math
from decimal import Decimal

from beforehand.hypothesis_tests import normal, normal_again
from beforehand.hypothesis_tests.absolute_deviations import exact_spread, spread
from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, Values, statistical_test
from beforehand.hypothesis_tests.group_refusals import few_or_constant
from beforehand.hypothesis_tests.refusals import first_reason
from beforehand.hypothesis_tests.sides import Asked
from beforehand.terms import Alternative


@statistical_test(
    title="Bonett and Seier's test of two mean absolute deviations",
    design="two_groups",
    outcome="number",
    scale="ratio",
    estimates="ratio of mean absolute deviations",
    parameter="τ₁ / τ₂",
    statistic="z",
    p_is="approximate, for many values",
    null="the ratio of the mean absolute deviations from the median (first / second) equals the null value",
    assumptions=(
        "the units are independent of each other",
        "both groups are large enough for a normal approximation of the logarithms, the larger the more skewed the "
        "values are",
    ),
    second_route=(
        "deviations, means and variances in exact fractions, the mean absolute deviation as the difference of the sums "
        "of both halves, the C library's erfc and Wichura's quantile; shares no formula of a deviation and no normal "
        "distribution function with the first"
    ),
    bound=1e-9,
    reference="Bonett and Seier (2003), The American Statistician 57:233-236",
)
def ratio_of_mean_absolute_deviations(
    first: Values,
    second: Values,
    *,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Test the ratio of the mean absolute deviations of two independent groups from their own medians.

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        The outcome of the independent units of each group, same unit; n1, n2 >= 2.
    null_value : float
        The ratio of mean absolute deviations, first / second, under the null hypothesis, above 0.
    alternative : {"above", "below", "two_sided"}
        The side on which the ratio is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.

    Returns
    -------
    Outcome or NotComputed
        The ratio with its interval, z and p. No result for too few values, or when the values of either group differ by
        no more than rounding.

    Raises
    ------
    ValueError
        When the null value is not above 0.

    Notes
    -----
    Each mean absolute deviation is multiplied by n / (n - 1), which takes away most of its bias. z is the logarithm of
    the ratio, less that of the null value, divided by its standard error, the root of the sum of both
    (((μ - η) / τ)² + (σ / τ)² - 1) / n, with the median η. The interval holds exactly the null values that the test
    keeps. In simulations for this entry intervals of 95 % covered 94 % to 98 % of the time for symmetric values, and
    91 % to 94 % for exponential ones, with 5 to 40 values in a group, whether or not the spreads were equal.

    The test of Levene and of Brown and Forsythe is not offered for two groups: it has a p, but no interval that could
    stand beside it. The interval of its t statistic takes the deviations to vary alike in both groups, which is untrue
    as soon as the spreads differ: in the same simulations it covered 73 % of the time, not 95 %, with 10 and 40 normal
    values and a ratio of 3.

    References
    ----------
    Bonett and Seier (2003), Confidence intervals for mean absolute deviations, The American Statistician 57:233-236.
    """
    asked = _asked(null_value, alternative, confidence)
    if refusal := _refusal(first, second):
        return refusal
    one, two = spread(first), spread(second)
    error, ratio = math.sqrt(one.log_variance + two.log_variance), one.size / two.size
    z, factor = math.log(ratio / null_value) / error, math.exp(normal.critical(asked.tail) * error)
    return Outcome(
        estimate=ratio,
        lower=ratio / factor,
        upper=ratio * factor,
        statistic=z,
        p=normal.p_of(asked, z),
        n=(first.size, second.size),
    )


def second_route(
    first: Values,
    second: Values,
    *,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Compute the same from exact sums; only refusals are shared with the first route."""
    asked = _asked(null_value, alternative, confidence)
    if refusal := _refusal(first, second):
        return refusal
    one, two = exact_spread(first), exact_spread(second)
    error = Decimal(one.log_variance + two.log_variance).sqrt()
    log_ratio = (Decimal(one.size) / Decimal(two.size)).ln()
    z, reach = (log_ratio - Decimal(null_value).ln()) / error, normal_again.critical(asked.tail) * error
    return Outcome(
        estimate=float(log_ratio.exp()),
        lower=float((log_ratio - reach).exp()),
        upper=float((log_ratio + reach).exp()),
        statistic=float(z),
        p=normal_again.p_of(asked, z),
        n=(first.size, second.size),
    )


def _asked(null_value: float, alternative: Alternative, confidence: float) -> Asked:
    if null_value <= 0:
        raise ValueError(f"a ratio of deviations under the null hypothesis is above 0; found {null_value!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _refusal(first: Values, second: Values) -> NotComputed | None:
    return first_reason(*few_or_constant(first, second), n=(first.size, second.size))
