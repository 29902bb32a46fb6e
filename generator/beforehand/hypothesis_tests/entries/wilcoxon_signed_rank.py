"""Wilcoxon's signed rank test: do the differences within pairs tend to lie above or below a value."""

import numpy as np

from beforehand.hypothesis_tests import rank_signs, ranks_again
from beforehand.hypothesis_tests.contract import NotComputed, Result, Values, statistical_test
from beforehand.hypothesis_tests.rank_methods import Method, SizeRule
from beforehand.hypothesis_tests.rank_signs import Differences, Zeros
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.ties import rounding
from beforehand.terms import Alternative

RULE = SizeRule("pairs", by_size=100, at_most=200)


@statistical_test(
    title="Wilcoxon signed rank test",
    design="pairs",
    outcome="number",
    scale="difference",
    estimates="median difference",
    parameter="θ",
    statistic="W⁺",
    p_is=f"exact, ties and zeros included, up to {RULE.by_size} pairs; by the normal approximation beyond",
    null="the differences within pairs (first - second) are symmetric about the null value",
    assumptions=(
        "the pairs are independent of each other",
        "the differences have a symmetric distribution",
    ),
    second_route=(
        "ranks by counting in sorted lists of whole numbers; exact distribution in whole numbers as one long "
        "integer, or the variance of ranks with random signs; upper end from the signs reversed; k-th averages by "
        "halving the range of values. Shares what counts as tied, what is refused, and the remarks"
    ),
    bound=1e-9,
    reference=(
        "Wilcoxon (1945), Biometrics Bulletin 1:80-83; "
        "Pratt (1959), Journal of the American Statistical Association 54:655-667"
    ),
)
def wilcoxon_signed_rank(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "by_size",
    continuity: bool = True,
    zeros: Zeros = "pratt",
) -> Result:
    """Judge the differences within pairs by their signed ranks.

    Parameters
    ----------
    first, second : ndarray, shape (n,)
        The two outcomes of each of n independent pairs, aligned, same unit.
    null_value : float
        The centre of the differences first - second under the null hypothesis, same unit.
    alternative : {"above", "below", "two_sided"}
        The side on which the centre is claimed to lie; two-sided p is twice the smaller one-sided p.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    method : {"by_size", "exact", "normal"}
        ``by_size`` counts exactly for n <= 100, whether or not there are ties or zeros, and is normal beyond.
        ``exact`` is refused for n > 200.
    continuity : bool
        Whether the normal approximation moves the rank sum by 1/2 towards its mean.
    zeros : {"pratt", "dropped"}
        Differences that equal the null value are ranked and then left out of the sum (Pratt), or left out before
        ranking (Wilcoxon).

    Returns
    -------
    Outcome or NotComputed
        The Hodges-Lehmann estimate (median of the averages of any two differences, each with itself too) with its
        interval, the sum of the ranks of positive differences, and p. No result when no difference is left.

    Raises
    ------
    ValueError
        When ``method`` or ``zeros`` is not one of its words.

    Notes
    -----
    The exact p is the share of all ways to give signs to the ranks, tied ones with their mean rank, whose sum is as
    large (small) as the observed one. The interval holds the null values that the same test keeps. With Pratt's zeros
    p is monotone in the null value: no signed rank rises when the null value does. Zeros that are dropped lower all
    other ranks at once, so that differences can become significantly positive by being made smaller, and a null value
    between two rejected ones can be kept; hence Pratt's rule is the default. Estimate and interval use all differences
    under either rule. Without symmetry p tests symmetry about the null value, not the median.

    References
    ----------
    Wilcoxon (1945), Individual comparisons by ranking methods, Biometrics Bulletin 1:80-83.
    Pratt (1959), Remarks on zeros and ties in the Wilcoxon signed rank procedures, Journal of the American Statistical
    Association 54:655-667.
    Hodges & Lehmann (1963), Annals of Mathematical Statistics 34:598-611 (estimate).
    """
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    pairs, n = Differences.of(first, second), first.size
    if refusal := _refusal(pairs, asked, method, zeros):
        return refusal
    if RULE.exact(n, method):
        found = rank_signs.exact(pairs, asked, zeros=zeros)
    else:
        found = rank_signs.normal(pairs, asked, zeros=zeros, continuity=continuity)
    return found.outcome(asked, n=(n,), rule=RULE.remark(n, method, continuity=continuity))


def second_route(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "by_size",
    continuity: bool = True,
    zeros: Zeros = "pratt",
) -> Result:
    """Compute the same with ``ranks_again``, which names what it does not share."""
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    n = first.size
    if refusal := _refusal(Differences.of(first, second), asked, method, zeros):
        return refusal
    if RULE.exact(n, method):
        found = ranks_again.signed_exact(first, second, asked, zeros=zeros)
    else:
        found = ranks_again.signed_normal(first, second, asked, zeros=zeros, continuity=continuity)
    return found.outcome(asked, n=(n,), rule=RULE.remark(n, method, continuity=continuity))


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Values | None,
    *,
    alternative: Alternative,
    method: Method = "by_size",
    continuity: bool = True,
    zeros: Zeros = "pratt",
) -> float:
    """Give the smallest attainable p: all differences that are not zero have the same sign.

    ``pooled`` are the absolute differences from the null value, or None when no data were read: then none is zero or
    tied; under the normal approximation ties and zeros can make p smaller than that.
    """
    n = sizes[0]
    if n == 0:
        return 1.0
    away = np.arange(1.0, n + 1) if pooled is None else np.abs(pooled)
    signed = rank_signs.signed_ranks(Differences(away, rounding(away)), 0.0, zeros)
    if not signed.ranks.size:
        return 1.0
    one_sided = 0.5**signed.ranks.size
    if not RULE.exact(n, method):
        null = rank_signs.at_null(signed, n, zeros, continuity=continuity)
        one_sided = null.above(int(signed.ranks.sum()) / 2)
    return min(1.0, 2 * one_sided) if alternative == "two_sided" else one_sided


def _refusal(pairs: Differences, asked: Asked, method: Method, zeros: Zeros) -> NotComputed | None:
    if zeros not in ("pratt", "dropped"):
        raise ValueError(f"zeros is pratt or dropped; found {zeros!r}")
    n = pairs.values.size
    signed = rank_signs.signed_ranks(pairs, asked.null_value, zeros) if n else None
    nothing = f"all {count(n, 'difference')} within pairs equal the null value"
    return first_reason(
        too_few(n, 1, noun="pair"),
        RULE.refuses(n, method),
        nothing if signed is None or not signed.ranks.size else None,
        n=(n,),
    )
