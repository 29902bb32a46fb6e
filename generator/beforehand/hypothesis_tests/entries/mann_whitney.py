"""Mann-Whitney test: do the values of one group tend to lie above those of another."""

import math

import numpy as np

from beforehand.hypothesis_tests import rank_two_groups, ranks_again
from beforehand.hypothesis_tests.contract import NotComputed, Result, Values, statistical_test
from beforehand.hypothesis_tests.rank_methods import Method, SizeRule
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few, varies
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.ties import Ranks, doubled_midranks, rounding, settled
from beforehand.spelling import integer
from beforehand.terms import Alternative

# Counting 50 + 50 values takes 0.03 s, 100 + 100 values 1 s, and an interval with ties counts up to 25 times.
RULE = SizeRule("pairs of values (first group × second group)", by_size=2_500, at_most=10_000)


@statistical_test(
    title="Mann-Whitney test",
    design="two_groups",
    outcome="number",
    scale="difference",
    estimates="shift in location",
    parameter="Δ",
    statistic="U",
    p_is=f"exact, ties included, up to {integer(RULE.by_size)} {RULE.noun}; by the normal approximation beyond",
    null="the two groups have the same distribution once the first is shifted by the null value",
    assumptions=(
        "the units are independent of each other",
        "for the interval and for null values other than 0: the distributions differ by a shift only",
    ),
    second_route=(
        "ranks by shifting the values and counting; exact distribution in whole numbers as one long integer, or the "
        "variance of ranks drawn without replacement; upper end from the groups swapped; k-th differences by halving "
        "the range of values. Shares what counts as tied, what is refused, and the remarks"
    ),
    bound=1e-9,
    reference="Mann & Whitney (1947), Annals of Mathematical Statistics 18:50-60",
)
def mann_whitney(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "by_size",
    continuity: bool = True,
) -> Result:
    """Compare two independent groups by the ranks of their values (also known as Wilcoxon's rank sum test).

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        The outcome of the independent units of each group, same unit, at least one value each.
    null_value : float
        The shift, first against second, under the null hypothesis, in the unit of the outcome.
    alternative : {"above", "below", "two_sided"}
        The side on which the shift is claimed to lie; two-sided p is twice the smaller one-sided p.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    method : {"by_size", "exact", "normal"}
        ``by_size`` counts exactly for n1 × n2 <= 2,500, whether or not values are tied, and is normal beyond.
        ``exact`` is refused for n1 × n2 > 10,000.
    continuity : bool
        Whether the normal approximation moves U by 1/2 towards its mean.

    Returns
    -------
    Outcome or NotComputed
        The Hodges-Lehmann shift (median of all differences first - second) with its interval, U (pairs in which the
        first is larger, after the null value is taken off, ties counting 1/2), and p. No result when a group is empty
        or all values are equal.

    Raises
    ------
    ValueError
        When the method is not one of its words.

    Notes
    -----
    The exact p is the share of all ways to form the groups from the values, tied ones with their mean rank, whose rank
    sum is as large (small) as the observed one: exact given the ties, and conservative as every exact discrete test.
    The interval holds the shifts that the same test keeps; p is monotone in the shift even with ties, since a larger
    shift lowers no rank of the second group and raises none of the first. The normal variance is
    n1 n2 / 12 (N + 1 - Σ(t³ - t) / (N (N - 1))). With one very small group the normal p can be far off below 0.001.
    Without a pure shift, p tests equality of the distributions, and rejects when P(first > second) + P(tie)/2 is not
    1/2; unequal spread alone can raise its error rate.

    References
    ----------
    Mann & Whitney (1947), Annals of Mathematical Statistics 18:50-60.
    Hodges & Lehmann (1963), Annals of Mathematical Statistics 34:598-611 (estimate).
    Bauer (1972), Journal of the American Statistical Association 67:687-690 (interval).
    """
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    if refusal := _refusal(first, second, asked, method):
        return refusal
    pairs = first.size * second.size
    if RULE.exact(pairs, method):
        found = rank_two_groups.exact(first, second, asked)
    else:
        found = rank_two_groups.normal(first, second, asked, continuity=continuity)
    return found.outcome(asked, n=(first.size, second.size), rule=RULE.remark(pairs, method, continuity=continuity))


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
    """Compute the same with ``ranks_again``, which names what it does not share."""
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    if refusal := _refusal(first, second, asked, method):
        return refusal
    pairs = first.size * second.size
    if RULE.exact(pairs, method):
        found = ranks_again.two_groups_exact(first, second, asked)
    else:
        found = ranks_again.two_groups_normal(first, second, asked, continuity=continuity)
    return found.outcome(asked, n=(first.size, second.size), rule=RULE.remark(pairs, method, continuity=continuity))


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Values | None,
    *,
    alternative: Alternative,
    method: Method = "by_size",
    continuity: bool = True,
) -> float:
    """Give the smallest attainable p at the null value 0: the first group takes the largest, or smallest, values.

    Without data no values are tied; under the normal approximation ties can make p smaller than that.
    """
    n1, n2 = sizes
    if not (n1 and n2):
        return 1.0
    ranks = np.sort(
        doubled_midranks(np.arange(n1 + n2, dtype=np.float64) if pooled is None else settled(pooled, rounding(pooled)))
    )
    if RULE.exact(n1 * n2, method):
        above, below = _share_as_extreme(ranks[::-1], n1), _share_as_extreme(ranks, n1)
    elif (ranks == ranks[0]).all():
        return 1.0
    else:
        null = rank_two_groups.approximation(n1, n2, rank_two_groups.tied(ranks), continuity=continuity)
        above = null.above(rank_two_groups.pairs_won(ranks[::-1], n1))
        below = null.below(rank_two_groups.pairs_won(ranks, n1))
    return {"above": above, "below": below, "two_sided": min(1.0, 2 * min(above, below))}[alternative]


def _share_as_extreme(outermost_first: Ranks, size: int) -> float:
    """Give the share of all groups of a size that hold the outermost values, any of those tied at the border."""
    tied = outermost_first == outermost_first[size - 1]
    ways = math.comb(int(tied.sum()), int(tied[:size].sum()))
    return ways / math.comb(outermost_first.size, size)


def _refusal(first: Values, second: Values, asked: Asked, method: Method) -> NotComputed | None:
    pooled = np.concatenate([first, second])
    moved = np.concatenate([first - asked.null_value, second])
    error = np.concatenate([rounding(first, asked.null_value), rounding(second)])
    together = count(pooled.size, "value")
    return first_reason(
        too_few(first.size, 1, noun="value", whose=" of the first group"),
        too_few(second.size, 1, noun="value", whose=" of the second group"),
        RULE.refuses(first.size * second.size, method),
        None if varies(pooled) else f"all {together} of both groups are equal",
        None if varies(moved, error) else f"all {together} are equal once the null value is taken off the first group",
        n=(first.size, second.size),
    )
