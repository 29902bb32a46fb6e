"""Fisher's exact test: is an event more, or less, frequent in one group than in another."""

import math
from decimal import Decimal
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, statistical_test
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.two_by_two import EQUALLY_PROBABLE, Hypergeometric, Table
from beforehand.hypothesis_tests.two_by_two_again import Weights
from beforehand.terms import Alternative

Events = NDArray[np.bool_]
TwoSidedBy = Literal["smaller_tail", "smaller_probability"]

AT_LEAST = "The first group has as few events as it can have: estimate and lower end of the odds ratio are 0."
AT_MOST = "The first group has as many events as it can have: estimate and upper end of the odds ratio are infinite."
BY_PROBABILITY = (
    "The two-sided p adds up the tables that are no more probable than the observed one, the interval is cut from two "
    "equal tails: they are built differently, and may disagree where p is close to 1 - confidence."
)


@statistical_test(
    title="Fisher's exact test",
    design="two_groups",
    outcome="event",
    scale="ratio",
    estimates="odds ratio",
    parameter="odds₁ / odds₂",
    statistic="events in the first group",
    p_is="exact, given both margins of the table",
    null="the odds ratio equals the null value (1: the event is equally frequent in both groups)",
    assumptions=(
        "the units are independent of each other",
        "within a group every unit has the same probability of the event, or the groups were formed at random",
    ),
    second_route=(
        "weights of all tables as products in 40-digit decimal arithmetic, ends of the interval by false position; "
        "shares no logarithm of a weight, no floating-point sum and no root finder with the first"
    ),
    bound=1e-9,
    reference="Fisher (1935), Journal of the Royal Statistical Society 98:39-82",
)
def fisher_exact(
    first: Events,
    second: Events,
    *,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    two_sided_by: TwoSidedBy = "smaller_tail",
) -> Result:
    """Test the odds ratio of an event in two groups, given both margins of the 2 x 2 table.

    Parameters
    ----------
    first, second : ndarray of bool, shapes (n1,) and (n2,)
        Whether the event happened to each independent unit of the group.
    null_value : float
        The odds ratio under the null hypothesis, above 0.
    alternative : {"above", "below", "two_sided"}
        The side on which the odds ratio, odds of the first group / odds of the second, is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    two_sided_by : {"smaller_tail", "smaller_probability"}
        Two-sided p as twice the smaller tail, or as the sum over tables no more probable than the observed one.

    Returns
    -------
    Outcome or NotComputed
        The conditional maximum likelihood estimate of the odds ratio (not ad / bc) with its exact interval, the events
        in the first group, and p. Estimate and ends are 0 or infinite where a cell of the table is empty. No result
        when a group is empty, or no unit or every unit has the event.

    Raises
    ------
    ValueError
        When the null value is not above 0, or ``two_sided_by`` is not one of its words.

    Notes
    -----
    Given the margins, the events in the first group follow Fisher's noncentral hypergeometric distribution: P(x) is
    proportional to C(n1, x) C(n2, m - x) ψ^x. Each end of the interval is the odds ratio at which one tail equals
    (1 - confidence) / 2, so its confidence is at least the one asked for, and it holds exactly the null values that
    twice the smaller tail does not reject. The other two-sided p is often smaller, but inverts to another set, which
    can have gaps: hence the default. Conditioning makes p exact and conservative: its true level is below the nominal
    one, most of all in small tables.

    References
    ----------
    Fisher (1935), The logic of inductive inference, Journal of the Royal Statistical Society 98:39-82.
    Cornfield (1956), A statistical problem arising from retrospective studies, Proceedings of the Third Berkeley
    Symposium 4:135-148 (the interval).
    """
    asked = _asked(null_value, alternative, confidence, two_sided_by)
    table = Table.of(first, second)
    if refusal := _refusal(table):
        return refusal
    tables, null = Hypergeometric.of(table), math.log(null_value)
    p = asked.p(above=math.exp(tables.log_above(null)), below=math.exp(tables.log_below(null)))
    if _by_probability(asked, two_sided_by):
        p = min(1.0, math.exp(tables.log_no_more_probable(null)))
    return Outcome(
        estimate=tables.estimate(),
        lower=tables.lower(asked.tail),
        upper=tables.upper(asked.tail),
        statistic=float(table.events),
        p=p,
        n=(table.first, table.second),
        remarks=_remarks(table, asked, two_sided_by),
    )


