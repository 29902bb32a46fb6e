"""Spearman's rank correlation: do two columns rise together, by the correlation of their ranks."""

import math
from typing import Literal

from scipy import special

from beforehand.hypothesis_tests import normal, normal_again, student_again
from beforehand.hypothesis_tests.contract import Result, Values, statistical_test
from beforehand.hypothesis_tests.correlation import Correlation
from beforehand.hypothesis_tests.rank_association import RankPairs, orders
from beforehand.hypothesis_tests.rank_association_again import Listed, counted
from beforehand.hypothesis_tests.rank_correlation import (
    PERFECT,
    RULE,
    around,
    around_again,
    checked,
    refusal,
    smallest,
    without_interval,
    without_p,
)
from beforehand.hypothesis_tests.sides import Asked
from beforehand.spelling import integer
from beforehand.terms import Alternative

Method = Literal["by_size", "exact", "student"]

FEWEST = 4


@statistical_test(
    title="Spearman's rank correlation",
    design="association",
    outcome="number",
    scale="correlation",
    estimates="rank correlation (Spearman)",
    parameter="ρ",
    statistic="t",
    p_is=f"exact, ties included, up to {integer(RULE.by_size)} rows; by Student's t beyond",
    null="the two columns are independent (null value 0), or their rank correlation equals the null value",
    assumptions=(
        "the pairs are independent of each other",
        "for the interval and for null values other than 0: many rows, few ties, and a correlation that is not extreme",
    ),
    second_route=(
        "ranks by counting and their correlation as a fraction; the exact distribution with the columns changed and "
        "all counts in one long integer, or Student's t by quadrature; the interval by powers instead of hyperbolic "
        "functions. Shares what counts as tied, what is refused, and the remarks"
    ),
    bound=1e-9,
    reference=(
        "Spearman (1904), American Journal of Psychology 15:72-101; Bonett and Wright (2000), Psychometrika 65:23-28"
    ),
    interval_inverts_p=False,
    null_between=(-1.0, 1.0),
)
def spearman_correlation(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "by_size",
) -> Result:
    """Test the correlation of the ranks of two columns.

    Parameters
    ----------
    first, second : ndarray, shape (n,)
        The two values of each independent unit, in any two units; n >= 3. Only their order counts.
    null_value : float
        The rank correlation under the null hypothesis, between -1 and 1; 0 is independence.
    alternative : {"above", "below", "two_sided"}
        The side on which the correlation is claimed to lie; two-sided p is twice the smaller one-sided p.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    method : {"by_size", "exact", "student"}
        ``by_size`` counts all orders exactly for n <= 10, whether or not values are tied, and refers t to Student's
        distribution beyond. ``exact`` is refused for n > 12.

    Returns
    -------
    Outcome or NotComputed
        The correlation of the mean ranks with an approximate interval, t = r √((n - 2) / (1 - r²)), its degrees of
        freedom where p rests on them, and p. No interval for n < 4 or at 1 and -1. No result when a column does not
        vary, or when another null value than 0 is asked for where there is no interval.

    Raises
    ------
    ValueError
        When the null value does not lie between -1 and 1, or ``method`` is not one of its words.

    Notes
    -----
    At the null value 0, the exact p is the share of all n! orders of one column that correlate as highly (lowly), given
    the ties. Student's t with n - 2 degrees of freedom is an approximation that is good in the middle and too small in
    the far tail of few rows: p is never given below the share that even the most extreme order has. The interval is
    that of Bonett and Wright: artanh r is about normal with variance (1 + r²/2) / (n - 3); p for other null values
    inverts it. The two are built differently; where they contradict each other, a remark says so.

    References
    ----------
    Spearman (1904), The proof and measurement of association between two things, American Journal of Psychology
    15:72-101.
    Bonett and Wright (2000), Sample size requirements for estimating Pearson, Kendall and Spearman correlations,
    Psychometrika 65:23-28 (interval).
    """
    asked, counts = _asked(null_value, alternative, confidence, method), _counts(first.size, method)
    if refused := refusal(first, second, method, instead="student"):
        return refused
    ranks, n = RankPairs.of(first, second), first.size
    seen = Correlation.of(ranks.first.astype(float), ranks.second.astype(float))
    r, t = seen.r, seen.t if abs(seen.r) <= PERFECT else math.copysign(math.inf, seen.r)
    r = math.copysign(1.0, r) if math.isinf(t) else r
    why_not = without_interval(r, n, FEWEST)
    if refused := without_p(asked, n, why_not):
        return refused
    found = around(r, asked, normal.critical(asked.tail), squared_error=_squared_error(r, n), why_not=why_not)
    if null_value:
        p = normal.p_of(asked, found.z)
    elif counts:
        all_orders, score = orders("products", *ranks.ties), ranks.products
        p = asked.p(above=all_orders.above(score), below=all_orders.below(score))
    else:
        least = _least(n, ranks.ties)
        above, below = (max(least, float(special.stdtr(n - 2, -side))) for side in (t, -t))
        p = asked.p(above=above, below=below)
    df = math.nan if counts or null_value else float(n - 2)
    return found.outcome(asked, p=p, statistic=t, df=df, n=n, rule=_rule(n, method))


