"""Brunner-Munzel test: how probable is it that a value of one group lies above one of another."""

import math
from bisect import bisect_left, bisect_right
from dataclasses import dataclass, replace
from fractions import Fraction

import numpy as np
from scipy import special

from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, Values, statistical_test
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few, varies
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student import moments, t_outcome
from beforehand.hypothesis_tests.student_again import t_outcome_again
from beforehand.hypothesis_tests.ties import Ranks, doubled_midranks, rounding, settled
from beforehand.terms import Alternative

APART = (
    "The groups don't overlap, so that no variance can be estimated; p is a bound that holds for all distributions: of "
    "{n} independent pairs of values all have the order that is observed with at most the null value (first group "
    "above) or 1 minus the null value (below) to the power of {n}."
)


@statistical_test(
    title="Brunner-Munzel test",
    design="two_groups",
    outcome="number",
    scale="probability",
    estimates="probability of the larger value",
    parameter="π₁₂",
    statistic="t",
    p_is="approximate; an exact bound where the groups don't overlap",
    null="a value of the first group lies above one of the second, ties counted half, with the probability of the null "
    "value",
    assumptions=("the units are independent of each other",),
    second_route=(
        "placements by counting in sorted lists, their means, variances and degrees of freedom in exact fractions, "
        "root with 50 digits, tail and quantile of Student's t by double exponential quadrature of its density. Shares "
        "what counts as tied, what is refused, and the bound for groups that don't overlap"
    ),
    bound=1e-9,
    reference="Brunner & Munzel (2000), Biometrical Journal 42:17-25",
    null_default=0.5,
    null_between=(0.0, 1.0),
)
def brunner_munzel(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.5,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Test whether values of one group tend to lie above those of another, whatever their distributions.

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        The outcome of the independent units of each group, same unit, at least two values each. Only the order of the
        values counts, so any ordered outcome will do.
    null_value : float
        The probability under the null hypothesis that a value of the first group lies above one of the second, ties
        counted half; between 0 and 1.
    alternative : {"above", "below", "two_sided"}
        The side on which that probability is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.

    Returns
    -------
    Outcome or NotComputed
        The share of pairs of values in which the first is larger, ties counted half, with its interval (kept within 0
        and 1), t, degrees of freedom and p. No result for fewer than two values of a group, or when all are equal.

    Raises
    ------
    ValueError
        When the null value does not lie between 0 and 1.

    Notes
    -----
    The placement of a value is the share of the other group that lies below it, ties counted half. The estimate is the
    mean placement of the first group; with s² the variance of the placements of each group,
    t = (estimate - null value) / √(s1² / n1 + s2² / n2), with the degrees of freedom of Welch's t-test: the same
    formulas, on placements. Unlike the Mann-Whitney test it keeps its level where the distributions differ in spread
    or shape but not in this probability. The interval holds exactly the null values that a two-sided test at
    1 - confidence does not reject. With fewer than about ten values in a group p is often too small.

    Groups that don't overlap have no variance to divide by. Then at least min(n1, n2) independent pairs of values all
    have the same order, which has probability at most π^min(n1, n2) when the probability is π; it is attained when one
    group is constant. That bound is p, and the interval holds the π at which it exceeds its level. It can be larger
    than p of groups that overlap a little.

    References
    ----------
    Brunner & Munzel (2000), The nonparametric Behrens-Fisher problem: asymptotic theory and a small-sample
    approximation, Biometrical Journal 42:17-25.
    """
    asked = _asked(null_value, alternative, confidence)
    if refusal := _refusal(first, second):
        return refusal
    placed = Placements.of(first, second)
    if outcome := _apart(placed.share, asked, (first.size, second.size)):
        return outcome
    one, two = moments(placed.first / (2.0 * second.size)), moments(placed.second / (2.0 * first.size))
    error = math.hypot(one.standard_error, two.standard_error)
    share = (one.standard_error / error) ** 2, (two.standard_error / error) ** 2
    return _within(
        t_outcome(
            asked,
            estimate=placed.share,
            standard_error=error,
            df=1 / (share[0] ** 2 / (one.n - 1) + share[1] ** 2 / (two.n - 1)),
            n=(first.size, second.size),
        )
    )


def second_route(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.5,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Compute the same by counting in sorted lists, in exact fractions, and by quadrature."""
    asked = _asked(null_value, alternative, confidence)
    if refusal := _refusal(first, second):
        return refusal
    one, two = (sorted(group.tolist()) for group in _settled(first, second))
    above, below = _variance(one, two), _variance(two, one)
    estimate = sum((_placement(value, two) for value in one), Fraction(0)) / len(one)
    if outcome := _apart(estimate, asked, (len(one), len(two))):
        return outcome
    total = above + below
    return _within(
        t_outcome_again(
            asked,
            estimate=estimate,
            squared_error=total,
            df=total**2 / (above**2 / (len(one) - 1) + below**2 / (len(two) - 1)),
            n=(len(one), len(two)),
        )
    )


def smallest_p(
    sizes: tuple[int, ...], pooled: Values | None, *, alternative: Alternative, null_value: float = 0.5
) -> float:
    """Give a bound below every attainable p: t with the largest difference over the smallest standard error there is.

    Placements that differ at all have a mean with a standard error of at least 1 / (2 n1 n2).
    """
    n1, n2 = sizes
    if min(n1, n2) < 2:
        return 1.0
    one_sided = {
        side: min(float(special.stdtr(n1 + n2 - 2, -2.0 * n1 * n2 * room)), (1 - room) ** min(n1, n2))
        for side, room in (("above", 1 - null_value), ("below", null_value))
    }
    return one_sided.get(alternative, min(1.0, 2 * min(one_sided.values())))


@dataclass(frozen=True)
class Placements:
    """Of each value, twice how many of the other group lie below it, ties counted half."""

    first: Ranks
    second: Ranks

    @classmethod
    def of(cls, first: Values, second: Values) -> "Placements":
        """Take the ranks within a group off the ranks among all."""
        one, two = _settled(first, second)
        together = doubled_midranks(np.concatenate([one, two]))
        return cls(together[: one.size] - doubled_midranks(one), together[one.size :] - doubled_midranks(two))

    @property
    def share(self) -> Fraction:
        """The share of pairs of values in which the first is larger, ties counted half."""
        return Fraction(int(self.first.sum()), 2 * self.first.size * self.second.size)


def _settled(first: Values, second: Values) -> list[Values]:
    pooled = np.concatenate([first, second])
    return np.split(settled(pooled, rounding(pooled)), [first.size])


def _placement(value: float, others: list[float]) -> Fraction:
    return Fraction(bisect_left(others, value) + bisect_right(others, value), 2 * len(others))


def _variance(group: list[float], others: list[float]) -> Fraction:
    """Give the squared standard error of the mean placement of a group among the others."""
    n, placements = len(group), [_placement(value, others) for value in group]
    squares, total = sum((p * p for p in placements), Fraction(0)), sum(placements, Fraction(0))
    return (squares - total**2 / n) / (n * (n - 1))


def _apart(share: Fraction, asked: Asked, n: tuple[int, int]) -> Outcome | None:
    """Judge groups that don't overlap."""
    if 0 < share < 1:
        return None
    smaller, above = min(n), share == 1
    bound = (asked.null_value if above else 1 - asked.null_value) ** smaller
    end = asked.tail ** (1 / smaller)
    return Outcome(
        estimate=float(share),
        lower=end if above else 0.0,
        upper=1.0 if above else 1 - end,
        statistic=math.nan,
        p=asked.p(above=bound if above else 1.0, below=1.0 if above else bound),
        n=n,
        remarks=(APART.format(n=smaller),),
    )


def _within(outcome: Outcome) -> Outcome:
    """Keep the interval of a probability within 0 and 1."""
    return replace(outcome, lower=max(0.0, outcome.lower), upper=min(1.0, outcome.upper))


def _asked(null_value: float, alternative: Alternative, confidence: float) -> Asked:
    if not 0 < null_value < 1:
        raise ValueError(f"a probability under the null hypothesis lies between 0 and 1; found {null_value!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _refusal(first: Values, second: Values) -> NotComputed | None:
    pooled = np.concatenate([first, second])
    return first_reason(
        too_few(first.size, 2, noun="value", whose=" of the first group"),
        too_few(second.size, 2, noun="value", whose=" of the second group"),
        None if varies(pooled) else f"all {count(pooled.size, 'value')} of both groups are equal",
        n=(first.size, second.size),
    )
