"""Wilcoxon's signed rank test of one sample: do its values tend to lie above or below a value fixed beforehand."""

from dataclasses import replace

import numpy as np

from beforehand.hypothesis_tests import rank_signs, ranks_again
from beforehand.hypothesis_tests.contract import NotComputed, Result, Values, statistical_test
from beforehand.hypothesis_tests.entries import wilcoxon_signed_rank
from beforehand.hypothesis_tests.rank_methods import Method
from beforehand.hypothesis_tests.rank_signs import Differences, Zeros
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few, varies
from beforehand.hypothesis_tests.sides import Asked
from beforehand.terms import Alternative

RULE = replace(wilcoxon_signed_rank.RULE, noun="values")


@statistical_test(
    title="One-sample Wilcoxon signed rank test",
    design="one_sample",
    outcome="number",
    scale="location",
    estimates="median of a symmetric distribution",
    parameter="θ",
    statistic="W⁺",
    p_is="exact, ties and zeros included, up to 100 values; by the normal approximation beyond",
    null="the values are symmetric about the null value",
    assumptions=(
        "the values are independent of each other",
        "the values have a symmetric distribution",
    ),
    second_route=(
        "ranks by counting in sorted lists of whole numbers; exact distribution in whole numbers as one long integer, "
        "or the variance of ranks with random signs; upper end from the signs reversed; k-th averages by halving the "
        "range of values. Shares what counts as tied, what is refused, and the remarks"
    ),
    bound=1e-9,
    reference=(
        "Wilcoxon (1945), Biometrics Bulletin 1:80-83; "
        "Pratt (1959), Journal of the American Statistical Association 54:655-667"
    ),
)
def one_sample_wilcoxon(
    values: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "by_size",
    continuity: bool = True,
    zeros: Zeros = "pratt",
) -> Result:
    """Judge one sample by the signed ranks of its distances from a value.

    Parameters
    ----------
    values : ndarray, shape (n,)
        The outcome of n >= 2 independent units, in the unit of the outcome.
    null_value : float
        The centre of the distribution under the null hypothesis, same unit.
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
        Values that equal the null value are ranked and then left out of the sum (Pratt), or left out before ranking
        (Wilcoxon).

    Returns
    -------
    Outcome or NotComputed
        The Hodges-Lehmann estimate (median of the averages of any two values, each with itself too) with its interval,
        the sum of the ranks of the values above the null value, and p. No result for fewer than two values, or values
        that differ by no more than rounding.

    Raises
    ------
    ValueError
        When ``method`` or ``zeros`` is not one of its words.

    Notes
    -----
    The test of ``wilcoxon_signed_rank`` with the values in place of the differences within pairs; what is said there
    of ties, zeros and the interval holds here. The assumption of symmetry is a stronger one here: differences within
    pairs are symmetric when a treatment has no effect, values of one sample need not be. Where the distribution is
    skewed, p is no test of the median, and ``one_sample_sign`` is.

    References
    ----------
    Wilcoxon (1945), Individual comparisons by ranking methods, Biometrics Bulletin 1:80-83.
    Pratt (1959), Remarks on zeros and ties in the Wilcoxon signed rank procedures, Journal of the American Statistical
    Association 54:655-667.
    Hodges & Lehmann (1963), Annals of Mathematical Statistics 34:598-611 (estimate).
    """
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    sample, n = Differences.of(values, np.zeros_like(values)), values.size
    if refusal := _refusal(sample, asked, method, zeros):
        return refusal
    if RULE.exact(n, method):
        found = rank_signs.exact(sample, asked, zeros=zeros)
    else:
        found = rank_signs.normal(sample, asked, zeros=zeros, continuity=continuity)
    return found.outcome(asked, n=(n,), rule=RULE.remark(n, method, continuity=continuity))


def second_route(
    values: Values,
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
    nothing, n = np.zeros_like(values), values.size
    if refusal := _refusal(Differences.of(values, nothing), asked, method, zeros):
        return refusal
    if RULE.exact(n, method):
        found = ranks_again.signed_exact(values, nothing, asked, zeros=zeros)
    else:
        found = ranks_again.signed_normal(values, nothing, asked, zeros=zeros, continuity=continuity)
    return found.outcome(asked, n=(n,), rule=RULE.remark(n, method, continuity=continuity))


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Values | None,
    *,
    alternative: Alternative,
    null_value: float = 0.0,
    method: Method = "by_size",
    continuity: bool = True,
    zeros: Zeros = "pratt",
) -> float:
    """Give the smallest attainable p: all values that don't equal the null value lie on one side of it."""
    return wilcoxon_signed_rank.smallest_p(
        sizes,
        None if pooled is None else np.abs(pooled - null_value),
        alternative=alternative,
        method=method,
        continuity=continuity,
        zeros=zeros,
    )


def _refusal(sample: Differences, asked: Asked, method: Method, zeros: Zeros) -> NotComputed | None:
    if zeros not in ("pratt", "dropped"):
        raise ValueError(f"zeros is pratt or dropped; found {zeros!r}")
    n = sample.values.size
    constant = n > 1 and not varies(sample.values)
    signed = not n or rank_signs.signed_ranks(sample, asked.null_value, zeros).ranks.size
    return first_reason(
        too_few(n, 2, noun="value"),
        RULE.refuses(n, method),
        f"all {count(n, 'value')} are equal" if constant else None,
        None if signed else f"all {count(n, 'value')} equal the null value but for rounding",
        n=(n,),
    )
