"""McNemar's test: is an event more, or less, frequent on one side of pairs than on the other."""

import math
from decimal import Decimal

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests import discordant_pairs, discordant_pairs_again
from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, statistical_test
from beforehand.hypothesis_tests.discordant_pairs import Method
from beforehand.hypothesis_tests.location import Interval, Tails
from beforehand.hypothesis_tests.pairs_of_events import Discordant
from beforehand.hypothesis_tests.pairs_of_events_again import ThreeCounts
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few
from beforehand.hypothesis_tests.sides import Asked
from beforehand.spelling import short
from beforehand.terms import Alternative

Events = NDArray[np.bool_]

NONE_FIRST = "No pair has the event on the first side alone: estimate and lower end of the odds ratio are 0."
NONE_SECOND = "No pair has the event on the second side alone: estimate and upper end of the odds ratio are infinite."
RULES: dict[Method, str] = {
    "mid_p": (
        "mid-p: half the probability of the observed count is counted. It is not exact: its true level can lie a "
        "little above the nominal one."
    ),
    "normal": "p and interval by a normal approximation, without a continuity correction.",
}


@statistical_test(
    title="McNemar's test",
    design="pairs",
    outcome="event",
    scale="ratio",
    estimates="odds ratio within pairs",
    parameter="odds₁ / odds₂",
    statistic="pairs with the event on the first side alone",
    p_is="exact, given the number of pairs that differ (options: mid-p, normal approximation)",
    null="the odds ratio within pairs equals the null value (1: the event is equally frequent on both sides)",
    assumptions=(
        "the pairs are independent of each other",
        "the odds ratio is the same in every pair, or the null value is 1",
    ),
    second_route=(
        "probabilities of all counts relative to the observed one in 40-digit decimal arithmetic, ends of the interval "
        "by false position, the normal approximation through the root of the odds and the C library's erfc; shares no "
        "beta function, no inverse function and no root finder with the first"
    ),
    bound=1e-9,
    reference="McNemar (1947), Psychometrika 12:153-157; Fagerland, Lydersen and Laake (2013), BMC Medical Research "
    "Methodology 13:91 (mid-p)",
)
def mcnemar(
    first: Events,
    second: Events,
    *,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "exact",
) -> Result:
    """Test whether an event is equally frequent on both sides of pairs, from the pairs whose sides differ.

    Parameters
    ----------
    first, second : ndarray of bool, shape (n,)
        Whether each of n pairs has the event on its first and on its second side, aligned.
    null_value : float
        The odds ratio within pairs under the null hypothesis, above 0.
    alternative : {"above", "below", "two_sided"}
        The side on which the odds ratio, odds of the first side / odds of the second, is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    method : {"exact", "mid_p", "normal"}
        The binomial distribution of the pairs that differ; the same with half the probability of the observed count,
        which is nearer to the nominal level and can exceed it a little; or a normal approximation.

    Returns
    -------
    Outcome or NotComputed
        The odds ratio within pairs (pairs with the event on the first side alone / on the second side alone) with its
        interval, the first of these counts, and p; n is the number of pairs. The difference in shares is a remark. No
        result when no pair differs.

    Raises
    ------
    ValueError
        When the null value is not above 0, or ``method`` is not one of its words.

    Notes
    -----
    Pairs that agree say nothing of the odds ratio. Given the number of those that differ, the pairs with the event on
    the first side alone are binomial with share ψ / (1 + ψ), ψ the odds ratio within pairs. By each method the interval
    holds exactly the null values that twice the smaller tail does not reject: that is why the estimate is an odds
    ratio. At the null value 1 the hypothesis is the same as that of equal shares, whose difference, with a margin or an
    interval, is the matter of paired_risk_difference. The exact method is the default because its level is kept
    whatever the number of pairs; the normal one, without a continuity correction, is McNemar's chi-square as its signed
    root.

    References
    ----------
    McNemar (1947), Note on the sampling error of the difference between correlated proportions or percentages,
    Psychometrika 12:153-157.
    Fagerland, Lydersen and Laake (2013), The McNemar test for binary matched-pairs data: mid-p and asymptotic are
    better than exact conditional, BMC Medical Research Methodology 13:91.
    """
    asked, pairs = _asked(null_value, alternative, confidence, method), Discordant.of(first, second)
    if refusal := _refusal(pairs):
        return refusal
    return _outcome(
        pairs,
        asked,
        discordant_pairs.tails(pairs, null_value, method),
        discordant_pairs.ends(pairs, asked.tail, method),
        method,
    )


def second_route(
    first: Events,
    second: Events,
    *,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "exact",
) -> Result:
    """Compute the same in decimals; only refusals, the estimate and the remarks are shared."""
    asked = _asked(null_value, alternative, confidence, method)
    counts = ThreeCounts.of(first, second)
    pairs = Discordant(counts.first, counts.second, counts.pairs)
    if refusal := _refusal(pairs):
        return refusal
    return _outcome(
        pairs,
        asked,
        discordant_pairs_again.tails(counts.first, counts.second, Decimal(null_value), method),
        discordant_pairs_again.ends(counts.first, counts.second, asked.tail, method),
        method,
    )


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Events | None,
    *,
    alternative: Alternative,
    null_value: float,
    method: Method = "exact",
) -> float:
    """Give the smallest attainable p: all pairs that differ have the event on the same side; without data all do."""
    differ = sizes[0] if pooled is None else int(np.count_nonzero(pooled))
    if not differ:
        return 1.0
    asked = _asked(null_value, alternative, 0.95, method)
    extremes = (Discordant(differ, 0, sizes[0]), Discordant(0, differ, sizes[0]))
    found = [discordant_pairs.tails(pairs, null_value, method) for pairs in extremes]
    return min(asked.p(above=tails.above, below=tails.below) for tails in found)


def _asked(null_value: float, alternative: Alternative, confidence: float, method: str) -> Asked:
    if null_value <= 0:
        raise ValueError(f"an odds ratio under the null hypothesis is above 0; found {null_value!r}")
    if method not in ("exact", "mid_p", "normal"):
        raise ValueError(f"method is exact, mid_p or normal; found {method!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _refusal(pairs: Discordant) -> NotComputed | None:
    agree = None if pairs.total else f"the two sides of all {count(pairs.pairs, 'pair')} agree"
    return first_reason(too_few(pairs.pairs, 1, noun="pair"), agree, n=(pairs.pairs,))


def _outcome(pairs: Discordant, asked: Asked, tails: Tails, ends: Interval, method: Method) -> Outcome:
    rule = RULES.get(method)
    return Outcome(
        estimate=pairs.first / pairs.second if pairs.second else math.inf,
        lower=ends.lower,
        upper=ends.upper,
        statistic=float(pairs.first),
        p=asked.p(above=tails.above, below=tails.below),
        n=(pairs.pairs,),
        remarks=(
            *([rule] if rule else []),
            *([] if pairs.first else [NONE_FIRST]),
            *([] if pairs.second else [NONE_SECOND]),
            _in_shares(pairs),
        ),
    )


def _in_shares(pairs: Discordant) -> str:
    return (
        f"{pairs.total} of {count(pairs.pairs, 'pair')} differ: {pairs.first} with the event on the first side alone, "
        f"{pairs.second} with it on the second alone. That is a difference in shares of "
        f"{short((pairs.first - pairs.second) / pairs.pairs)}, whose interval paired_risk_difference gives."
    )
