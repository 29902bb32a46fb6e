"""Welch's t-test of logarithms: how many times as large is the geometric mean of one group as that of another."""

import math
from dataclasses import replace
from decimal import Decimal

import numpy as np

from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, Values, statistical_test
from beforehand.hypothesis_tests.group_refusals import few_or_constant
from beforehand.hypothesis_tests.logarithms import exact_log_moments, logarithms
from beforehand.hypothesis_tests.refusals import first_reason
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student import moments, t_outcome
from beforehand.hypothesis_tests.student_again import FIFTY_DIGITS, t_outcome_again
from beforehand.terms import Alternative

LARGEST_LOGARITHM = math.log(1.7e308)


@statistical_test(
    title="Welch's t-test of logarithms",
    design="two_groups",
    outcome="number",
    scale="ratio",
    estimates="ratio of geometric means",
    parameter="γ₁ / γ₂",
    statistic="t",
    p_is="approximate, very nearly exact when the logarithms are normally distributed",
    null="the ratio of geometric means (first / second) equals the null value",
    assumptions=(
        "the units are independent of each other",
        "all values are above 0",
        "the logarithms of each group are normally distributed, or so many that their mean is",
    ),
    second_route=(
        "logarithms as 50-digit decimals summed as whole numbers, root with 50 digits, tail and quantile of Student's "
        "t by double exponential quadrature of its density; shares no logarithm, no formula and no special function "
        "with the first"
    ),
    bound=1e-9,
    reference="Welch (1947), Biometrika 34:28-35; Keene (1995), Statistics in Medicine 14:811-819 (logarithms)",
)
def ratio_of_geometric_means(
    first: Values,
    second: Values,
    *,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Test the ratio of the geometric means of two independent groups of positive values.

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        The outcome of the independent units of each group, same unit, all above 0; n1, n2 >= 2.
    null_value : float
        The ratio of geometric means, first / second, under the null hypothesis, above 0: for equivalence a margin.
    alternative : {"above", "below", "two_sided"}
        The side on which the ratio is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.

    Returns
    -------
    Outcome or NotComputed
        The ratio of geometric means with its interval, t and its degrees of freedom (of the logarithms) and p. No
        result when a value is not above 0, for too few values, or when the values of either group differ by no more
        than rounding.

    Raises
    ------
    ValueError
        When the null value is not above 0.

    Notes
    -----
    Welch's t-test of the natural logarithms; estimate and ends of the interval are taken back by the exponential
    function. For values whose logarithms are symmetric, geometric means are medians. They are not arithmetic means:
    where the spread of the logarithms differs between the groups, the two kinds of mean have different ratios. Zeros
    and values below a detection limit have no logarithm, and adding a constant to them would decide the result: such
    data get none.

    References
    ----------
    Welch (1947), The generalization of "Student's" problem when several different population variances are involved,
    Biometrika 34:28-35.
    Keene (1995), The log transformation is special, Statistics in Medicine 14:811-819.
    """
    asked = _asked(null_value, alternative, confidence)
    if refusal := _refusal(first, second):
        return refusal
    centre = float(np.median(np.concatenate([first, second])))
    one, two = moments(logarithms(first, centre)), moments(logarithms(second, centre))
    error = math.hypot(one.standard_error, two.standard_error)
    share = (one.standard_error / error) ** 2, (two.standard_error / error) ** 2
    of_logs = t_outcome(
        replace(asked, null_value=math.log(null_value)),
        estimate=one.mean - two.mean,
        standard_error=error,
        df=1 / (share[0] ** 2 / (one.n - 1) + share[1] ** 2 / (two.n - 1)),
        n=(one.n, two.n),
    )
    return _as_ratio(of_logs)


def second_route(
    first: Values,
    second: Values,
    *,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Compute the same from decimals; only refusals and the way back from logarithms are shared."""
    asked = _asked(null_value, alternative, confidence)
    if refusal := _refusal(first, second):
        return refusal
    one, two = exact_log_moments(first), exact_log_moments(second)
    v1, v2 = one.variance_of_mean, two.variance_of_mean
    of_logs = t_outcome_again(
        replace(asked, null_value=float(FIFTY_DIGITS.ln(Decimal(null_value)))),
        estimate=one.mean - two.mean,
        squared_error=v1 + v2,
        df=(v1 + v2) ** 2 / (v1**2 / (one.n - 1) + v2**2 / (two.n - 1)),
        n=(one.n, two.n),
    )
    return _as_ratio(of_logs)


def _as_ratio(of_logs: Outcome) -> Outcome:
    """Take estimate and interval back from logarithms; a standard error of logarithms is none of their ratio."""
    return replace(
        of_logs,
        estimate=_exp(of_logs.estimate),
        lower=_exp(of_logs.lower),
        upper=_exp(of_logs.upper),
        standard_error=math.nan,
    )


def _exp(value: float) -> float:
    return math.exp(value) if value < LARGEST_LOGARITHM else math.inf


def _asked(null_value: float, alternative: Alternative, confidence: float) -> Asked:
    if null_value <= 0:
        raise ValueError(f"a ratio of geometric means under the null hypothesis is above 0; found {null_value!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _refusal(first: Values, second: Values) -> NotComputed | None:
    without = [
        f"values of the {word} group that are not above 0 have no logarithm: {(group <= 0).sum()} of {group.size}"
        for word, group in (("first", first), ("second", second))
        if (group <= 0).any()
    ]
    reasons = ("; ".join(without) or None, *few_or_constant(first, second))
    return first_reason(*reasons, n=(first.size, second.size))
