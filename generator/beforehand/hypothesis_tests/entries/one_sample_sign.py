"""Sign test of one sample: do its values lie above a value fixed beforehand as often as below it."""

import numpy as np

from beforehand.hypothesis_tests import sign_counts, sign_counts_again
from beforehand.hypothesis_tests.contract import NotComputed, Result, Values, statistical_test
from beforehand.hypothesis_tests.rank_signs import Differences
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few, varies
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.sign_counts import Signs, Zeros
from beforehand.terms import Alternative


@statistical_test(
    title="One-sample sign test",
    design="one_sample",
    outcome="number",
    scale="location",
    estimates="median",
    parameter="η",
    statistic="values above the null value",
    p_is="exact",
    null="a value lies above the null value as often as below it",
    assumptions=("the values are independent of each other",),
    second_route=(
        "values compared as exact fractions, binomial distribution by sums outwards from the count in 40-digit "
        "decimals, ends of the interval by walking from a normal approximation. Shares what counts as equal, what is "
        "refused, and the remarks"
    ),
    bound=1e-9,
    reference="Dixon & Mood (1946), Journal of the American Statistical Association 41:557-566",
)
def one_sample_sign(
    values: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    zeros: Zeros = "dropped",
) -> Result:
    """Judge the median of one sample by counting values on both sides of a value.

    Parameters
    ----------
    values : ndarray, shape (n,)
        The outcome of n >= 2 independent units, in the unit of the outcome.
    null_value : float
        The median under the null hypothesis, same unit.
    alternative : {"above", "below", "two_sided"}
        The side on which the median is claimed to lie; two-sided p is twice the smaller one-sided p.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    zeros : {"dropped", "against"}
        Values that equal the null value are dropped, or count against the side that is asked.

    Returns
    -------
    Outcome or NotComputed
        The sample median with its interval, the number of values above the null value, and p. No result for fewer than
        two values, or values that differ by no more than rounding.

    Raises
    ------
    ValueError
        When ``zeros`` is not one of its words.

    Notes
    -----
    The number of values above the null value is binomial with probability 1/2, whatever their distribution. The
    interval runs from the k-th smallest to the k-th largest value. It has at least the confidence asked for, as
    an interval for the median, whatever the distribution; and it holds the null values that the same test keeps: p is
    monotone in the null value under either rule for zeros.

    With zeros dropped, p asks whether values above and below the null value are equally frequent. Where many
    values equal the null value the median may be that value, and p small all the same: the claim is then about
    direction, not about the median. Counted against, zeros make p a test of the median itself, and large where they
    are many. Dropping is usual in the literature and hence the default.

    References
    ----------
    Dixon & Mood (1946), The statistical sign test, Journal of the American Statistical Association 41:557-566.
    Thompson (1936), On confidence ranges for the median and other expectation distributions for populations of unknown
    distribution form, Annals of Mathematical Statistics 7:122-128 (interval).
    """
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    sample = _sample(values)
    signs = Signs.of(sample, null_value, zeros)
    if refusal := _refusal(values):
        return refusal
    found = sign_counts.located(sample, asked, zeros=zeros)
    return found.outcome(asked, n=(values.size,), rule=signs.remark("value"))


def second_route(
    values: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    zeros: Zeros = "dropped",
) -> Result:
    """Compute the same with ``sign_counts_again``, which names what it does not share."""
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    signs = Signs.of(_sample(values), null_value, zeros)
    if refusal := _refusal(values):
        return refusal
    found = sign_counts_again.located(values, np.zeros_like(values), asked, zeros=zeros)
    return found.outcome(asked, n=(values.size,), rule=signs.remark("value"))


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Values | None,
    *,
    alternative: Alternative,
    null_value: float = 0.0,
    zeros: Zeros = "dropped",
) -> float:
    """Give the smallest attainable p: all values that don't equal the null value lie on one side of it."""
    away = np.ones(sizes[0]) if pooled is None else pooled - null_value
    return sign_counts.smallest_p(away, alternative=alternative, zeros=zeros)


def _sample(values: Values) -> Differences:
    return Differences.of(values, np.zeros_like(values))


def _refusal(values: Values) -> NotComputed | None:
    return first_reason(
        too_few(values.size, 2, noun="value"),
        None if varies(values) else f"all {count(values.size, 'value')} are equal",
        n=(values.size,),
    )
