"""Several 2 x 2 tables with one odds ratio: exact, by its score, and by the estimate of Mantel and Haenszel."""

import math
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray
from scipy import special

from beforehand.hypothesis_tests import normal
from beforehand.hypothesis_tests.beside import Strata, strata_numbers
from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.two_by_two import Hypergeometric, Table, increasing_root
from beforehand.spelling import integer, p_value, short

Events = NDArray[np.bool_]


def tables_of(first: Events, second: Events, strata: Strata) -> tuple[Table, ...]:
    """Give the table of each stratum, in the order of the strata."""
    numbers = strata_numbers(strata)
    many = 1 + max((int(one.max(initial=-1)) for one in numbers), default=-1)
    counts = [
        np.bincount(of[keep], minlength=many)
        for of, group in zip(numbers, (first, second), strict=True)
        for keep in (group, np.ones_like(group))
    ]
    a, n1, c, n2 = (column.tolist() for column in counts)
    return tuple(Table(a[s], n1[s], n2[s], a[s] + c[s]) for s in range(many))


def informative(tables: tuple[Table, ...]) -> tuple[Table, ...]:
    """Keep the tables whose margins leave the events of the first group free."""
    return tuple(table for table in tables if table.least < table.most)


@dataclass(frozen=True)
class Together:
    """The conditional distribution of the events in the first group of all strata, for any common odds ratio."""

    parts: tuple[Hypergeometric, ...]

    @classmethod
    def of(cls, tables: tuple[Table, ...]) -> "Together":
        """Give the distribution of each stratum."""
        return cls(tuple(Hypergeometric.of(table) for table in tables))

    @cached_property
    def total(self) -> Hypergeometric:
        """The distribution of the sum."""
        whole = self.parts[0]
        for part in self.parts[1:]:
            whole = _added(whole, part)
        here = whole.log_weights[np.flatnonzero(whole.away == 0)[0]]
        return Hypergeometric(whole.away, whole.log_weights - here)

    def z(self, log_ratio: float, continuity: float) -> float:
        """Give how far the sum lies above its mean, less the continuity correction, in standard deviations."""
        mean = variance = 0.0
        for part in self.parts:
            terms = part.log_weights + part.away * log_ratio
            weights = np.exp(terms - terms.max())
            weights /= weights.sum()
            centre = float((part.away * weights).sum())
            mean += centre
            variance += float(((part.away - centre) ** 2 * weights).sum())
        return (-mean - continuity) / math.sqrt(variance) if variance > 0 else 0.0

    @property
    def range(self) -> tuple[float, float]:
        """How many events fewer, and more, the first group could have."""
        return sum(float(part.away[0]) for part in self.parts), sum(float(part.away[-1]) for part in self.parts)

    def estimate(self) -> float:
        """Give the odds ratio at which the mean is what was observed."""
        if 0.0 in self.range:
            return 0.0 if self.range[0] == 0 else math.inf
        return math.exp(increasing_root(lambda log_ratio: -self.z(log_ratio, 0.0)))

    def score_ends(self, critical: float, continuity: float) -> Interval:
        """Give the odds ratios from which the sum lies a critical number of standard deviations away."""
        lower, upper = 0.0, math.inf
        if self.range[0] < 0:
            lower = math.exp(increasing_root(lambda log_ratio: critical - self.z(log_ratio, continuity)))
        if self.range[1] > 0:
            upper = math.exp(increasing_root(lambda log_ratio: -critical - self.z(log_ratio, -continuity)))
        return Interval(lower, upper)


@dataclass(frozen=True)
class Judged:
    """What one method finds: p of both sides, the estimate and the interval."""

    above: float
    below: float
    estimate: float
    interval: Interval


def exact(tables: tuple[Table, ...], null: float, asked: Asked) -> Judged:
    """Judge by the conditional distribution of the events in the first group."""
    together = Together.of(tables)
    total = together.total
    ends = Interval(total.lower(asked.tail), total.upper(asked.tail))
    above, below = math.exp(total.log_above(null)), math.exp(total.log_below(null))
    return Judged(above, below, together.estimate(), ends)


def score(tables: tuple[Table, ...], null: float, asked: Asked, *, continuity: bool) -> Judged:
    """Judge by mean and variance of the same events."""
    together, correction = Together.of(tables), 0.5 * continuity
    above = normal.upper_tail(together.z(null, correction))
    below = normal.upper_tail(-together.z(null, -correction))
    ends = together.score_ends(normal.critical(asked.tail), correction)
    return Judged(above, below, together.estimate(), ends)