def second_route(
    first: Events,
    second: Events,
    *,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    two_sided_by: TwoSidedBy = "smaller_tail",
) -> Result:
    """Compute the same in 40-digit decimals, the upper side as the lower side of the mirrored table.

    Shared with the first route: what is refused, the remarks, and the share of 1e-9 within which tables count as
    equally probable.
    """
    asked = _asked(null_value, alternative, confidence, two_sided_by)
    events, others = int(np.count_nonzero(first)), int(np.count_nonzero(second))
    table = Table(events, len(first), len(second), events + others)
    if refusal := _refusal(table):
        return refusal
    weights = Weights.of(len(first), len(second), events + others)
    mirrored = Weights.of(len(second), len(first), events + others)
    null = Decimal(null_value)
    above, below = weights.above(events, null), mirrored.above(others, 1 / null)
    p = {"above": above, "below": below, "two_sided": 2 * min(above, below)}[alternative]
    if _by_probability(asked, two_sided_by):
        p = weights.no_more_probable(events, null)
    upper = mirrored.lower(others, asked.tail)
    return Outcome(
        estimate=weights.estimate(events),
        lower=weights.lower(events, asked.tail),
        upper=1 / upper if upper else math.inf,
        statistic=float(events),
        p=min(1.0, float(p)),
        n=(len(first), len(second)),
        remarks=_remarks(table, asked, two_sided_by),
    )


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Events | None,
    *,
    alternative: Alternative,
    two_sided_by: TwoSidedBy = "smaller_tail",
) -> float:
    """Give the smallest attainable p at the null value 1.

    Without data any number of events is possible; p is smallest with as many events as one of the groups has units.
    """
    first, second = sizes
    margins = (first, second) if pooled is None else (int(np.count_nonzero(pooled)),)
    tables = [Table(0, first, second, all_events) for all_events in margins]
    return min(_smallest_p(table, alternative, two_sided_by) for table in tables)


def _smallest_p(table: Table, alternative: Alternative, two_sided_by: TwoSidedBy) -> float:
    above, below = _probability(table.most, table), _probability(table.least, table)
    smaller, larger = sorted((above, below))
    both = larger if larger <= smaller * (1 + EQUALLY_PROBABLE) else 0.0
    by_tail = 2 * smaller if two_sided_by == "smaller_tail" else smaller + both
    return min(1.0, {"above": above, "below": below, "two_sided": by_tail}[alternative])


def _probability(events: int, table: Table) -> float:
    ways = math.comb(table.first, events) * math.comb(table.second, table.all_events - events)
    return ways / math.comb(table.first + table.second, table.all_events)


def _asked(null_value: float, alternative: Alternative, confidence: float, two_sided_by: str) -> Asked:
    if null_value <= 0:
        raise ValueError(f"an odds ratio under the null hypothesis is above 0; found {null_value!r}")
    if two_sided_by not in ("smaller_tail", "smaller_probability"):
        raise ValueError(f"two_sided_by is smaller_tail or smaller_probability; found {two_sided_by!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _by_probability(asked: Asked, two_sided_by: TwoSidedBy) -> bool:
    return asked.alternative == "two_sided" and two_sided_by == "smaller_probability"


def _refusal(table: Table) -> NotComputed | None:
    units = table.first + table.second
    none = f"none of the {count(units, 'unit')} has the event" if not table.all_events else None
    every = f"all {count(units, 'unit')} have the event" if table.all_events == units else None
    return first_reason(
        too_few(table.first, 1, noun="unit", whose=" of the first group"),
        too_few(table.second, 1, noun="unit", whose=" of the second group"),
        none,
        every,
        n=(table.first, table.second),
    )


def _remarks(table: Table, asked: Asked, two_sided_by: TwoSidedBy) -> tuple[str, ...]:
    remarks = []
    if table.events == table.least:
        remarks.append(AT_LEAST)
    if table.events == table.most:
        remarks.append(AT_MOST)
    if _by_probability(asked, two_sided_by):
        remarks.append(BY_PROBABILITY)
    return tuple(remarks)
