"""F-test of two variances: does one group vary more, or less, than another."""

import math

from scipy import special

from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, Values, statistical_test
from beforehand.hypothesis_tests.f_again import LogF
from beforehand.hypothesis_tests.group_refusals import few_or_constant
from beforehand.hypothesis_tests.refusals import first_reason
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student import moments
from beforehand.hypothesis_tests.student_again import exact_moments
from beforehand.terms import Alternative

NOT_ROBUST = (
    "The level of this test rests on normality and does not improve with more values. "
    "ratio_of_mean_absolute_deviations asks about spread without assuming it."
)


@statistical_test(
    title="F-test of two variances",
    design="two_groups",
    outcome="number",
    scale="ratio",
    estimates="ratio of variances",
    parameter="σ₁² / σ₂²",
    statistic="F",
    p_is="exact when the values are normally distributed, otherwise wrong whatever their number",
    null="the ratio of variances (first / second) equals the null value",
    assumptions=(
        "the units are independent of each other",
        "the values of each group are normally distributed, however many they are",
    ),
    second_route=(
        "variances in exact whole-number arithmetic, tail and quantile of F by double exponential quadrature of the "
        "density of its logarithm; shares no formula and no special function with the first"
    ),
    bound=1e-9,
    reference="Fisher (1925), Statistical Methods for Research Workers, Edinburgh: Oliver and Boyd; Box (1953), "
    "Biometrika 40:318-335 (robustness)",
)
def f_ratio(
    first: Values,
    second: Values,
    *,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Test the ratio of the variances of two independent groups, normally distributed.

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        The outcome of the independent units of each group, same unit; n1, n2 >= 2.
    null_value : float
        The ratio of variances, first / second, under the null hypothesis, above 0.
    alternative : {"above", "below", "two_sided"}
        The side on which the ratio is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.

    Returns
    -------
    Outcome or NotComputed
        The ratio of variances with its interval, F = ratio / null value, the degrees of freedom of the first group
        (those of the second are n2 - 1) and p. No result for too few values, or when the values of either group differ
        by no more than rounding.

    Raises
    ------
    ValueError
        When the null value is not above 0.

    Notes
    -----
    Two-sided p is twice the smaller tail, and the interval holds exactly the null values that it does not reject. With
    long tails a true level of 5 % becomes 10 % or more, with short ones nearly 0, and more values don't help: the
    variance of a variance depends on the fourth moment (Box 1953). Where normality is not known beforehand,
    ratio_of_mean_absolute_deviations is the test of spread to plan.

    References
    ----------
    Fisher (1925), Statistical Methods for Research Workers, Edinburgh: Oliver and Boyd.
    Box (1953), Non-normality and tests on variances, Biometrika 40:318-335.
    """
    asked = _asked(null_value, alternative, confidence)
    if refusal := _refusal(first, second):
        return refusal
    one, two = moments(first), moments(second)
    ratio, d1, d2 = (one.sd / two.sd) ** 2, one.n - 1, two.n - 1
    f = ratio / null_value
    return Outcome(
        estimate=ratio,
        lower=ratio / _upper_quantile(asked.tail, d1, d2),
        upper=ratio * _upper_quantile(asked.tail, d2, d1),
        statistic=f,
        df=float(d1),
        p=asked.p(above=_above(f, d1, d2), below=_above(1 / f, d2, d1)),
        n=(one.n, two.n),
        remarks=(NOT_ROBUST,),
    )


def second_route(
    first: Values,
    second: Values,
    *,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Compute the same by exact sums and quadrature; only refusals and the remark are shared with the first route."""
    asked = _asked(null_value, alternative, confidence)
    if refusal := _refusal(first, second):
        return refusal
    one, two = exact_moments(first), exact_moments(second)
    d1, d2 = one.n - 1, two.n - 1
    ratio = float(one.squares / d1 / (two.squares / d2))
    tails = LogF(d1, d2).tails(math.log(ratio) - math.log(null_value))
    two_sided = min(1.0, 2 * min(tails.above, tails.below))
    return Outcome(
        estimate=ratio,
        lower=ratio * math.exp(-LogF(d1, d2).upper_quantile(asked.tail)),
        upper=ratio * math.exp(LogF(d2, d1).upper_quantile(asked.tail)),
        statistic=ratio / null_value,
        df=float(d1),
        p={"above": tails.above, "below": tails.below, "two_sided": two_sided}[alternative],
        n=(one.n, two.n),
        remarks=(NOT_ROBUST,),
    )


def _above(f: float, d1: int, d2: int) -> float:
    """Give P(F >= f), from whichever side of the beta distribution keeps its digits."""
    share, rest = d1 * f / (d1 * f + d2), d2 / (d1 * f + d2)
    if rest < share:
        return float(special.betainc(d2 / 2, d1 / 2, rest))
    return float(special.betaincc(d1 / 2, d2 / 2, share))


def _upper_quantile(tail: float, d1: int, d2: int) -> float:
    """Solve P(F >= q) = tail."""
    rest = float(special.betaincinv(d2 / 2, d1 / 2, tail))
    return d2 * float(special.betainccinv(d1 / 2, d2 / 2, tail)) / (d1 * rest)


def _asked(null_value: float, alternative: Alternative, confidence: float) -> Asked:
    if null_value <= 0:
        raise ValueError(f"a ratio of variances under the null hypothesis is above 0; found {null_value!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _refusal(first: Values, second: Values) -> NotComputed | None:
    return first_reason(*few_or_constant(first, second), n=(first.size, second.size))
