"""Score test of a risk ratio: how many times as frequent is an event in one group as in another."""

import math
from decimal import Decimal

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests import normal, normal_again, shares
from beforehand.hypothesis_tests.contract import Outcome, Result, statistical_test
from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.shares_again import Group, TwoGroups
from beforehand.hypothesis_tests.shares_remarks import no_event, sparse
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.two_by_two import Table
from beforehand.terms import Alternative

Events = NDArray[np.bool_]

NO_EVENT_FIRST = "The first group has no event: estimate and lower end of the ratio are 0."
NO_EVENT_SECOND = "The second group has no event: estimate and upper end of the ratio are infinite."


@statistical_test(
    title="Score test of a risk ratio",
    design="two_groups",
    outcome="event",
    scale="ratio",
    estimates="ratio of shares",
    parameter="π₁ / π₂",
    statistic="z",
    p_is="approximate, for many units",
    null="the ratio of shares (first / second) equals the null value",
    assumptions=(
        "the units are independent of each other",
        "within a group every unit has the same probability of the event, or the units are a random sample",
        "both groups are large enough for a normal approximation",
    ),
    second_route=(
        "Pearson's chi-square of the table fitted under the null value, in 120-digit decimals and fitted by false "
        "position; shares no formula of a fitted share or variance, no root finder and no normal distribution function "
        "with the first"
    ),
    bound=1e-9,
    reference="Koopman (1984), Biometrics 40:513-517; Miettinen and Nurminen (1985), Statistics in Medicine 4:213-226",
)
def risk_ratio(
    first: Events,
    second: Events,
    *,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    small_sample_factor: bool = True,
) -> Result:
    """Test the ratio of the shares of an event in two independent groups.

    Parameters
    ----------
    first, second : ndarray of bool, shapes (n1,) and (n2,)
        Whether the event happened to each independent unit of the group; n1, n2 >= 1.
    null_value : float
        The ratio of shares, first / second, under the null hypothesis, above 0: for non-inferiority the margin.
    alternative : {"above", "below", "two_sided"}
        The side on which the ratio is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    small_sample_factor : bool
        Whether the variance is multiplied by N / (N - 1), N the units of both groups (Miettinen and Nurminen). Without
        it the interval is that of Koopman, a little narrower.

    Returns
    -------
    Outcome or NotComputed
        The observed ratio with its interval, z and p. Estimate and an end are 0 or infinite where a group has no event.
        No result when a group is empty, or no unit has the event.

    Raises
    ------
    ValueError
        When the null value is not above 0.

    Notes
    -----
    z = (p1 - null value × p2) / √(variance), with the variance of the shares that fit best among those of this ratio.
    The interval is found by inverting the test, so p and interval never contradict each other. The common interval
    from the standard error of the logarithm fails where a count is 0, and covers too rarely in small groups.

    References
    ----------
    Koopman (1984), Confidence intervals for the ratio of two binomial proportions, Biometrics 40:513-517.
    Miettinen and Nurminen (1985), Comparative analysis of two rates, Statistics in Medicine 4:213-226.
    """
    asked, table = _asked(null_value, alternative, confidence), Table.of(first, second)
    if refusal := no_event(table):
        return refusal
    factor = shares.small_sample(table, small_sample_factor)
    z = factor * shares.ratio_score(table, null_value)
    ends = shares.ratio_ends(
        shares.ratio_score,
        table,
        normal.critical(asked.tail) / factor,
        open_below=not table.events,
        open_above=table.events == table.all_events,
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
    if refusal := no_event(table):
        return refusal
    groups = TwoGroups(Group(events, len(first)), Group(others, len(second)), "ratio", small_sample_factor)
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
    tables = shares.extreme_tables(sizes, None if pooled is None else int(np.count_nonzero(pooled)))
    computed = [table for table in tables if table.all_events]
    return shares.smallest_score_p(shares.ratio_score, computed, null_value, alternative, factor=small_sample_factor)


def _asked(null_value: float, alternative: Alternative, confidence: float) -> Asked:
    if null_value <= 0:
        raise ValueError(f"a ratio of shares under the null hypothesis is above 0; found {null_value!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _outcome(table: Table, z: float, p: float, ends: Interval) -> Outcome:
    others = table.all_events - table.events
    return Outcome(
        estimate=table.events * table.second / (others * table.first) if others else math.inf,
        lower=ends.lower,
        upper=ends.upper,
        statistic=z,
        p=p,
        n=(table.first, table.second),
        remarks=(
            *([NO_EVENT_FIRST] if not table.events else []),
            *([NO_EVENT_SECOND] if not others else []),
            *sparse(table),
        ),
    )
