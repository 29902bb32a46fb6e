"""Score test of an odds ratio: is an event more, or less, frequent in one large group than in another."""

import math
from decimal import Decimal

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests import normal, normal_again, shares
from beforehand.hypothesis_tests.contract import Outcome, Result, statistical_test
from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.shares_again import Group, TwoGroups
from beforehand.hypothesis_tests.shares_remarks import no_choice, sparse
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.two_by_two import Table
from beforehand.terms import Alternative

Events = NDArray[np.bool_]

AT_LEAST = "The first group has as few events as it can have: estimate and lower end of the odds ratio are 0."
AT_MOST = "The first group has as many events as it can have: estimate and upper end of the odds ratio are infinite."


@statistical_test(
    title="Score test of an odds ratio",
    design="two_groups",
    outcome="event",
    scale="ratio",
    estimates="odds ratio",
    parameter="odds₁ / odds₂",
    statistic="z",
    p_is="approximate, for many units",
    null="the odds ratio equals the null value (1: the event is equally frequent in both groups)",
    assumptions=(
        "the units are independent of each other",
        "within a group every unit has the same probability of the event, or the units are a random sample",
        "both groups are large enough for a normal approximation",
    ),
    second_route=(
        "Pearson's chi-square of the table fitted under the null value, in 120-digit decimals and fitted by false "
        "position; shares no formula of a fitted count or variance, no root finder and no normal distribution function "
        "with the first"
    ),
    bound=1e-9,
    reference="Cornfield (1956), Third Berkeley Symposium 4:135-148; Miettinen and Nurminen (1985), Statistics in "
    "Medicine 4:213-226",
)
def odds_ratio_score(
    first: Events,
    second: Events,
    *,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    small_sample_factor: bool = True,
) -> Result:
    """Test the odds ratio of an event in two independent groups by a normal approximation.

    Parameters
    ----------
    first, second : ndarray of bool, shapes (n1,) and (n2,)
        Whether the event happened to each independent unit of the group; n1, n2 >= 1.
    null_value : float
        The odds ratio under the null hypothesis, above 0.
    alternative : {"above", "below", "two_sided"}
        The side on which the odds ratio, odds of the first group / odds of the second, is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    small_sample_factor : bool
        Whether the variance is multiplied by N / (N - 1), N the units of both groups (Miettinen and Nurminen). Without
        it the interval is that of Cornfield (no continuity correction), a little narrower.

    Returns
    -------
    Outcome or NotComputed
        The observed odds ratio ad / bc with its interval, z and p. Estimate and an end are 0 or infinite where a cell
        of the table is empty. No result when a group is empty, or no unit or every unit has the event.

    Raises
    ------
    ValueError
        When the null value is not above 0.

    Notes
    -----
    z = (events of the first group - fitted events) × √(1/a + 1/b + 1/c + 1/d), over the cells of the table that has
    these margins and the odds ratio of the null value. The interval is found by inverting the test, so p and interval
    never contradict each other; the common interval from the standard error of the logarithm fails where a cell is
    empty. fisher_exact asks the same without an approximation, and is the conservative choice for small groups; its
    estimate, given the margins, is not ad / bc.

    References
    ----------
    Cornfield (1956), A statistical problem arising from retrospective studies, Proceedings of the Third Berkeley
    Symposium 4:135-148.
    Miettinen and Nurminen (1985), Comparative analysis of two rates, Statistics in Medicine 4:213-226.
    """
    asked, table = _asked(null_value, alternative, confidence), Table.of(first, second)
    if refusal := no_choice(table):
        return refusal
    factor = shares.small_sample(table, small_sample_factor)
    z = factor * shares.odds_score(table, null_value)
    ends = shares.ratio_ends(
        shares.odds_score,
        table,
        normal.critical(asked.tail) / factor,
        open_below=table.events == table.least,
        open_above=table.events == table.most,
    )
    return _outcome(table, z, normal.p_of(asked, z), ends)


def second_route(
    first: Events,
    second: Events,
    *,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    small_sample_factor: bool = True,
) -> Result:
    """Compute the same from Pearson's chi-square; only refusals, the estimate and the remarks are shared."""
    asked = _asked(null_value, alternative, confidence)
    events, others = int(np.count_nonzero(first)), int(np.count_nonzero(second))
    table = Table(events, len(first), len(second), events + others)
    if refusal := no_choice(table):
        return refusal
    groups = TwoGroups(Group(events, len(first)), Group(others, len(second)), "odds", small_sample_factor)
    z = groups.z(Decimal(null_value))
    ends = groups.interval(normal_again.critical(asked.tail))
    return _outcome(table, float(z), normal_again.p_of(asked, z), ends)


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Events | None,
    *,
    alternative: Alternative,
    null_value: float,
    small_sample_factor: bool = True,
) -> float:
    """Give the smallest attainable p: that of all events in one group, as far as their number allows."""
    all_events = None if pooled is None else int(np.count_nonzero(pooled))
    tables = [
        table
        for table in shares.extreme_tables(sizes, all_events, any_margin=True)
        if 0 < table.all_events < table.first + table.second
    ]
    return shares.smallest_score_p(shares.odds_score, tables, null_value, alternative, factor=small_sample_factor)


def _asked(null_value: float, alternative: Alternative, confidence: float) -> Asked:
    if null_value <= 0:
        raise ValueError(f"an odds ratio under the null hypothesis is above 0; found {null_value!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _outcome(table: Table, z: float, p: float, ends: Interval) -> Outcome:
    others = table.all_events - table.events
    across = (table.first - table.events) * others
    return Outcome(
        estimate=table.events * (table.second - others) / across if across else math.inf,
        lower=ends.lower,
        upper=ends.upper,
        statistic=z,
        p=p,
        n=(table.first, table.second),
        remarks=(
            *([AT_LEAST] if table.events == table.least else []),
            *([AT_MOST] if table.events == table.most else []),
            *sparse(table),
        ),
    )
