"""Two shares of an event: the score tests of their difference, ratio and odds ratio, and the intervals they invert to.

In all three the shares are fitted under the null value by maximum likelihood, and what was observed is held against the
standard error that the fitted shares imply.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass

from scipy import optimize, special

from beforehand.hypothesis_tests.binomial import Share, score_ends
from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.two_by_two import Table, increasing_root

NEAREST_TO_ONE = 1 - 2.0**-52
Score = Callable[[Table, float], float]


@dataclass(frozen=True)
class Fit:
    """The shares of the first and of the second group that fit best under a null value."""

    first: Share
    second: Share


def small_sample(table: Table, wanted: bool) -> float:
    """Give what Miettinen and Nurminen multiply z by: the root of (N - 1) / N; else 1."""
    units = table.first + table.second
    return math.sqrt((units - 1) / units) if wanted else 1.0


def difference_score(table: Table, null: float) -> float:
    """Give z for a difference of shares, first - second, between -1 and 1; 0 where no unit tells anything."""
    x, y = table.events, table.all_events - table.events
    fit = fitted_to_difference(table, null)
    variance = fit.first.share * fit.first.rest / table.first + fit.second.share * fit.second.rest / table.second
    away = (x * table.second - y * table.first) / (table.first * table.second) - null
    return away / math.sqrt(variance) if variance > 0 else 0.0


def fitted_to_difference(table: Table, null: float) -> Fit:
    """Fit the shares of both groups under a difference, by maximum likelihood.

    The derivative of the likelihood leads to a cubic with one root between the smallest and the largest share that the
    difference allows (Miettinen and Nurminen 1985). It is found between these, not by the formula for cubics, which
    loses half the digits where two roots are near each other.
    """
    x, y = table.events, table.all_events - table.events
    n1, n2 = table.first, table.second
    if null < 0:
        swapped = fitted_to_difference(Table(y, n2, n1, x + y), -null)
        return Fit(swapped.second, swapped.first)
    if 2 * table.all_events > n1 + n2:  # counted by the rarer of event and no event, so the small shares keep digits
        mirrored = fitted_to_difference(Table(n2 - y, n2, n1, n1 + n2 - x - y), null)
        return Fit(mirrored.second.other, mirrored.first.other)
    smaller = (x + y) / (n1 + n2) if null == 0 else _smaller_share(x, n1, y, n2, null)
    return Fit(Share(smaller + null, (1 - null) - smaller), Share.of(smaller))


def _smaller_share(x: int, n1: int, y: int, n2: int, null: float) -> float:
    """Give the share of the second group when that of the first is larger by ``null`` > 0."""
    room = 1 - null

    def derivative(share: float) -> float:
        # multiplied by the two factors that vanish at the ends, where they are there at all
        at_zero, at_one = share if y else 1.0, room - share if n1 - x else 1.0
        inner = x / (share + null) - (n2 - y) / (1 - share)
        return inner * at_zero * at_one + y * at_one - (n1 - x) * at_zero

    if derivative(0.0) <= 0:
        return 0.0
    if derivative(room) >= 0:
        return room
    return float(optimize.brentq(derivative, 0.0, room, xtol=1e-300, rtol=1e-15, maxiter=1000))


def ratio_score(table: Table, null: float) -> float:
    """Give z for a ratio of shares, first / second, above 0; 0 where no unit tells anything."""
    x, y = table.events, table.all_events - table.events
    n1, n2 = table.first, table.second
    fit = fitted_to_ratio(table, null)
    variance = fit.first.share * fit.first.rest / n1 + null * null * fit.second.share * fit.second.rest / n2
    return (x / n1 - null * y / n2) / math.sqrt(variance) if variance > 0 else 0.0


def fitted_to_ratio(table: Table, null: float) -> Fit:
    """Fit the shares of both groups under a ratio: the root of a quadratic (Koopman 1984).

    It is written as sums of what is not negative, so a share near 0 or 1 keeps its digits.
    """
    x, y = table.events, table.all_events - table.events
    n1, n2, spared_1, spared_2 = table.first, table.second, table.first - x, table.second - y
    a, b = null * (n1 + y), x + n2
    gap, product = a - b, 4 * null * spared_1 * spared_2
    root = math.sqrt(gap * gap + product)
    more = root + gap if gap >= 0 else product / (root - gap)
    less = root - gap if gap <= 0 else product / (root + gap)
    whole = a + b + root
    share = 2 * table.all_events / whole
    return Fit(
        Share(null * share, (less + 2 * null * spared_1) / whole),
        Share(share, (more + 2 * spared_2) / whole),
    )


def odds_score(table: Table, null: float) -> float:
    """Give z for an odds ratio above 0: observed less fitted events, over the root of the fitted information."""
    x, y, units = table.events, table.all_events - table.events, table.first + table.second
    spared = units - table.all_events
    fitted = (
        _fitted_count(table.first, table.all_events, units, null),
        _fitted_count(table.first, spared, units, 1 / null),
        _fitted_count(table.second, table.all_events, units, 1 / null),
        _fitted_count(table.second, spared, units, null),
    )
    observed = (x, table.first - x, y, table.second - y)
    cell = min(range(4), key=observed.__getitem__)  # all four are equally far away; the smallest keeps most digits
    away = (observed[cell] - fitted[cell]) * (1, -1, -1, 1)[cell]
    return away * math.sqrt(sum(1 / count for count in fitted))


def _fitted_count(row: int, column: int, units: int, odds: float) -> float:
    """Give the count of a cell of a 2 x 2 table with these margins and this odds ratio.

    The root of a quadratic (Cornfield 1956), its discriminant written as a sum of what is not negative.
    """
    rest = units - row - column
    b = rest + odds * (row + column)
    inner = row * (units - row) + column * (units - column)
    root = math.sqrt((odds * (row - column)) ** 2 + 2 * odds * inner + rest**2)
    if b >= 0:
        return 2 * odds * row * column / (b + root)
    return (root - b) / (2 * (1 - odds))


def difference_ends(table: Table, critical: float) -> Interval:
    """Give the differences at which z is the critical value, on either side of the observed difference."""
    y = table.all_events - table.events
    observed = (table.events * table.second - y * table.first) / (table.first * table.second)

    def end(at: float, outermost: float) -> float:
        if abs(observed) == 1 and observed * outermost > 0:
            return observed
        low, high = sorted((observed, outermost))
        return float(optimize.brentq(lambda null: difference_score(table, null) - at, low, high, xtol=1e-20))

    return Interval(end(critical, -NEAREST_TO_ONE), end(-critical, NEAREST_TO_ONE))


def ratio_ends(score: Score, table: Table, critical: float, *, open_below: bool, open_above: bool) -> Interval:
    """Give the ratios at which z, which falls along the null values, is the critical value.

    Parameters
    ----------
    open_below, open_above : bool
        Whether no ratio is too small, or none too large, for these counts: the end is 0, or infinite.
    """

    def end(at: float) -> float:
        return math.exp(increasing_root(lambda log_null: at - score(table, math.exp(log_null))))

    return Interval(0.0 if open_below else end(critical), math.inf if open_above else end(-critical))


def added_squares(table: Table, critical: float) -> Interval:
    """Give the interval of a difference from the score intervals of both shares (Newcombe 1998, method 10)."""
    y = table.all_events - table.events
    first, second = (_distances(*group, critical) for group in ((table.events, table.first), (y, table.second)))
    observed = (table.events * table.second - y * table.first) / (table.first * table.second)
    return Interval(
        observed - math.hypot(first.lower, second.upper),
        observed + math.hypot(first.upper, second.lower),
    )


def _distances(events: int, n: int, critical: float) -> Interval:
    """Give how far the score limits of a share lie below and above the observed one."""
    ends = score_ends(events, n, critical)
    if 2 * events > n:  # told from 1, so that a share near 1 keeps its digits
        rest = (n - events) / n
        return Interval(ends.lower.rest - rest, rest - ends.upper.rest)
    return Interval(events / n - ends.lower.share, ends.upper.share - events / n)


def extreme_tables(sizes: tuple[int, ...], all_events: int | None, *, any_margin: bool = False) -> list[Table]:
    """Give the tables that lie farthest to either side of a null value; none where a group is empty.

    Parameters
    ----------
    sizes : tuple of int
        Units of the first and of the second group.
    all_events : int or None
        Events of both groups together; None where no data were read.
    any_margin : bool
        Whether without data the extremes of every number of events are asked for; otherwise all events in one group
        and none in the other are farther away than any other table.
    """
    first, second = sizes
    if not first or not second:
        return []
    if all_events is None and not any_margin:
        return [Table(0, first, second, second), Table(first, first, second, first)]
    margins = range(first + second + 1) if all_events is None else (all_events,)
    tables = [Table(0, first, second, events) for events in margins]
    return [Table(x, first, second, table.all_events) for table in tables for x in (table.least, table.most)]


def smallest_score_p(score: Score, tables: list[Table], null: float, alternative: str, *, factor: bool) -> float:
    """Give the smallest p of a score test over these tables, with or without the factor for small samples."""
    if not tables:
        return 1.0
    z = [small_sample(table, factor) * score(table, null) for table in tables]
    farthest = {"above": max(z), "below": -min(z), "two_sided": max(map(abs, z))}[alternative]
    tail = float(special.ndtr(-farthest))
    return min(1.0, 2 * tail) if alternative == "two_sided" else tail
