"""One-sample t-test: is a mean equal to a value fixed beforehand, or does it lie above or below."""

from fractions import Fraction

from beforehand.hypothesis_tests.contract import NotComputed, Result, Values, statistical_test
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few, varies
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student import moments, t_outcome
from beforehand.hypothesis_tests.student_again import exact_moments, t_outcome_again
from beforehand.terms import Alternative


@statistical_test(
    title="One-sample t-test",
    design="one_sample",
    outcome="number",
    scale="location",
    estimates="mean",
    parameter="μ",
    statistic="t",
    p_is="exact when the values are normally distributed, otherwise approximate",
    null="the mean equals the null value",
    assumptions=(
        "the values are independent of each other",
        "the values are normally distributed, or so many that their mean is",
    ),
    second_route=(
        "mean and sum of squares in exact whole-number arithmetic, root with 50 digits, tail and quantile of Student's "
        "t by double exponential quadrature of its density; shares no formula and no special function with the first"
    ),
    bound=1e-9,
    reference="Student (1908), Biometrika 6:1-25",
)
def one_sample_t(
    values: Values, *, null_value: float = 0.0, alternative: Alternative = "two_sided", confidence: float = 0.95
) -> Result:
    """Test the mean of one sample with Student's t.

    Parameters
    ----------
    values : ndarray, shape (n,)
        The outcome of n >= 2 independent units, in the unit of the outcome.
    null_value : float
        The mean under the null hypothesis, same unit.
    alternative : {"above", "below", "two_sided"}
        The side on which the mean is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.

    Returns
    -------
    Outcome or NotComputed
        The mean with its interval, t, n - 1 degrees of freedom and p; no result for fewer than two values, or values
        that differ by no more than rounding.

    Notes
    -----
    t = (mean - null value) / (s / √n), with s the standard deviation (divisor n - 1). The interval holds exactly the
    null values that a two-sided test at 1 - confidence does not reject. Without normality the level is approximate:
    skewness disturbs one-sided tests most, and its effect falls with 1 / √n.

    References
    ----------
    Student (1908), The probable error of a mean, Biometrika 6:1-25.
    """
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    if refusal := _refusal(values):
        return refusal
    sample = moments(values)
    return t_outcome(
        asked,
        estimate=sample.mean,
        standard_error=sample.standard_error,
        df=sample.n - 1,
        n=(sample.n,),
    )


def second_route(
    values: Values, *, null_value: float = 0.0, alternative: Alternative = "two_sided", confidence: float = 0.95
) -> Result:
    """Compute the same by exact sums and quadrature; only refusals are shared with the first route."""
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    if refusal := _refusal(values):
        return refusal
    sample = exact_moments(values)
    return t_outcome_again(
        asked,
        estimate=sample.mean,
        squared_error=sample.variance_of_mean,
        df=Fraction(sample.n - 1),
        n=(sample.n,),
    )


def _refusal(values: Values) -> NotComputed | None:
    return first_reason(
        too_few(values.size, 2, noun="value"),
        None if varies(values) else f"all {count(values.size, 'value')} are equal",
        n=(values.size,),
    )
