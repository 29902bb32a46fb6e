"""Intervals for a location from a test of it: the null values that the same test keeps."""

import math
from bisect import bisect_left
from collections.abc import Callable
from dataclasses import dataclass

from beforehand import spelling
from beforehand.hypothesis_tests.contract import Outcome, Values
from beforehand.hypothesis_tests.sides import Asked

OPEN_END = "The null value is itself an end of the interval, and the test rejects it: this end does not belong to it."
DIFFER = (
    "p and interval disagree at this level: ties or zeros at the null value change the distribution that p is taken "
    "from, while the interval is built from the values between."
)


@dataclass(frozen=True)
class Tails:
    """The p-values of both sides at one null value."""

    above: float
    below: float


@dataclass(frozen=True)
class Interval:
    """A two-sided interval; an end that the data can't fix is infinite."""

    lower: float
    upper: float


def kept(critical: Values, tails: Callable[[float], Tails], asked: Asked) -> Interval:
    """Collect the null values that neither side rejects.

    Parameters
    ----------
    critical : ndarray, shape (r,)
        Ascending, distinct: the null values at which p changes. Between two of them p is constant.
    tails : callable
        The p-values at a null value. ``above`` never decreases along the null values, ``below`` never increases:
        so each end is found by halving.
    asked : Asked
        Its ``tail`` is the level of each side.

    Returns
    -------
    Interval
        The closed interval. Whether an end itself is kept depends on the ties there.
    """
    gaps = critical.size + 1  # gap i lies between critical[i - 1] and critical[i]
    lower = bisect_left(range(gaps), True, key=lambda i: asked.keeps(tails(_within(critical, i)).above))
    upper = bisect_left(range(gaps), True, key=lambda i: asked.keeps(tails(_within(critical, gaps - 1 - i)).below))
    return Interval(
        float(critical[lower - 1]) if lower else -math.inf,
        float(critical[-upper]) if upper else math.inf,
    )


def _within(critical: Values, gap: int) -> float:
    """Give a value inside a gap between critical values."""
    if gap == 0:
        return -math.inf
    if gap == critical.size:
        return math.inf
    return float(critical[gap - 1] / 2 + critical[gap] / 2)


def kept_by_count(pairs: int, above: Callable[[float], float], kth: Callable[[int], float], asked: Asked) -> Interval:
    """Collect the null values that neither side rejects, when p depends on one count alone and is symmetric.

    Parameters
    ----------
    pairs : int
        How many critical values there are, equal ones counted each.
    above : callable
        p of the upper side when so many critical values lie above the null value.
    kth : callable
        The k-th smallest critical value, from 1.
    asked : Asked
        Its ``tail`` is the level of each side.
    """
    k = bisect_left(range(pairs + 1), True, key=lambda below: asked.keeps(above(pairs - below)))
    return Interval(kth(k), kth(pairs + 1 - k)) if k else Interval(-math.inf, math.inf)


def contradictions(asked: Asked, p: float, interval: Interval, null_value: float) -> tuple[str, ...]:
    """Say where p and interval don't tell the same, and why.

    Parameters
    ----------
    null_value : float
        The null value asked for, or the critical value that it equals but for rounding.
    """
    bounds = {
        "above": Interval(interval.lower, math.inf),
        "below": Interval(-math.inf, interval.upper),
        "two_sided": interval,
    }[asked.alternative]
    inside = bounds.lower <= null_value <= bounds.upper
    if asked.rejects(p) != inside:
        return ()
    return (OPEN_END,) if null_value in (bounds.lower, bounds.upper) else (DIFFER,)


def without_end(interval: Interval, asked: Asked) -> tuple[str, ...]:
    """Say that the data are too few for an interval."""
    missing = [word for word, end in (("lower", interval.lower), ("upper", interval.upper)) if not math.isfinite(end)]
    if not missing:
        return ()
    confidence = spelling.percent(asked.confidence)
    return (f"So few values allow no {' and no '.join(missing)} end of an interval with a confidence of {confidence}.",)


@dataclass(frozen=True, kw_only=True)
class Located:
    """What a rank test finds about a location: estimate, interval, statistic and the p-values of both sides.

    ``null_value`` is the one asked for, or the critical value that it equals but for rounding.
    """

    estimate: float
    interval: Interval
    statistic: float
    tails: Tails
    null_value: float

    def outcome(self, asked: Asked, *, n: tuple[int, ...], rule: str) -> Outcome:
        """Write it as the outcome of a test, with what has to be said about interval and p."""
        p = asked.p(above=self.tails.above, below=self.tails.below)
        remarks = (rule, *without_end(self.interval, asked), *contradictions(asked, p, self.interval, self.null_value))
        return Outcome(
            estimate=self.estimate,
            lower=self.interval.lower,
            upper=self.interval.upper,
            statistic=self.statistic,
            p=p,
            n=n,
            remarks=remarks,
        )
