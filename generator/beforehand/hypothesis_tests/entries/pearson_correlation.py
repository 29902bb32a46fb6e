"""Pearson's correlation of two columns: do they rise together along a straight line, and how closely."""

import math
from decimal import Decimal
from typing import Literal

from beforehand.hypothesis_tests import correlation_again, normal, normal_again
from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, Values, statistical_test
from beforehand.hypothesis_tests.correlation import Bell, Correlation, centre_at
from beforehand.hypothesis_tests.correlation_again import ExactCorrelation, centre_again
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few, varies
from beforehand.hypothesis_tests.sides import Asked
from beforehand.terms import Alternative

Method = Literal["exact", "fisher_z"]

STRAIGHT = 1e-12
"""Where 1 - |r| is smaller, the columns are one line but for a millionth of their spread."""


@statistical_test(
    title="Pearson's correlation",
    design="association",
    outcome="number",
    scale="correlation",
    estimates="correlation",
    parameter="ρ",
    statistic="t",
    p_is="exact when the pairs are bivariate normal (approximate by the method fisher_z)",
    null="the correlation equals the null value",
    assumptions=(
        "the pairs are independent of each other",
        "the pairs are bivariate normal; for the null value 0 it is enough that one column is normal and independent "
        "of the other",
    ),
    second_route=(
        "r from exact fractions and a 50-digit root; its distribution by Fisher's double integral, ends of the "
        "interval by false position; shares no sum, no hypergeometric function, no quadrature rule and no root finder "
        "with the first"
    ),
    bound=1e-9,
    reference="Fisher (1915), Biometrika 10:507-521; Fisher (1921), Metron 1:3-32",
    null_between=(-1.0, 1.0),
)
def pearson_correlation(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "exact",
) -> Result:
    """Test the correlation of two columns.

    Parameters
    ----------
    first, second : ndarray, shape (n,)
        The two values of each independent unit, in any two units; n >= 3 (>= 4 by ``fisher_z``).
    null_value : float
        The correlation under the null hypothesis, between -1 and 1.
    alternative : {"above", "below", "two_sided"}
        The side on which the correlation is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    method : {"exact", "fisher_z"}
        The exact distribution of r in samples from a bivariate normal distribution; or the normal approximation of
        artanh r with variance 1 / (n - 3), which most programs print as the interval.

    Returns
    -------
    Outcome or NotComputed
        r with its interval, t = r √((n - 2) / (1 - r²)), n - 2 degrees of freedom, and p. No result for too few rows,
        when a column does not vary, or when the columns are one straight line, up to a millionth of their spread.

    Raises
    ------
    ValueError
        When the null value does not lie between -1 and 1, or ``method`` is not one of its words.

    Notes
    -----
    At the null value 0 the exact p is that of Student's t with n - 2 degrees of freedom; at any other one it is a tail
    of the distribution that Fisher found, integrated numerically. The interval holds exactly the correlations that p
    keeps. Many programs print Student's p beside the interval of artanh r, which can contradict each other: hence one
    method for both. r measures straight lines only, is moved by single far values, and says nothing of cause.

    References
    ----------
    Fisher (1915), Frequency distribution of the values of the correlation coefficient in samples from an indefinitely
    large population, Biometrika 10:507-521.
    Hotelling (1953), New light on the correlation coefficient and its transforms, Journal of the Royal Statistical
    Society B 15:193-232.
    Fisher (1921), On the "probable error" of a coefficient of correlation deduced from a small sample, Metron 1:3-32.
    """
    asked = _asked(null_value, alternative, confidence, method)
    if refusal := _refusal(first, second, method):
        return refusal
    seen = Correlation.of(first, second)
    if refusal := _straight(seen):
        return refusal
    n, w, beta = seen.n, seen.w, math.atanh(null_value)
    if method == "exact":
        bell = Bell(n, beta)
        p = asked.p(above=bell.above(w), below=bell.below(w))
        lower, upper = centre_at(n, w, asked.tail), -centre_at(n, -w, asked.tail)
    else:
        p = normal.p_of(asked, (w - beta) * math.sqrt(n - 3))
        half = normal.critical(asked.tail) / math.sqrt(n - 3)
        lower, upper = w - half, w + half
    return Outcome(
        estimate=seen.r,
        lower=math.tanh(lower),
        upper=math.tanh(upper),
        statistic=seen.t,
        df=float(n - 2),
        p=p,
        n=(n,),
    )


def second_route(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "exact",
) -> Result:
    """Compute the same with ``correlation_again``; refusals are shared."""
    asked = _asked(null_value, alternative, confidence, method)
    if refusal := _refusal(first, second, method) or _straight(Correlation.of(first, second)):
        return refusal
    seen = ExactCorrelation.of(first, second)
    n, w, beta = seen.n, seen.w, math.log((1 + null_value) / (1 - null_value)) / 2
    if method == "exact":
        above, below = correlation_again.tails(n, w, beta)
        p = {"above": above, "below": below, "two_sided": min(1.0, 2 * min(above, below))}[alternative]
        lower, upper = centre_again(n, w, asked.tail), -centre_again(n, -w, asked.tail)
    else:
        p = normal_again.p_of(asked, Decimal(n - 3).sqrt() * Decimal(w - beta))
        half = float(normal_again.critical(asked.tail)) / math.sqrt(n - 3)
        lower, upper = w - half, w + half
    return Outcome(
        estimate=float(seen.r),
        lower=1 - 2 / (math.exp(2 * lower) + 1),
        upper=1 - 2 / (math.exp(2 * upper) + 1),
        statistic=seen.t,
        df=float(n - 2),
        p=p,
        n=(n,),
    )


def _asked(null_value: float, alternative: Alternative, confidence: float, method: str) -> Asked:
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    if not -1 < null_value < 1:
        raise ValueError(f"a correlation under the null hypothesis lies between -1 and 1; found {null_value!r}")
    if method not in ("exact", "fisher_z"):
        raise ValueError(f"method is exact or fisher_z; found {method!r}")
    return asked


def _refusal(first: Values, second: Values, method: str) -> NotComputed | None:
    flat = [word for word, column in (("first", first), ("second", second)) if not varies(column)]
    constant = [f"all {count(first.size, 'value')} of the {word} column are equal" for word in flat]
    return first_reason(
        too_few(first.size, 3 if method == "exact" else 4, noun="row"), "; ".join(constant) or None, n=(first.size,)
    )


def _straight(seen: Correlation) -> NotComputed | None:
    if min(seen.below_one, seen.above_minus_one) >= STRAIGHT:
        return None
    return NotComputed("the two columns are one straight line, up to rounding: one says what the other says", (seen.n,))
