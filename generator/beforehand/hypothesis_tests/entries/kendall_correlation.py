"""Kendall's rank correlation: do two columns rise together, counted by pairs of rows."""

import math

from beforehand.hypothesis_tests import normal, normal_again
from beforehand.hypothesis_tests.contract import Result, Values, statistical_test
from beforehand.hypothesis_tests.rank_association import RankPairs, orders, variance_of_pairs
from beforehand.hypothesis_tests.rank_association_again import Listed, counted
from beforehand.hypothesis_tests.rank_correlation import (
    RULE,
    around,
    around_again,
    checked,
    refusal,
    smallest,
    without_interval,
    without_p,
)
from beforehand.hypothesis_tests.rank_methods import Method
from beforehand.hypothesis_tests.sides import Asked
from beforehand.spelling import integer
from beforehand.terms import Alternative

FEWEST = 5
FIELLER = 0.437


@statistical_test(
    title="Kendall's rank correlation",
    design="association",
    outcome="number",
    scale="correlation",
    estimates="rank correlation (Kendall)",
    parameter="τ",
    statistic="S",
    p_is=f"exact, ties included, up to {integer(RULE.by_size)} rows; by the normal approximation beyond",
    null="the two columns are independent (null value 0), or their rank correlation equals the null value",
    assumptions=(
        "the pairs are independent of each other",
        "for the interval and for null values other than 0: many rows, few ties, and a correlation that is not extreme",
    ),
    second_route=(
        "S by inserting values into a sorted list; the exact distribution with the columns changed and all counts in "
        "one long integer, or the variance from row sums of signs; the interval by powers instead of hyperbolic "
        "functions. Shares what counts as tied, what is refused, and the remarks"
    ),
    bound=1e-9,
    reference="Kendall (1938), Biometrika 30:81-93; Fieller, Hartley and Pearson (1957), Biometrika 44:470-481",
    interval_inverts_p=False,
    null_between=(-1.0, 1.0),
)
def kendall_correlation(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "by_size",
    continuity: bool = True,
) -> Result:
    """Test the rank correlation of two columns by pairs of rows.

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
    method : {"by_size", "exact", "normal"}
        ``by_size`` counts all orders exactly for n <= 10, whether or not values are tied, and is normal beyond.
        ``exact`` is refused for n > 12.
    continuity : bool
        Whether the normal approximation moves S by 1 towards 0.

    Returns
    -------
    Outcome or NotComputed
        τ_b (S by the geometric mean of the pairs not tied in either column) with an approximate interval, S
        (concordant less discordant pairs), and p. No interval for n < 5 or at 1 and -1. No result when a column does
        not vary, or when another null value than 0 is asked for where there is no interval.

    Raises
    ------
    ValueError
        When the null value does not lie between -1 and 1, or the method is not one of its words.

    Notes
    -----
    At the null value 0, p is the share of all n! orders of one column whose S is as large (small) as the observed one:
    exact given the ties. The interval is that of Fieller, Hartley and Pearson: artanh τ is about normal with variance
    0.437 / (n - 4), found for normal pairs and correlations up to about 0.8; p for other null values inverts it. The
    two are built differently; where they contradict each other, a remark says so.

    References
    ----------
    Kendall (1938), A new measure of rank correlation, Biometrika 30:81-93.
    Kendall (1947), The variance of τ when both rankings contain ties, Biometrika 34:297-298.
    Fieller, Hartley and Pearson (1957), Tests for rank correlation coefficients I, Biometrika 44:470-481 (interval).
    """
    asked = checked(null_value, Asked(null_value=null_value, alternative=alternative, confidence=confidence))
    counts = RULE.exact(first.size, method)
    if refused := refusal(first, second, method, instead="normal"):
        return refused
    ranks, n = RankPairs.of(first, second), first.size
    s, ties, pairs = ranks.pairs, ranks.ties, math.comb(n, 2)
    tau = s / math.sqrt(math.prod(pairs - sum(math.comb(t, 2) for t in sizes) for sizes in ties))
    why_not = without_interval(tau, n, FEWEST)
    if refused := without_p(asked, n, why_not):
        return refused
    found = around(tau, asked, normal.critical(asked.tail), squared_error=_squared_error(n), why_not=why_not)
    if null_value:
        p = normal.p_of(asked, found.z)
    elif counts:
        all_orders = orders("pairs", *ties)
        p = asked.p(above=all_orders.above(s), below=all_orders.below(s))
    else:
        error = math.sqrt(variance_of_pairs(*ties))
        p = asked.p(
            above=normal.upper_tail((s - continuity) / error), below=normal.upper_tail((-s - continuity) / error)
        )
    rule = RULE.remark(n, method, continuity=continuity)
    return found.outcome(asked, p=p, statistic=float(s), df=math.nan, n=n, rule=rule)


def second_route(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "by_size",
    continuity: bool = True,
) -> Result:
    """Compute the same with ``rank_association_again``, which names what it does not share."""
    asked = checked(null_value, Asked(null_value=null_value, alternative=alternative, confidence=confidence))
    counts = RULE.exact(len(first), method)
    if refused := refusal(first, second, method, instead="normal"):
        return refused
    listed, n = Listed.of(first, second), len(first)
    s = listed.wins - n * (n - 1) // 2
    why_not = without_interval(listed.tau, n, FEWEST)
    if refused := without_p(asked, n, why_not):
        return refused
    critical = float(normal_again.critical(asked.tail))
    found = around_again(listed.tau, asked, critical, squared_error=_squared_error(n), why_not=why_not)
    if null_value:
        above, below = normal_again.upper_tail(found.z), normal_again.upper_tail(-found.z)
    elif counts:
        whole = counted("wins", *listed.ties)
        above, below = whole.above(listed.wins), whole.below(listed.wins)
    else:
        error = float(listed.variance_of_pairs) ** 0.5
        above, below = (normal_again.upper_tail((side * s - continuity) / error) for side in (1, -1))
    p = {"above": above, "below": below, "two_sided": min(1.0, 2 * min(above, below))}[alternative]
    rule = RULE.remark(n, method, continuity=continuity)
    return found.outcome(asked, p=min(1.0, p), statistic=float(s), df=math.nan, n=n, rule=rule)


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Values | None,
    *,
    alternative: Alternative,
    null_value: float,
    method: Method = "by_size",
    continuity: bool = True,
) -> float:
    """Give the smallest attainable p: that of both columns ascending, or one against the other."""

    def ask(x: Values, y: Values) -> Result:
        return kendall_correlation(x, y, alternative=alternative, method=method, continuity=continuity)

    return smallest(ask, sizes[0], pooled, null_value)


def _squared_error(n: int) -> float:
    return FIELLER / (n - 4) if n > 4 else math.nan
