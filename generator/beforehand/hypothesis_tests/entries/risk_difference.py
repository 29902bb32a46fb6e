"""Score test of a risk difference: how much more, or less, frequent is an event in one group than in another."""

from decimal import Decimal
from fractions import Fraction
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests import normal, normal_again, shares
from beforehand.hypothesis_tests.contract import Outcome, Result, statistical_test
from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.shares_again import Group, TwoGroups
from beforehand.hypothesis_tests.shares_remarks import empty_group, number_needed, sparse
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.two_by_two import Table
from beforehand.terms import Alternative

Events = NDArray[np.bool_]
IntervalBy = Literal["score", "added_squares"]

ADDED_SQUARES = (
    "The interval adds the squared distances of both shares from their own score limits (Newcombe), p is that of the "
    "score test: they are built differently, and may disagree where p is close to 1 - confidence."
)


@statistical_test(
    title="Score test of a risk difference",
    design="two_groups",
    outcome="event",
    scale="difference",
    estimates="difference in shares",
    parameter="π₁ − π₂",
    statistic="z",
    p_is="approximate, for many units",
    null="the difference in shares (first - second) equals the null value",
    assumptions=(
        "the units are independent of each other",
        "within a group every unit has the same probability of the event, or the units are a random sample",
        "both groups are large enough for a normal approximation",
    ),
    second_route=(
        "Pearson's chi-square of the table fitted under the null value, in 120-digit decimals and fitted by false "
        "position; shares no formula of a variance, no root finder and no normal distribution function with the first"
    ),
    bound=1e-9,
    reference="Miettinen and Nurminen (1985), Statistics in Medicine 4:213-226",
    null_between=(-1.0, 1.0),
)
def risk_difference(
    first: Events,
    second: Events,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    small_sample_factor: bool = True,
    interval: IntervalBy = "score",
) -> Result:
    """Test the difference between the shares of an event in two independent groups.

    Parameters
    ----------
    first, second : ndarray of bool, shapes (n1,) and (n2,)
        Whether the event happened to each independent unit of the group; n1, n2 >= 1.
    null_value : float
        The difference in shares, first - second, under the null hypothesis, between -1 and 1: for non-inferiority the
        margin.
    alternative : {"above", "below", "two_sided"}
        The side on which the difference is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    small_sample_factor : bool
        Whether the variance is multiplied by N / (N - 1), N the units of both groups (Miettinen and Nurminen). Without
        it the test is that of Farrington and Manning (1990), and the interval that of Mee (1984): a little narrower.
    interval : {"score", "added_squares"}
        The differences that the test keeps, or Newcombe's interval from the score limits of both shares.

    Returns
    -------
    Outcome or NotComputed
        The observed difference with its interval, z and p; where the interval leaves 0 out, its reciprocal as a remark
        (number needed). No result when a group is empty. Where no unit has the event, or all have it, z at the null
        value 0 is 0.

    Raises
    ------
    ValueError
        When the null value does not lie between -1 and 1, or ``interval`` is not one of its words.

    Notes
    -----
    z = (difference - null value) / √(variance), with the variance of the shares that fit best among those which differ
    by the null value. No continuity correction: it would make p and interval needlessly conservative. At the null value
    0 without the factor, z² is Pearson's chi-square. The interval is found by inverting the test, so p and interval
    never contradict each other, and no end lies beyond -1 or 1, as those from a standard error of the observed shares
    do; that standard error is 0 for shares of 0 and 1, and is not used here.

    References
    ----------
    Miettinen and Nurminen (1985), Comparative analysis of two rates, Statistics in Medicine 4:213-226.
    Mee (1984), Confidence bounds for the difference between two probabilities, Biometrics 40:1175-1176.
    Farrington and Manning (1990), Test statistics and sample size formulae for comparative binomial trials with null
    hypothesis of non-zero risk difference or non-unity relative risk, Statistics in Medicine 9:1447-1454.
    Newcombe (1998), Interval estimation for the difference between independent proportions: comparison of eleven
    methods, Statistics in Medicine 17:873-890 (method 10).
    """
    asked, table = _asked(null_value, alternative, confidence, interval), Table.of(first, second)
    if refusal := empty_group(table):
        return refusal
    factor, critical = shares.small_sample(table, small_sample_factor), normal.critical(asked.tail)
    z = factor * shares.difference_score(table, null_value)
    if interval == "score":
        ends = shares.difference_ends(table, critical / factor)
    else:
        ends = shares.added_squares(table, critical)
    return _outcome(table, z, normal.p_of(asked, z), ends, interval)


def second_route(
    first: Events,
    second: Events,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    small_sample_factor: bool = True,
    interval: IntervalBy = "score",
) -> Result:
    """Compute the same from Pearson's chi-square; only refusals, the estimate and the remarks are shared."""
    asked = _asked(null_value, alternative, confidence, interval)
    events, others = int(np.count_nonzero(first)), int(np.count_nonzero(second))
    table = Table(events, len(first), len(second), events + others)
    if refusal := empty_group(table):
        return refusal
    groups = TwoGroups(Group(events, len(first)), Group(others, len(second)), "difference", small_sample_factor)
    z, critical = groups.z(Decimal(null_value)), normal_again.critical(asked.tail)
    ends = groups.interval(critical) if interval == "score" else groups.added_squares(critical)
    return _outcome(table, float(z), normal_again.p_of(asked, z), ends, interval)


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Events | None,
    *,
    alternative: Alternative,
    null_value: float,
    small_sample_factor: bool = True,
    interval: IntervalBy = "score",
) -> float:
    """Give the smallest attainable p: that of all events in one group, as far as their number allows."""
    tables = shares.extreme_tables(sizes, None if pooled is None else int(np.count_nonzero(pooled)))
    return shares.smallest_score_p(shares.difference_score, tables, null_value, alternative, factor=small_sample_factor)


def _asked(null_value: float, alternative: Alternative, confidence: float, interval: str) -> Asked:
    if not -1 < null_value < 1:
        raise ValueError(f"a null difference in shares lies between -1 and 1; found {null_value!r}")
    if interval not in ("score", "added_squares"):
        raise ValueError(f"interval is score or added_squares; found {interval!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _outcome(table: Table, z: float, p: float, ends: Interval, interval: IntervalBy) -> Outcome:
    difference = Fraction(table.events, table.first) - Fraction(table.all_events - table.events, table.second)
    built = (ADDED_SQUARES,) if interval == "added_squares" else ()
    return Outcome(
        estimate=float(difference),
        lower=ends.lower,
        upper=ends.upper,
        statistic=z,
        p=p,
        n=(table.first, table.second),
        remarks=(*number_needed(difference, ends), *built, *sparse(table)),
    )
