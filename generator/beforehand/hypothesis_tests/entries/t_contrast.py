"""The t-test of two of several groups: do their means differ, with the variance pooled over all groups."""

import math
from fractions import Fraction

import numpy as np

from beforehand.hypothesis_tests.contract import NotComputed, Result, Values, statistical_test
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few, varies
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student import moments, t_outcome
from beforehand.hypothesis_tests.student_again import exact_moments, t_outcome_again
from beforehand.terms import Alternative


@statistical_test(
    title="t-test of two of several groups, variance pooled over all of them",
    design="contrast",
    outcome="number",
    scale="difference",
    estimates="difference in means",
    parameter="μ₁ − μ₂",
    statistic="t",
    p_is="exact when the values are normally distributed with one variance in all groups, otherwise approximate",
    null="the difference in means (first - second) equals the null value",
    assumptions=(
        "the units are independent of each other",
        "the values of each group are normally distributed, or so many that their mean is",
        "all groups of the column have the same variance, also those that are not compared",
    ),
    second_route=(
        "means and sums of squares in exact whole-number arithmetic, root with 50 digits, tail and quantile of "
        "Student's t by double exponential quadrature of its density; shares no formula and no special function with "
        "the first"
    ),
    bound=1e-9,
    reference="Fisher (1925), Metron 5:90-104; Dunnett (1955), Journal of the American Statistical Association "
    "50:1096-1121",
)
def t_contrast(
    first: Values,
    second: Values,
    *others: Values,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Test the difference between the means of two of several independent groups.

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        The outcome of the independent units of the two groups that are compared, same unit; n1, n2 >= 1.
    *others : ndarray
        The outcome of every other group, same unit. Empty ones count for nothing.
    null_value : float
        The difference in means, first - second, under the null hypothesis, same unit.
    alternative : {"above", "below", "two_sided"}
        The side on which the difference is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.

    Returns
    -------
    Outcome or NotComputed
        The difference in means with its interval, t, N - k degrees of freedom (N values in k groups that are not empty)
        and p. ``n`` has the size of every group. No result for too few values, or when no value differs from the others
        of its group by more than rounding.

    Notes
    -----
    s² = (sum of the squared deviations from the mean of their group, over all groups) / (N - k), standard error
    s √(1/n1 + 1/n2). With no other groups this is Student's two-sample t-test. Groups with unequal variances spoil
    comparisons that they are no part of; Welch's test does without them. The interval holds exactly the null values
    that a two-sided test at 1 - confidence does not reject.

    References
    ----------
    Fisher (1925), Applications of "Student's" distribution, Metron 5:90-104.
    Dunnett (1955), A multiple comparison procedure for comparing several treatments with a control, Journal of the
    American Statistical Association 50:1096-1121.
    """
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    sizes = _sizes(first, second, *others)
    if refusal := _refusal(first, second, *others):
        return refusal
    each = [moments(group) for group in (first, second, *others) if group.size]
    df = sum(group.n - 1 for group in each)
    pooled = math.hypot(*(math.sqrt(group.n - 1) * group.sd for group in each)) / math.sqrt(df)
    return t_outcome(
        asked,
        estimate=each[0].mean - each[1].mean,
        standard_error=pooled * math.sqrt(1 / first.size + 1 / second.size),
        df=df,
        n=sizes,
        remarks=_remarks(first, second, *others),
    )


def second_route(
    first: Values,
    second: Values,
    *others: Values,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Compute the same by exact sums and quadrature; only refusals and remarks are shared with the first route."""
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    if refusal := _refusal(first, second, *others):
        return refusal
    each = [exact_moments(group) for group in (first, second, *others) if group.size]
    df = sum(group.n for group in each) - len(each)
    one, two = each[:2]
    return t_outcome_again(
        asked,
        estimate=one.mean - two.mean,
        squared_error=sum((group.squares for group in each), Fraction(0)) / df * Fraction(one.n + two.n, one.n * two.n),
        df=Fraction(df),
        n=_sizes(first, second, *others),
        remarks=_remarks(first, second, *others),
    )


def _sizes(*groups: Values) -> tuple[int, ...]:
    return tuple(group.size for group in groups)


def _refusal(*groups: Values) -> NotComputed | None:
    there = [group for group in groups if group.size]
    values, n = sum(group.size for group in there), _sizes(*groups)
    constant = f"all values of each of the {len(there)} groups are equal"
    needed = len(there) + 1
    return first_reason(
        too_few(groups[0].size, 1, noun="value", whose=" of the first group"),
        too_few(groups[1].size, 1, noun="value", whose=" of the second group"),
        too_few(values, needed, noun="value", whose=f" of {count(len(there), 'group')} together"),
        None if any(varies(group) for group in there) else constant,
        n=n,
    )


def _remarks(*groups: Values) -> tuple[str, ...]:
    there = [group for group in groups if group.size]
    flat = sum(group.size > 1 and not varies(group) for group in there)
    pooled = f"The variance is pooled over {len(there)} groups with {np.concatenate(there).size} values."
    told = f"All values of {count(flat, 'group')} are equal, which speaks against equal variances."
    return (pooled, told) if flat else (pooled,)
