"""Analysis of covariance: do the means of two groups differ where they are alike in other columns."""

from fractions import Fraction
from typing import Literal

from beforehand.hypothesis_tests.adjusted import fitted
from beforehand.hypothesis_tests.adjusted_again import Equations
from beforehand.hypothesis_tests.beside import Covariates
from beforehand.hypothesis_tests.contract import NotComputed, Result, Values, statistical_test
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student import t_outcome
from beforehand.hypothesis_tests.student_again import t_outcome_again
from beforehand.terms import Alternative

Errors = Literal["classical", "hc3"]


@statistical_test(
    title="Analysis of covariance",
    design="two_groups",
    outcome="number",
    scale="difference",
    estimates="adjusted difference in means",
    parameter="δ",
    statistic="t",
    p_is="exact when the outcome is normal around parallel lines with one variance (approximate with errors: hc3)",
    null="the difference in means (first - second) at equal covariates equals the null value",
    assumptions=(
        "the units are independent of each other",
        "the covariates act alike in both groups, numbers along straight lines, and were not changed by the group",
        "around these lines the outcome is normally distributed with one variance, or the units are many",
    ),
    second_route=(
        "the normal equations in whole numbers and exact fractions, Student's t by quadrature; shares no centring, no "
        "orthogonal column, no floating-point sum and no special function with the first"
    ),
    bound=1e-9,
    reference="Fisher (1932), Statistical Methods for Research Workers, 4th edition; MacKinnon and White (1985)",
)
def analysis_of_covariance(
    first: Values,
    second: Values,
    *,
    covariates: Covariates,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    errors: Errors = "classical",
) -> Result:
    """Test the difference between the means of two independent groups, adjusted for covariates.

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        The outcome of the independent units of each group, same unit.
    covariates : tuple of two mappings, name to ndarray of shapes (n1,) and (n2,)
        For each group its covariates by name: numbers, or the levels of a category as text.
    null_value : float
        The adjusted difference, first - second, under the null hypothesis, unit of the outcome.
    alternative : {"above", "below", "two_sided"}
        The side on which the difference is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    errors : {"classical", "hc3"}
        The standard error of one variance for all units; or one that allows each unit its own (approximate).

    Returns
    -------
    Outcome or NotComputed
        The coefficient of the group in the least squares fit, with its interval, t, n1 + n2 less the number of
        coefficients as degrees of freedom, and p. No result with no degree of freedom, when a covariate is constant or
        follows from the groups and earlier covariates, or when the fit leaves no scatter.

    Raises
    ------
    ValueError
        When ``errors`` is not one of its words.

    Notes
    -----
    The model has a mean, the difference of the groups, a slope for each number and an effect for each level of a
    category but one: no interaction, so the difference is the same at all covariates. ``classical`` is the default
    because its t is exact under its assumptions; ``hc3`` weighs each squared residual by 1 / (1 - leverage)² and uses
    the same degrees of freedom, which is known to be close, but is not exact. Adjusting helps where covariates tell
    much of the outcome; a covariate that the group could have changed takes a part of the difference away. Which
    covariates are used must be settled beforehand.

    References
    ----------
    Fisher (1932), Statistical Methods for Research Workers, 4th edition, section 49.1.
    MacKinnon and White (1985), Some heteroskedasticity-consistent covariance matrix estimators with improved finite
    sample properties, Journal of Econometrics 29:305-325 (hc3).
    """
    asked = _asked(null_value, alternative, confidence, errors)
    fit = fitted(first, second, covariates, errors)
    if isinstance(fit, NotComputed):
        return fit
    return t_outcome(
        asked,
        estimate=Fraction(fit.difference) * Fraction(fit.unit),
        standard_error=fit.error(errors),
        df=float(fit.df),
        n=fit.sizes,
    )


def second_route(
    first: Values,
    second: Values,
    *,
    covariates: Covariates,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    errors: Errors = "classical",
) -> Result:
    """Compute the same from the normal equations; only refusals are shared with the first route."""
    asked = _asked(null_value, alternative, confidence, errors)
    fit = fitted(first, second, covariates, errors)
    if isinstance(fit, NotComputed):
        return fit
    equations = Equations.of(first, second, covariates)
    return t_outcome_again(
        asked,
        estimate=equations.difference,
        squared_error=equations.squared_error(errors),
        df=Fraction(len(equations.rows) - equations.k),
        n=(len(first), len(second)),
    )


def _asked(null_value: float, alternative: Alternative, confidence: float, errors: str) -> Asked:
    if errors not in ("classical", "hc3"):
        raise ValueError(f"errors is classical or hc3; found {errors!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)
