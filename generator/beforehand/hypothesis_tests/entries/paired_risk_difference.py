"""Score test of a paired risk difference: how much more, or less, frequent is an event on one side of pairs."""

from decimal import Decimal
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests import normal, normal_again
from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, statistical_test
from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.pairs_of_events import Discordant, paired_ends, paired_score
from beforehand.hypothesis_tests.pairs_of_events_again import ThreeCounts
from beforehand.hypothesis_tests.refusals import first_reason, too_few
from beforehand.hypothesis_tests.sides import Asked
from beforehand.terms import Alternative

Events = NDArray[np.bool_]

# Common practice, without a source: where fewer pairs differ, the exact form of McNemar's test is preferred.
FEWEST_DIFFERING = 10

FEW_DIFFER = (
    f"Fewer than {FEWEST_DIFFERING} pairs differ: the normal approximation is rough. At the null value 0 mcnemar does "
    "without it."
)


@statistical_test(
    title="Score test of a paired risk difference",
    design="pairs",
    outcome="event",
    scale="difference",
    estimates="difference in paired shares",
    parameter="π₁ − π₂",
    statistic="z",
    p_is="approximate, for many pairs",
    null="the difference in shares between the sides of pairs (first - second) equals the null value",
    assumptions=(
        "the pairs are independent of each other",
        "all pairs have the same probabilities of their outcomes, or are a random sample",
        "enough pairs differ for a normal approximation",
    ),
    second_route=(
        "Pearson's chi-square of the three counts fitted under the null value, in 120-digit decimals and fitted by "
        "false position; shares no quadratic, no formula of a variance, no root finder and no normal distribution "
        "function with the first"
    ),
    bound=1e-9,
    reference="Tango (1998), Statistics in Medicine 17:891-908",
    null_between=(-1.0, 1.0),
)
def paired_risk_difference(
    first: Events,
    second: Events,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Test the difference between the shares of an event on the two sides of pairs.

    Parameters
    ----------
    first, second : ndarray of bool, shape (n,)
        Whether each of n >= 1 pairs has the event on its first and on its second side, aligned.
    null_value : float
        The difference in shares, first - second, under the null hypothesis, between -1 and 1: for non-inferiority or
        equivalence a margin.
    alternative : {"above", "below", "two_sided"}
        The side on which the difference is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.

    Returns
    -------
    Outcome or NotComputed
        The observed difference with its interval, z and p; n is the number of pairs. No result without a pair. Where no
        pair differs, z at the null value 0 is 0.

    Raises
    ------
    ValueError
        When the null value does not lie between -1 and 1.

    Notes
    -----
    With b and c the pairs that have the event on the first and on the second side alone, and d the null value,
    z = (b - c - n d) / √(n (2 q + d (1 - d))), where q is the share of pairs with the event on the second side alone
    that fits best under d. At d = 0 that is (b - c) / √(b + c), the signed root of McNemar's chi-square. The interval
    holds exactly the differences that the test keeps. It has no continuity correction and is somewhat liberal when few
    pairs differ.

    References
    ----------
    Tango (1998), Equivalence test and confidence interval for the difference in proportions for the paired-sample
    design, Statistics in Medicine 17:891-908.
    """
    asked, counts = _asked(null_value, alternative, confidence), Discordant.of(first, second)
    if refusal := _refusal(counts):
        return refusal
    z = paired_score(counts, null_value)
    return _outcome(counts, z, normal.p_of(asked, z), paired_ends(counts, normal.critical(asked.tail)))


def second_route(
    first: Events,
    second: Events,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Compute the same from Pearson's chi-square; only refusals, the estimate and the remarks are shared."""
    asked, three = _asked(null_value, alternative, confidence), ThreeCounts.of(first, second)
    counts = Discordant(three.first, three.second, three.pairs)
    if refusal := _refusal(counts):
        return refusal
    z = three.z(Decimal(null_value))
    ends = three.interval(normal_again.critical(asked.tail))
    return _outcome(counts, float(z), normal_again.p_of(asked, z), ends)


def smallest_p(sizes: tuple[int, ...], pooled: Events | None, *, alternative: Alternative, null_value: float) -> float:
    """Give the smallest attainable p: all pairs that differ have the event on the same side; without data all do."""
    asked, n = _asked(null_value, alternative, 0.95), sizes[0]
    if not n:
        return 1.0
    differ = n if pooled is None else int(np.count_nonzero(pooled))
    extremes = (Discordant(differ, 0, n), Discordant(0, differ, n))
    return min(normal.p_of(asked, paired_score(counts, null_value)) for counts in extremes)


def _asked(null_value: float, alternative: Alternative, confidence: float) -> Asked:
    if not -1 < null_value < 1:
        raise ValueError(f"a null difference in shares lies between -1 and 1; found {null_value!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _refusal(counts: Discordant) -> NotComputed | None:
    return first_reason(too_few(counts.pairs, 1, noun="pair"), n=(counts.pairs,))


def _outcome(counts: Discordant, z: float, p: float, ends: Interval) -> Outcome:
    return Outcome(
        estimate=float(Fraction(counts.first - counts.second, counts.pairs)),
        lower=ends.lower,
        upper=ends.upper,
        statistic=z,
        p=p,
        n=(counts.pairs,),
        remarks=(FEW_DIFFER,) if counts.total < FEWEST_DIFFERING else (),
    )
