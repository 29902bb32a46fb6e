"""Sign test: do differences within pairs lie above a value as often as below it."""

import numpy as np

from beforehand.hypothesis_tests import sign_counts, sign_counts_again
from beforehand.hypothesis_tests.contract import NotComputed, Result, Values, statistical_test
from beforehand.hypothesis_tests.rank_signs import Differences
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.sign_counts import Signs, Zeros
from beforehand.terms import Alternative


@statistical_test(
    title="Sign test",
    design="pairs",
    outcome="number",
    scale="difference",
    estimates="median difference within pairs",
    parameter="η",
    statistic="differences above the null value",
    p_is="exact",
    null="a difference within pairs (first - second) lies above the null value as often as below it",
    assumptions=("the pairs are independent of each other",),
    second_route=(
        "differences compared as exact fractions, binomial distribution by sums outwards from the count in 40-digit "
        "decimals, ends of the interval by walking from a normal approximation. Shares what counts as equal, what is "
        "refused, and the remarks"
    ),
    bound=1e-9,
    reference="Dixon & Mood (1946), Journal of the American Statistical Association 41:557-566",
)
def sign(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    zeros: Zeros = "dropped",
) -> Result:
    """Judge the differences within pairs by their signs alone.

    Parameters
    ----------
    first, second : ndarray, shape (n,)
        The two outcomes of each of n independent pairs, aligned, same unit.
    null_value : float
        The median of the differences first - second under the null hypothesis, same unit.
    alternative : {"above", "below", "two_sided"}
        The side on which the median difference is claimed to lie; two-sided p is twice the smaller one-sided p.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    zeros : {"dropped", "against"}
        Differences that equal the null value are dropped, or count against the side that is asked.

    Returns
    -------
    Outcome or NotComputed
        The median difference with its interval, the number of differences above the null value, and p. No result when
        every difference equals the null value.

    Raises
    ------
    ValueError
        When ``zeros`` is not one of its words.

    Notes
    -----
    The number of differences above the null value is binomial with probability 1/2, whatever their distribution. The
    interval runs from the k-th smallest to the k-th largest difference. It has at least the confidence asked for, as
    an interval for the median, whatever the distribution; and it holds the null values that the same test keeps: p is
    monotone in the null value under either rule for zeros.

    With zeros dropped, p asks whether differences above and below the null value are equally frequent. Where many
    differences equal the null value the median may be that value, and p small all the same: the claim is then about
    direction, not about the median. Counted against, zeros make p a test of the median itself, and large where they
    are many. Dropping is usual in the literature and hence the default.

    References
    ----------
    Dixon & Mood (1946), The statistical sign test, Journal of the American Statistical Association 41:557-566.
    Thompson (1936), On confidence ranges for the median and other expectation distributions for populations of unknown
    distribution form, Annals of Mathematical Statistics 7:122-128 (interval).
    """
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    pairs = Differences.of(first, second)
    signs = Signs.of(pairs, null_value, zeros)
    if refusal := _refusal(signs):
        return refusal
    found = sign_counts.located(pairs, asked, zeros=zeros)
    return found.outcome(asked, n=(first.size,), rule=signs.remark("difference"))


def second_route(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    zeros: Zeros = "dropped",
) -> Result:
    """Compute the same with ``sign_counts_again``, which names what it does not share."""
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    signs = Signs.of(Differences.of(first, second), null_value, zeros)
    if refusal := _refusal(signs):
        return refusal
    found = sign_counts_again.located(first, second, asked, zeros=zeros)
    return found.outcome(asked, n=(first.size,), rule=signs.remark("difference"))


def smallest_p(
    sizes: tuple[int, ...], pooled: Values | None, *, alternative: Alternative, zeros: Zeros = "dropped"
) -> float:
    """Give the smallest attainable p: all differences that are not zero have the same sign.

    ``pooled`` are the absolute differences from the null value, or None when no data were read: then none is zero.
    """
    away = np.ones(sizes[0]) if pooled is None else pooled
    return sign_counts.smallest_p(away, alternative=alternative, zeros=zeros)


def _refusal(signs: Signs) -> NotComputed | None:
    n = signs.above + signs.below + signs.equal
    nothing = f"all {count(n, 'difference')} within pairs equal the null value"
    return first_reason(too_few(n, 1, noun="pair"), nothing if signs.equal == n else None, n=(n,))
