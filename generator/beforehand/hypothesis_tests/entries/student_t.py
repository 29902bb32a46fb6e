"""Student's two-sample t-test: do two means differ, when both groups have the same variance."""

import math
from fractions import Fraction

from beforehand.hypothesis_tests.contract import NotComputed, Result, Values, statistical_test
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few, varies
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student import moments, t_outcome
from beforehand.hypothesis_tests.student_again import exact_moments, t_outcome_again
from beforehand.terms import Alternative


@statistical_test(
    title="Student's two-sample t-test, variances assumed equal",
    design="two_groups",
    outcome="number",
    scale="difference",
    estimates="difference in means",
    parameter="μ₁ − μ₂",
    statistic="t",
    p_is="exact when the values are normally distributed with equal variances, otherwise approximate",
    null="the difference in means (first - second) equals the null value",
    assumptions=(
        "the units are independent of each other",
        "the values of each group are normally distributed, or so many that their mean is",
        "both groups have the same variance",
    ),
    second_route=(
        "means and sums of squares in exact whole-number arithmetic, root with 50 digits, tail and quantile of "
        "Student's t by double exponential quadrature of its density; shares no formula and no special function with "
        "the first"
    ),
    bound=1e-9,
    reference="Student (1908), Biometrika 6:1-25; Fisher (1925), Metron 5:90-104",
)
def student_t(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Test the difference between the means of two independent groups with the pooled variance.

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        The outcome of the independent units of each group, same unit; n1, n2 >= 1 and n1 + n2 >= 3.
    null_value : float
        The difference in means, first - second, under the null hypothesis, same unit.
    alternative : {"above", "below", "two_sided"}
        The side on which the difference is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.

    Returns
    -------
    Outcome or NotComputed
        The difference in means with its interval, t, n1 + n2 - 2 degrees of freedom and p. No result for too few
        values, or when no value differs from the others of its group by more than rounding.

    Notes
    -----
    s² = (SS1 + SS2) / (n1 + n2 - 2) with the sums of squared deviations of both groups, standard error
    s √(1/n1 + 1/n2). With unequal variances and unequal sizes the level is not kept: it is exceeded when the smaller
    group has the larger variance. Prefer Welch's test unless equal variances are known. The interval holds exactly the
    null values that a two-sided test at 1 - confidence does not reject.

    References
    ----------
    Student (1908), The probable error of a mean, Biometrika 6:1-25.
    Fisher (1925), Applications of "Student's" distribution, Metron 5:90-104.
    """
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    if refusal := _refusal(first, second):
        return refusal
    one, two = moments(first), moments(second)
    df = one.n + two.n - 2
    pooled = math.hypot(math.sqrt(one.n - 1) * one.sd, math.sqrt(two.n - 1) * two.sd) / math.sqrt(df)
    return t_outcome(
        asked,
        estimate=one.mean - two.mean,
        standard_error=pooled * math.sqrt(1 / one.n + 1 / two.n),
        df=df,
        n=(one.n, two.n),
        remarks=_remarks(first, second),
    )


def second_route(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Compute the same by exact sums and quadrature; only refusals and remarks are shared with the first route."""
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    if refusal := _refusal(first, second):
        return refusal
    one, two = exact_moments(first), exact_moments(second)
    df = one.n + two.n - 2
    return t_outcome_again(
        asked,
        estimate=one.mean - two.mean,
        squared_error=(one.squares + two.squares) / df * Fraction(one.n + two.n, one.n * two.n),
        df=Fraction(df),
        n=(one.n, two.n),
        remarks=_remarks(first, second),
    )


def _refusal(first: Values, second: Values) -> NotComputed | None:
    constant = f"all {count(first.size, 'value')} of the first group are equal, and all {second.size} of the second"
    return first_reason(
        too_few(first.size, 1, noun="value", whose=" of the first group"),
        too_few(second.size, 1, noun="value", whose=" of the second group"),
        too_few(first.size + second.size, 3, noun="value", whose=" of both groups together"),
        None if varies(first) or varies(second) else constant,
        n=(first.size, second.size),
    )


def _remarks(first: Values, second: Values) -> tuple[str, ...]:
    flat = [word for word, group in (("first", first), ("second", second)) if group.size > 1 and not varies(group)]
    return tuple(f"All values of the {word} group are equal, which speaks against equal variances." for word in flat)
