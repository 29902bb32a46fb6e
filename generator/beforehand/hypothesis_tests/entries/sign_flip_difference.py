"""Sign-flip test of a mean difference within pairs: what it would be, had first and second of a pair been exchanged."""

import numpy as np

from beforehand.hypothesis_tests import relabelling, relabelling_again
from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, Values, statistical_test
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few
from beforehand.hypothesis_tests.relabelling_rules import Chance
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student import moments_of_differences
from beforehand.hypothesis_tests.student_again import exact_moments_of_differences
from beforehand.hypothesis_tests.ties import rounding
from beforehand.terms import Alternative


@statistical_test(
    title="Sign-flip test of a mean difference within pairs",
    design="pairs",
    outcome="number",
    scale="difference",
    estimates="mean difference within pairs",
    parameter="μ₁ − μ₂",
    statistic="standardised difference",
    p_is="exact, ties included, by listing up to 100,000 relabellings; by counting drawn relabellings beyond",
    null="the differences within pairs (first - second) are symmetric about the null value",
    assumptions=(
        "which unit of a pair came first was allocated at random, or the pairs are independent of each other",
        "for the interval, for null values other than 0, and without allocation at random: the differences have a "
        "symmetric distribution",
    ),
    second_route=(
        "the exact sum of the values of the pairs that are reversed, rounded once; all signs listed by how many are "
        "reversed, drawn ones from the size of the drawn words; ends of the interval by counting up; exact moments. "
        "Shares the drawn words, what counts as tied, what is refused, and the remarks"
    ),
    bound=1e-9,
    reference=(
        "Fisher (1935), The Design of Experiments, section 21; Phipson & Smyth (2010), Statistical Applications in "
        "Genetics and Molecular Biology 9:39"
    ),
)
def sign_flip_difference(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    draws: int = 9_999,
    seed: int,
) -> Result:
    """Test the mean of the differences within pairs by reversing pairs.

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
    draws : int
        How many ways to give signs are drawn, from 999 to 1,000,000, where not all can be listed.
    seed : int
        The number from 0 on that the draws follow from. It has no default, so that it is written into the spec before
        the data; it is needed even where all signs can be listed.

    Returns
    -------
    Outcome or NotComputed
        The mean difference, its interval, the standardised mean difference and p. No result when there is no pair, all
        differences equal the null value, or draws or seed are out of range.

    Notes
    -----
    p is the share of all ways to give signs to the differences from the null value whose mean is as large (small) as
    the observed one. Of drawn ways b are as extreme, and p = (b + 1) / (draws + 1), so the level is kept exactly over
    all seeds. Hypotheses of one spec that have as many pairs and the same seed share their draws; so do the null
    values of one hypothesis. Means that are equal on paper count as equal: sums are compared as whole numbers, within
    the rounding of the values.

    Each set of pairs has one critical null value, the mean difference within them, and p at any null value counts
    critical values. The interval runs from one of them to another, and holds exactly the null values that the same
    test, with the same draws, does not reject. Without symmetry and without allocation at random p tests symmetry about
    the null value, not the mean.

    References
    ----------
    Fisher (1935), The Design of Experiments, section 21.
    Tritchler (1984), On inverting permutation tests, Journal of the American Statistical Association 79:200-207.
    Phipson & Smyth (2010), Permutation p-values should never be zero, Statistical Applications in Genetics and
    Molecular Biology 9:39.
    """
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    chance = Chance(name="sign_flip_difference", draws=draws, seed=seed)
    if refusal := _refusal(first, second, asked, chance):
        return refusal
    changes = relabelling.of_pairs(first, second, chance)
    tails, interval = changes.tails(null_value), changes.interval(asked)
    p = asked.p(above=tails.above, below=tails.below)
    return Outcome(
        estimate=float(moments_of_differences(first, second).mean),
        lower=interval.lower,
        upper=interval.upper,
        statistic=relabelling.standardised_pairs(first, second, null_value),
        p=p,
        n=(first.size,),
        remarks=chance.remarks(2**first.size, p, interval, asked),
    )


def second_route(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    draws: int = 9_999,
    seed: int,
) -> Result:
    """Compute the same with ``relabelling_again``, which names what it does not share."""
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    chance = Chance(name="sign_flip_difference", draws=draws, seed=seed)
    if refusal := _refusal(first, second, asked, chance):
        return refusal
    found = relabelling_again.pairs(first, second, asked, chance)
    p = asked.p(above=found.tails.above, below=found.tails.below)
    return Outcome(
        estimate=float(exact_moments_of_differences(first, second).mean),
        lower=found.interval.lower,
        upper=found.interval.upper,
        statistic=relabelling_again.standardised_pairs(first, second, null_value),
        p=p,
        n=(first.size,),
        remarks=chance.remarks(2**first.size, p, found.interval, asked),
    )


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Values | None,
    *,
    alternative: Alternative,
    draws: int = 9_999,
    seed: int = 0,
) -> float:
    """Give the smallest attainable p: all differences that are not zero have the same sign.

    ``pooled`` are the absolute differences from the null value, or None when no data were read: then none is zero.
    Drawn signs give no p below 1 / (draws + 1), whatever the seed.
    """
    n = sizes[0]
    chance = Chance(name="sign_flip_difference", draws=draws, seed=seed)
    if not n or chance.refuses():
        return 1.0
    zeros = 0 if pooled is None else n - int(np.count_nonzero(pooled))
    one_sided = chance.smallest(2**n, 2**zeros)
    return min(1.0, 2 * one_sided) if alternative == "two_sided" else one_sided


def _refusal(first: Values, second: Values, asked: Asked, chance: Chance) -> NotComputed | None:
    n, away = first.size, first - second - asked.null_value
    return first_reason(
        too_few(n, 1, noun="pair"),
        chance.refuses(),
        None
        if (np.abs(away) > rounding(first, second, asked.null_value)).any()
        else f"all {count(n, 'difference')} within pairs equal the null value",
        n=(n,),
    )