def weighed(tables: tuple[Table, ...], null: float, asked: Asked) -> Judged | None:
    """Judge by the estimate of Mantel and Haenszel; None where it has no error."""
    found = MantelHaenszel.of(tables)
    if math.isnan(found.error):
        return None
    centre, half = math.log(found.odds_ratio), normal.critical(asked.tail) * found.error
    z = (centre - null) / found.error
    ends = Interval(math.exp(centre - half), math.exp(centre + half))
    return Judged(normal.upper_tail(z), normal.upper_tail(-z), found.odds_ratio, ends)


def extremes(strata: Strata, pooled: Events | None) -> Iterator[tuple[Events, Events]]:
    """Give the events to the groups so that the first has as many, then as few, as each stratum allows.

    ``pooled`` holds the events of one stratum after the other, in the order of their names. Where they are not known,
    any number is possible: p is smallest when one group has all the events there are.
    """
    numbers = np.concatenate(strata_numbers(strata))
    first = np.arange(numbers.size) < strata[0].size
    for served_first in (first, ~first):
        happened = served_first.astype(np.float64) if pooled is None else pooled
        events = np.bincount(numbers if pooled is None else np.sort(numbers), weights=happened)
        # within its stratum each row has a place, the favoured group's before the other's
        order = np.lexsort((~served_first, numbers))
        place = np.empty(numbers.size)
        place[order] = np.arange(numbers.size) - np.searchsorted(numbers[order], numbers[order])
        has_event = place < events[numbers]
        yield has_event[first], has_event[~first]


def _added(one: Hypergeometric, other: Hypergeometric) -> Hypergeometric:
    """Give the distribution of the sum of two."""
    long, short_ = (one, other) if one.away.size >= other.away.size else (other, one)
    log_weights = np.full(long.away.size + short_.away.size - 1, -math.inf)
    for place, log_weight in enumerate(short_.log_weights):
        part = slice(place, place + long.away.size)
        log_weights[part] = np.logaddexp(log_weights[part], long.log_weights + log_weight)
    start = long.away[0] + short_.away[0]
    return Hypergeometric(np.arange(log_weights.size) + start, log_weights)


@dataclass(frozen=True)
class MantelHaenszel:
    """The estimate of Mantel and Haenszel, and the standard error of its logarithm; NaN where there is none."""

    odds_ratio: float
    error: float

    @classmethod
    def of(cls, tables: tuple[Table, ...]) -> "MantelHaenszel":
        """Weigh the odds ratios of the strata (Robins, Breslow and Greenland 1986, equation 3)."""
        a, b, c, d, n = _cells(tables)
        same, other = (a + d) / n, (b + c) / n
        up, down = a * d / n, b * c / n
        r, s = math.fsum(up), math.fsum(down)
        if not (r and s):
            return cls(math.nan if not (r or s) else math.inf if r else 0.0, math.nan)
        squared = (
            math.fsum(same * up) / (2 * r * r)
            + math.fsum(same * down + other * up) / (2 * r * s)
            + math.fsum(other * down) / (2 * s * s)
        )
        return cls(r / s, math.sqrt(squared))


def _cells(tables: tuple[Table, ...]) -> tuple[Values, ...]:
    a = np.array([table.events for table in tables], dtype=np.float64)
    n1, n2 = (np.array([getattr(table, word) for table in tables], dtype=np.float64) for word in ("first", "second"))
    c = np.array([table.all_events for table in tables], dtype=np.float64) - a
    return a, n1 - a, c, n2 - c, n1 + n2


def equal_ratios(tables: tuple[Table, ...], odds_ratio: float) -> tuple[str, ...]:
    """Say whether the strata agree on their odds ratio (Breslow and Day 1980; Tarone 1985, equation 3)."""
    if len(tables) < 2 or not 0 < odds_ratio < math.inf:
        return ()
    away, weights = [], []
    for table in tables:
        fitted = _fitted(table, odds_ratio)
        rest = (fitted, table.first - fitted, table.all_events - fitted, table.second - table.all_events + fitted)
        weights.append(1 / sum(1 / cell for cell in rest))
        away.append(table.events - fitted)
    squares = sum(x * x / v for x, v in zip(away, weights, strict=True)) - sum(away) ** 2 / sum(weights)
    df = len(tables) - 1
    p = float(special.chdtrc(df, max(0.0, squares)))
    return (
        f"Breslow-Day test (Tarone) of equal odds ratios in the {integer(len(tables))} strata that tell something: "
        f"χ² {short(squares, 3)}, df {df}, p {p_value(p)}. Where they differ, the common odds ratio is an average.",
    )


def _fitted(table: Table, ratio: float) -> float:
    """Give the events of the first group with which the table has this odds ratio: the root of a quadratic."""
    if ratio == 1:
        return table.first * table.all_events / (table.first + table.second)
    spare = table.second - table.all_events
    linear = ratio * (table.first + table.all_events) + spare
    root = math.sqrt(linear**2 - 4 * (ratio - 1) * ratio * table.first * table.all_events)
    return 2 * ratio * table.first * table.all_events / (linear + root)
