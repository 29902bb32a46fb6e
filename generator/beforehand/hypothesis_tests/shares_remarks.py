"""What has to be said beside a comparison of two shares, in words; both routes of a test say it."""

from fractions import Fraction

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few
from beforehand.hypothesis_tests.two_by_two import Table
from beforehand.spelling import ratio

# Cochran (1954), Biometrics 10:417-451, as it is usually quoted: a rule of thumb, no more.
FEWEST_EXPECTED = 5

SPARSE = (
    "With one probability for both groups, fewer than 5 events or fewer than 5 units without the event are expected in "
    "a group: the normal approximation is rough. fisher_exact and boschloo_exact do without it."
)


def sparse(table: Table) -> tuple[str, ...]:
    """Say that the table is small for a normal approximation."""
    units = table.first + table.second
    smallest = min(table.first, table.second) * min(table.all_events, units - table.all_events)
    return (SPARSE,) if smallest < FEWEST_EXPECTED * units else ()


def number_needed(difference: Fraction, interval: Interval) -> tuple[str, ...]:
    """Write the reciprocal of a difference of shares, where its interval leaves 0 out."""
    if interval.lower <= 0 <= interval.upper or not difference:
        return ()
    fewest, most = sorted(1 / abs(end) for end in (interval.lower, interval.upper))
    needed, more = ratio(float(1 / abs(difference))), "more" if difference > 0 else "fewer"
    return (
        f"The reciprocal of the difference (number needed): one event {more} in the first group for every {needed} "
        f"units, by the interval {ratio(fewest)} to {ratio(most)}.",
    )


def empty_group(table: Table) -> NotComputed | None:
    """Refuse a comparison with an empty group."""
    return first_reason(*_empty(table), n=(table.first, table.second))


def no_event(table: Table) -> NotComputed | None:
    """Refuse a ratio where no unit has the event."""
    none = None if table.all_events else f"none of the {count(table.first + table.second, 'unit')} has the event"
    return first_reason(*_empty(table), none, n=(table.first, table.second))


def no_choice(table: Table) -> NotComputed | None:
    """Refuse an odds ratio where no unit, or every unit, has the event."""
    units = table.first + table.second
    none = f"none of the {count(units, 'unit')} has the event" if not table.all_events else None
    every = f"all {count(units, 'unit')} have the event" if table.all_events == units else None
    return first_reason(*_empty(table), none, every, n=(table.first, table.second))


def _empty(table: Table) -> tuple[str | None, str | None]:
    return (
        too_few(table.first, 1, noun="unit", whose=" of the first group"),
        too_few(table.second, 1, noun="unit", whose=" of the second group"),
    )