def second_route(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "by_size",
) -> Result:
    """Compute the same with ``rank_association_again`` and ``student_again``, which name what they do not share."""
    asked, counts = _asked(null_value, alternative, confidence, method), _counts(len(first), method)
    if refused := refusal(first, second, method, instead="student"):
        return refused
    listed, n = Listed.of(first, second), len(first)
    squared = abs(listed.rho)
    r = math.copysign(float(squared) ** 0.5, listed.rho)
    perfect = abs(r) > PERFECT
    r = math.copysign(1.0, r) if perfect else r
    t = math.copysign(math.inf if perfect else float(squared * (n - 2) / (1 - squared)) ** 0.5, r)
    why_not = without_interval(r, n, FEWEST)
    if refused := without_p(asked, n, why_not):
        return refused
    critical = float(normal_again.critical(asked.tail))
    found = around_again(r, asked, critical, squared_error=_squared_error(r, n), why_not=why_not)
    if null_value:
        above, below = normal_again.upper_tail(found.z), normal_again.upper_tail(-found.z)
    elif counts:
        whole = counted("products", *listed.ties)
        above, below = whole.above(listed.products), whole.below(listed.products)
    else:
        far, near = (0.0, 1.0) if perfect else student_again.tails(abs(t), n - 2)
        least = _least(n, listed.ties)
        above, below = (max(least, one) for one in ((far, near) if t >= 0 else (near, far)))
    p = min(1.0, {"above": above, "below": below, "two_sided": 2 * min(above, below)}[alternative])
    df = math.nan if counts or null_value else float(n - 2)
    return found.outcome(asked, p=p, statistic=t, df=df, n=n, rule=_rule(n, method))


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Values | None,
    *,
    alternative: Alternative,
    null_value: float,
    method: Method = "by_size",
) -> float:
    """Give the smallest attainable p: that of both columns ascending, or one against the other."""

    def ask(x: Values, y: Values) -> Result:
        return spearman_correlation(x, y, alternative=alternative, method=method)

    return smallest(ask, sizes[0], pooled, null_value)


def _asked(null_value: float, alternative: Alternative, confidence: float, method: str) -> Asked:
    if method not in ("by_size", "exact", "student"):
        raise ValueError(f"method is by_size, exact or student; found {method!r}")
    return checked(null_value, Asked(null_value=null_value, alternative=alternative, confidence=confidence))


def _counts(n: int, method: Method) -> bool:
    return RULE.exact(n, "normal" if method == "student" else method)


def _rule(n: int, method: Method) -> str:
    if _counts(n, method):
        return RULE.remark(n, "exact" if method == "exact" else "by_size", continuity=False)
    rule = "as the spec asks"
    if method == "by_size":
        rule = f"the rule for more than {integer(RULE.by_size)} {RULE.noun}; here {integer(n)}"
    return f"Student's t as an approximation, ties included ({rule})."


def _squared_error(r: float, n: int) -> float:
    return (1 + r * r / 2) / (n - 3) if n > 3 else math.nan


def _least(n: int, ties: tuple[tuple[int, ...], tuple[int, ...]]) -> float:
    """Give the share of orders that differ from a given one by the places of tied values only."""
    alike = max(sum(math.lgamma(t + 1) for t in sizes) for sizes in ties)
    return math.exp(alike - math.lgamma(n + 1))
