"""Welch's t-test: do two means differ, whatever the variances of the two groups."""

import math

from beforehand.hypothesis_tests.contract import NotComputed, Result, Values, statistical_test
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few, varies
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student import moments, t_outcome
from beforehand.hypothesis_tests.student_again import exact_moments, t_outcome_again
from beforehand.terms import Alternative


@statistical_test(
    title="Welch's t-test",
    design="two_groups",
    outcome="number",
    scale="difference",
    estimates="difference in means",
    parameter="μ₁ − μ₂",
    statistic="t",
    p_is="approximate, very nearly exact when the values are normally distributed",
    null="the difference in means (first - second) equals the null value",
    assumptions=(
        "the units are independent of each other",
        "the values of each group are normally distributed, or so many that their mean is",
    ),
    second_route=(
        "means, variances and degrees of freedom in exact whole-number arithmetic, root with 50 digits, tail and "
        "quantile of Student's t by double exponential quadrature of its density; shares no formula and no special "
        "function with the first"
    ),
    bound=1e-9,
    reference="Welch (1947), Biometrika 34:28-35; Satterthwaite (1946), Biometrics Bulletin 2:110-114",
)
def welch_t(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Test the difference between the means of two independent groups, each with its own variance.

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        The outcome of the independent units of each group, same unit; n1, n2 >= 2.
    null_value : float
        The difference in means, first - second, under the null hypothesis, same unit.
    alternative : {"above", "below", "two_sided"}
        The side on which the difference is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.

    Returns
    -------
    Outcome or NotComputed
        The difference in means with its interval, t, the Welch-Satterthwaite degrees of freedom (not rounded) and p.
        No result for too few values, or when the values of either group differ by no more than rounding.

    Notes
    -----
    With v = s²/n of each group: t = (difference - null value) / √(v1 + v2) and
    df = (v1 + v2)² / (v1² / (n1 - 1) + v2² / (n2 - 1)). A group whose values are all equal would pass for a mean known
    without error, and p would be too small: such data get no result. The interval holds exactly the null values that a
    two-sided test at 1 - confidence does not reject.

    References
    ----------
    Welch (1947), The generalization of "Student's" problem when several different population variances are involved,
    Biometrika 34:28-35.
    Satterthwaite (1946), An approximate distribution of estimates of variance components, Biometrics Bulletin
    2:110-114 (degrees of freedom).
    """
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    if refusal := _refusal(first, second):
        return refusal
    one, two = moments(first), moments(second)
    error = math.hypot(one.standard_error, two.standard_error)
    share = (one.standard_error / error) ** 2, (two.standard_error / error) ** 2
    return t_outcome(
        asked,
        estimate=one.mean - two.mean,
        standard_error=error,
        df=1 / (share[0] ** 2 / (one.n - 1) + share[1] ** 2 / (two.n - 1)),
        n=(one.n, two.n),
    )


def second_route(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Compute the same by exact sums and quadrature; only refusals are shared with the first route."""
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    if refusal := _refusal(first, second):
        return refusal
    one, two = exact_moments(first), exact_moments(second)
    v1, v2 = one.variance_of_mean, two.variance_of_mean
    return t_outcome_again(
        asked,
        estimate=one.mean - two.mean,
        squared_error=v1 + v2,
        df=(v1 + v2) ** 2 / (v1**2 / (one.n - 1) + v2**2 / (two.n - 1)),
        n=(one.n, two.n),
    )


def _refusal(first: Values, second: Values) -> NotComputed | None:
    flat = [word for word, group in (("first", first), ("second", second)) if not varies(group)]
    sizes = {"first": first.size, "second": second.size}
    constant = [f"all {count(sizes[word], 'value')} of the {word} group are equal" for word in flat]
    return first_reason(
        too_few(first.size, 2, noun="value", whose=" of the first group"),
        too_few(second.size, 2, noun="value", whose=" of the second group"),
        "; ".join(constant) or None,
        n=(first.size, second.size),
    )
