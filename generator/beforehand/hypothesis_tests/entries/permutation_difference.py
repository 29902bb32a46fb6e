"""Permutation test of a difference in means: what the difference would be, had the groups been formed otherwise."""

import math

import numpy as np

from beforehand.hypothesis_tests import relabelling, relabelling_again
from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, Values, statistical_test
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few, varies
from beforehand.hypothesis_tests.relabelling_rules import Chance
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student import moments
from beforehand.hypothesis_tests.student_again import exact_moments
from beforehand.hypothesis_tests.ties import rounding, settled
from beforehand.terms import Alternative


@statistical_test(
    title="Permutation test of a difference in means",
    design="two_groups",
    outcome="number",
    scale="difference",
    estimates="difference in means",
    parameter="μ₁ − μ₂",
    statistic="standardised difference",
    p_is="exact, ties included, by listing up to 100,000 relabellings; by counting drawn relabellings beyond",
    null="the two groups have the same distribution once the first is shifted by the null value",
    assumptions=(
        "the units were allocated to the groups at random, or are independent of each other and exchangeable",
        "for the interval and for null values other than 0: the distributions differ by a shift only",
    ),
    second_route=(
        "the exact sum of what each relabelling moves, rounded once; all relabellings listed by what they exchange, "
        "drawn ones by another way to order the drawn words; ends of the interval by counting up; exact moments. "
        "Shares the drawn words, what counts as tied, what is refused, and the remarks"
    ),
    bound=1e-9,
    reference=(
        "Pitman (1937), Supplement to the Journal of the Royal Statistical Society 4:119-130; Phipson & Smyth (2010), "
        "Statistical Applications in Genetics and Molecular Biology 9:39"
    ),
)
def permutation_difference(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    draws: int = 9_999,
    seed: int,
) -> Result:
    """Test the difference between the means of two independent groups by relabelling their units.

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        The outcome of the independent units of each group, same unit, at least one value each.
    null_value : float
        The shift, first against second, under the null hypothesis, in the unit of the outcome.
    alternative : {"above", "below", "two_sided"}
        The side on which the difference is claimed to lie; two-sided p is twice the smaller one-sided p.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    draws : int
        How many relabellings are drawn, from 999 to 1,000,000, where not all can be listed.
    seed : int
        The number from 0 on that the draws follow from. It has no default, so that it is written into the spec before
        the data; it is needed even where all relabellings can be listed.

    Returns
    -------
    Outcome or NotComputed
        The difference in means, its interval, the standardised difference and p. No result when a group is empty, all
        values are equal, or draws or seed are out of range.

    Notes
    -----
    p is the share of all ways to form the groups from the values, once the null value is taken off the first, whose
    difference in means is as large (small) as the observed one. Of drawn ways b are as extreme, and
    p = (b + 1) / (draws + 1), so the level is kept exactly over all seeds. Hypotheses of one spec that have groups of
    the same sizes and the same seed share their draws; so do the null values of one hypothesis. Differences that are
    equal on paper count as equal: sums are compared as whole numbers, within the rounding of the values.

    Each relabelling has one critical shift, the mean of the values it moves out of the first group less the mean of
    those it moves in, and p at any shift counts critical shifts. The interval runs from one of them to another, and
    holds exactly the shifts that the same test, with the same draws, does not reject. With groups of very unequal size
    and a skewed outcome, an interval of low confidence need not hold the difference in means.

    Where groups differ in spread and in size, p may be too small or too large as a test of the means alone: it tests
    that the groups are exchangeable, which allocation at random makes true under no effect. Pairs, strata and clusters
    need relabellings within them, which this test doesn't make.

    References
    ----------
    Fisher (1935), The Design of Experiments, section 21 (the idea).
    Pitman (1937), Significance tests which may be applied to samples from any populations, Supplement to the Journal
    of the Royal Statistical Society 4:119-130.
    Tritchler (1984), On inverting permutation tests, Journal of the American Statistical Association 79:200-207.
    Phipson & Smyth (2010), Permutation p-values should never be zero, Statistical Applications in Genetics and
    Molecular Biology 9:39.
    """
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    chance = Chance(name="permutation_difference", draws=draws, seed=seed)
    if refusal := _refusal(first, second, asked, chance):
        return refusal
    changes = relabelling.of_groups(first, second, chance)
    tails, interval = changes.tails(null_value), changes.interval(asked)
    p = asked.p(above=tails.above, below=tails.below)
    return Outcome(
        estimate=float(moments(first).mean - moments(second).mean),
        lower=interval.lower,
        upper=interval.upper,
        statistic=relabelling.standardised_groups(first, second, null_value),
        p=p,
        n=(first.size, second.size),
        remarks=chance.remarks(_relabellings(first.size, second.size), p, interval, asked),
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
    chance = Chance(name="permutation_difference", draws=draws, seed=seed)
    if refusal := _refusal(first, second, asked, chance):
        return refusal
    found = relabelling_again.groups(first, second, asked, chance)
    p = asked.p(above=found.tails.above, below=found.tails.below)
    return Outcome(
        estimate=float(exact_moments(first).mean - exact_moments(second).mean),
        lower=found.interval.lower,
        upper=found.interval.upper,
        statistic=relabelling_again.standardised_groups(first, second, null_value),
        p=p,
        n=(first.size, second.size),
        remarks=chance.remarks(_relabellings(first.size, second.size), p, found.interval, asked),
    )


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Values | None,
    *,
    alternative: Alternative,
    draws: int = 9_999,
    seed: int = 0,
) -> float:
    """Give the smallest attainable p at the null value 0: the first group takes the largest, or smallest, values.

    Drawn relabellings give no p below 1 / (draws + 1), whatever the seed.
    """
    n1, n2 = sizes
    chance = Chance(name="permutation_difference", draws=draws, seed=seed)
    if not (n1 and n2) or chance.refuses():
        return 1.0
    values = np.arange(n1 + n2, dtype=np.float64) if pooled is None else np.sort(settled(pooled, rounding(pooled)))
    above, below = (
        chance.smallest(_relabellings(n1, n2), _as_extreme(ordered, n1)) for ordered in (values[::-1], values)
    )
    return {"above": above, "below": below, "two_sided": min(1.0, 2 * min(above, below))}[alternative]


def _as_extreme(outermost_first: Values, size: int) -> int:
    """Count the groups of a size that hold the outermost values, any of those tied at the border."""
    tied = outermost_first == outermost_first[size - 1]
    return math.comb(int(tied.sum()), int(tied[:size].sum()))


def _relabellings(n1: int, n2: int) -> int:
    return math.comb(n1 + n2, n1)


def _refusal(first: Values, second: Values, asked: Asked, chance: Chance) -> NotComputed | None:
    pooled = np.concatenate([first, second])
    moved = np.concatenate([first - asked.null_value, second])
    error = np.concatenate([rounding(first, asked.null_value), rounding(second)])
    together = count(pooled.size, "value")
    return first_reason(
        too_few(first.size, 1, noun="value", whose=" of the first group"),
        too_few(second.size, 1, noun="value", whose=" of the second group"),
        chance.refuses(),
        None if varies(pooled) else f"all {together} of both groups are equal",
        None if varies(moved, error) else f"all {together} are equal once the null value is taken off the first group",
        n=(first.size, second.size),
    )
