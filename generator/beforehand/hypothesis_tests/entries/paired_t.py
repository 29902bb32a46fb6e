"""Paired t-test: is the mean difference within pairs equal to a value, or does it lie above or below it."""

from fractions import Fraction

from beforehand.hypothesis_tests.contract import NotComputed, Result, Values, statistical_test
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few, varies
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student import moments_of_differences, t_outcome
from beforehand.hypothesis_tests.student_again import exact_moments_of_differences, t_outcome_again
from beforehand.hypothesis_tests.ties import rounding
from beforehand.terms import Alternative


@statistical_test(
    title="Paired t-test",
    design="pairs",
    outcome="number",
    scale="difference",
    estimates="mean difference",
    parameter="μ₁ − μ₂",
    statistic="t",
    p_is="exact when the differences are normally distributed, otherwise approximate",
    null="the mean of the differences within pairs (first - second) equals the null value",
    assumptions=(
        "the pairs are independent of each other",
        "the differences are normally distributed, or so many that their mean is",
    ),
    second_route=(
        "differences and sums in exact fractions, root with 50 digits, tail and quantile of Student's t by double "
        "exponential quadrature of its density; shares no formula and no special function with the first"
    ),
    bound=1e-9,
    reference="Student (1908), Biometrika 6:1-25",
)
def paired_t(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Test the mean difference within pairs with Student's t.

    Parameters
    ----------
    first, second : ndarray, shape (n,)
        The two outcomes of each of n >= 2 independent pairs, aligned, same unit.
    null_value : float
        The mean difference first - second under the null hypothesis, same unit.
    alternative : {"above", "below", "two_sided"}
        The side on which the mean difference is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.

    Returns
    -------
    Outcome or NotComputed
        The mean difference with its interval, t, n - 1 degrees of freedom and p; n is the number of pairs. No result
        for fewer than two pairs, or differences that vary by no more than rounding.

    Notes
    -----
    The one-sample t-test of the differences. Only they need be normal, not the two outcomes, whose variances may
    differ. The interval holds exactly the null values that a two-sided test at 1 - confidence does not reject.

    References
    ----------
    Student (1908), The probable error of a mean, Biometrika 6:1-25.
    """
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    if refusal := _refusal(first, second):
        return refusal
    differences = moments_of_differences(first, second)
    return t_outcome(
        asked,
        estimate=differences.mean,
        standard_error=differences.standard_error,
        df=differences.n - 1,
        n=(differences.n,),
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
    differences = exact_moments_of_differences(first, second)
    return t_outcome_again(
        asked,
        estimate=differences.mean,
        squared_error=differences.variance_of_mean,
        df=Fraction(differences.n - 1),
        n=(differences.n,),
    )


def _refusal(first: Values, second: Values) -> NotComputed | None:
    n = first.size
    constant = n and not varies(first - second, rounding(first, second))
    return first_reason(
        too_few(n, 2, noun="pair"),
        f"the differences within all {count(n, 'pair')} are equal" if constant else None,
        n=(n,),
    )
