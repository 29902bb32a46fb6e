"""Boschloo's exact test: is an event more, or less, frequent in one group than in another, whatever its frequency."""

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests import normal, normal_again, shares, unconditional, unconditional_again
from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, statistical_test
from beforehand.hypothesis_tests.location import Interval, Tails
from beforehand.hypothesis_tests.refusals import first_reason, too_few
from beforehand.hypothesis_tests.shares_again import Group, TwoGroups
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.two_by_two import Table
from beforehand.spelling import integer, short
from beforehand.terms import Alternative

Events = NDArray[np.bool_]

# Its computation grows with the third power of the units; with more of them p hardly differs from that of a score test.
MOST_UNITS = 2000

BUILT_DIFFERENTLY = (
    "p is exact and unconditional; the interval holds the differences that the score test keeps (Miettinen and "
    "Nurminen), an approximation: they are built differently, and may disagree where p is close to 1 - confidence."
)


@statistical_test(
    title="Boschloo's exact test",
    design="two_groups",
    outcome="event",
    scale="difference",
    estimates="difference in shares",
    parameter="π₁ − π₂",
    statistic="one-sided p of Fisher's exact test",
    p_is="exact, the largest over every common share; the interval is approximate",
    null="both groups have the same share of units with the event",
    assumptions=(
        "the units are independent of each other",
        "within a group every unit has the same probability of the event, or the units are a random sample",
    ),
    second_route=(
        "conditional probabilities in 40-digit decimals, and their polynomial's largest value enclosed to 1e-11 by "
        "halving in Bernstein form; the interval from Pearson's chi-square in decimals; shares no binomial "
        "probability, grid or maximisation with the first"
    ),
    bound=1e-9,
    reference="Boschloo (1970), Statistica Neerlandica 24:1-9",
    interval_inverts_p=False,
    null_between=(-1.0, 1.0),
    only_default_null=True,
)
def boschloo_exact(
    first: Events,
    second: Events,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Test whether an event is equally frequent in two independent groups, exactly and without fixing the margins.

    Parameters
    ----------
    first, second : ndarray of bool, shapes (n1,) and (n2,)
        Whether the event happened to each independent unit of the group; n1, n2 >= 1, n1 + n2 <= 2000.
    null_value : float
        0: the test is one of equal shares. There is no result for another value.
    alternative : {"above", "below", "two_sided"}
        The side on which the difference in shares, first - second, is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.

    Returns
    -------
    Outcome or NotComputed
        The observed difference in shares with the interval of its score test, the one-sided p of Fisher's exact test
        (for two sides, the smaller) as the statistic, and p. No result for an empty group, for more than 2000 units, or
        for a null value other than 0.

    Notes
    -----
    Tables are ordered by the one-sided p of Fisher's exact test. p is the probability of a table at least as extreme as
    the observed one, at the common share of the event at which this probability is largest; the two-sided p is twice
    the smaller of both sides. Its level is kept whatever the common share is, and p is never larger than that of
    Fisher's test: unlike there, the number of all events is not taken as fixed.

    The largest probability is searched on a grid of 20 points to each standard error of the common share, and every
    peak near the highest is refined. The second route encloses the same maximum to 1e-11 of itself; the two may differ
    by no more than 1e-9 of p.

    No exact interval belongs to this p: its extension to other null values does not move one way along them, and the
    null values it keeps can have gaps. The interval is therefore the one of the score test, approximate, and said to be
    so.

    References
    ----------
    Boschloo (1970), Raised conditional level of significance for the 2 x 2-table when testing the equality of two
    probabilities, Statistica Neerlandica 24:1-9.
    Miettinen and Nurminen (1985), Comparative analysis of two rates, Statistics in Medicine 4:213-226 (the interval).
    """
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    table = Table.of(first, second)
    if refusal := _refusal(table, null_value):
        return refusal
    swapped = Table(table.all_events - table.events, table.second, table.first, table.all_events)
    sides = [unconditional.largest_value(unconditional.coefficients(side)) for side in (table, swapped)]
    fisher = [unconditional.conditional_above(side) for side in (table, swapped)]
    critical = normal.critical(asked.tail) / shares.small_sample(table, True)
    return _outcome(table, asked, Tails(*sides), Tails(*fisher), shares.difference_ends(table, critical))


def second_route(
    first: Events,
    second: Events,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
) -> Result:
    """Compute the same by enclosure; only refusals, the estimate and the remark are shared."""
    asked = Asked(null_value=null_value, alternative=alternative, confidence=confidence)
    x, y = int(np.count_nonzero(first)), int(np.count_nonzero(second))
    n1, n2 = len(first), len(second)
    table = Table(x, n1, n2, x + y)
    if refusal := _refusal(table, null_value):
        return refusal
    fisher = [
        unconditional_again.conditional_above(x, n1, n2, x + y),
        unconditional_again.conditional_above(y, n2, n1, x + y),
    ]
    above = unconditional_again.largest_value(unconditional_again.coefficients(n1, n2, fisher[0]))
    below = unconditional_again.largest_value(unconditional_again.coefficients(n2, n1, fisher[1]))
    groups = TwoGroups(Group(x, n1), Group(y, n2), "difference", small_sample=True)
    ends = groups.interval(normal_again.critical(asked.tail))
    return _outcome(table, asked, Tails(above, below), Tails(*map(float, fisher)), ends)


def smallest_p(sizes: tuple[int, ...], pooled: Events | None, *, alternative: Alternative) -> float:
    """Give the smallest attainable p: that of all events in one group, as far as their number allows."""
    if min(sizes) < 1 or sum(sizes) > MOST_UNITS:
        return 1.0
    tables = shares.extreme_tables(sizes, None if pooled is None else int(np.count_nonzero(pooled)))
    above, below = (unconditional.largest_value(unconditional.coefficients(_upwards(table))) for table in tables[::-1])
    asked = Asked(null_value=0.0, alternative=alternative, confidence=0.95)
    return asked.p(above=above, below=below)


def _upwards(table: Table) -> Table:
    """Give a table with few events in the first group as one with many."""
    if table.events == table.most:
        return table
    return Table(table.all_events - table.events, table.second, table.first, table.all_events)


def _refusal(table: Table, null_value: float) -> NotComputed | None:
    units = table.first + table.second
    many = f"Boschloo's test takes up to {integer(MOST_UNITS)} units; there are {integer(units)}. Use risk_difference."
    other = f"Boschloo's test is one of equal shares, null value 0; found {short(null_value)}. Use risk_difference."
    return first_reason(
        too_few(table.first, 1, noun="unit", whose=" of the first group"),
        too_few(table.second, 1, noun="unit", whose=" of the second group"),
        many if units > MOST_UNITS else None,
        other if null_value else None,
        n=(table.first, table.second),
    )


def _outcome(table: Table, asked: Asked, sides: Tails, fisher: Tails, ends: Interval) -> Outcome:
    statistic = {
        "above": fisher.above,
        "below": fisher.below,
        "two_sided": min(fisher.above, fisher.below),
    }[asked.alternative]
    others = table.all_events - table.events
    return Outcome(
        estimate=(table.events * table.second - others * table.first) / (table.first * table.second),
        lower=ends.lower,
        upper=ends.upper,
        statistic=statistic,
        p=asked.p(above=sides.above, below=sides.below),
        n=(table.first, table.second),
        remarks=(BUILT_DIFFERENTLY,),
    )
