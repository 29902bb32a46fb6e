"""What the two rank correlations share: refusals, the interval on the scale artanh, and what they say about it."""

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, Values
from beforehand.hypothesis_tests.rank_methods import SizeRule
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few, varies
from beforehand.hypothesis_tests.sides import Asked

# Counting all orders of 10 distinct values takes 0.1 s, of 12 about 1 s.
RULE = SizeRule("rows", by_size=10, at_most=12)
PERFECT = 1 - 1e-12
NO_INTERVAL = "There is no interval: the approximation that it rests on has none at {why}."
APPROXIMATE = (
    "For a null value other than 0, p inverts the interval, and is as approximate as this: the distribution of a rank "
    "correlation is known under independence only."
)
DIFFER = (
    "p and interval disagree at this level: p is that of independence, while the interval is an approximation of its "
    "own on the scale artanh."
)


@dataclass(frozen=True)
class Around:
    """A rank correlation with its approximate interval, and how far the null value lies away in standard errors."""

    estimate: float
    lower: float
    upper: float
    z: float
    why_not: str
    """Why there is no interval; "" where there is one."""

    def outcome(self, asked: Asked, *, p: float, statistic: float, df: float, n: int, rule: str) -> Outcome:
        """Put the result together, and say where p and interval contradict each other."""
        remarks = [rule] if asked.null_value == 0 else [APPROXIMATE]
        if self.why_not:
            remarks.append(NO_INTERVAL.format(why=self.why_not))
        elif asked.alternative == "two_sided" and asked.rejects(p) == (self.lower <= asked.null_value <= self.upper):
            remarks.append(DIFFER)
        return Outcome(
            estimate=self.estimate,
            lower=self.lower,
            upper=self.upper,
            statistic=statistic,
            df=df,
            p=p,
            n=(n,),
            remarks=tuple(remarks),
        )


def without_interval(estimate: float, n: int, least: int) -> str:
    """Say why the approximation has no interval, or ""."""
    if n < least:
        return f"fewer than {least} rows"
    return "a correlation of 1 or -1" if abs(estimate) > PERFECT else ""


def around(estimate: float, asked: Asked, critical: float, *, squared_error: float, why_not: str) -> Around:
    """Cut the interval on the scale artanh, where the error hardly depends on the correlation."""
    if why_not:
        return Around(estimate, math.nan, math.nan, math.nan, why_not)
    w, error = math.atanh(estimate), math.sqrt(squared_error)
    ends = (math.tanh(w - critical * error), math.tanh(w + critical * error))
    return Around(estimate, *ends, (w - math.atanh(asked.null_value)) / error, "")


def around_again(estimate: float, asked: Asked, critical: float, *, squared_error: float, why_not: str) -> Around:
    """Do the same with logarithms and powers: (1 + r) / (1 - r) is multiplied and divided by a factor."""
    if why_not:
        return Around(estimate, math.nan, math.nan, math.nan, why_not)
    odds, null = ((1 + r) / (1 - r) for r in (estimate, asked.null_value))
    factor = math.exp(2 * critical * squared_error**0.5)
    lower, upper = odds / factor, odds * factor
    z = (math.log(odds) - math.log(null)) / (2 * squared_error**0.5)
    return Around(estimate, (lower - 1) / (lower + 1), (upper - 1) / (upper + 1), z, "")


def without_p(asked: Asked, n: int, why_not: str) -> NotComputed | None:
    """Say why there is no p for another null value than 0, once the correlation is known."""
    told = f"for a null value other than 0, p rests on an approximation that has none at {why_not}"
    return NotComputed(told, (n,)) if why_not and asked.null_value else None


def refusal(first: Values, second: Values, method: str, *, instead: str) -> NotComputed | None:
    """Say why these columns have no rank correlation, or can't be counted exactly; what to use ``instead`` then."""
    n = first.size
    flat = [word for word, column in (("first", first), ("second", second)) if not varies(column)]
    constant = [f"all {count(n, 'value')} of the {word} column are equal" for word in flat]
    too_many = f"the exact distribution is counted for up to {RULE.at_most} rows; there are {n}. Use method: {instead}"
    return first_reason(
        too_few(n, 3, noun="row"),
        "; ".join(constant) or None,
        too_many if method == "exact" and n > RULE.at_most else None,
        n=(n,),
    )


def checked(null_value: float, asked: Asked) -> Asked:
    """Refuse a null value that no correlation has."""
    if not -1 < null_value < 1:
        raise ValueError(f"a correlation under the null hypothesis lies between -1 and 1; found {null_value!r}")
    return asked


def smallest(ask: Callable[[Values, Values], Result], n: int, pooled: Values | None, null_value: float) -> float:
    """Give the smallest attainable p: that of both columns ascending, or one against the other; 0 where it has none."""
    if null_value:
        return 0.0
    x, y = np.sort(np.tile(np.arange(n, dtype=np.float64), (2, 1)) if pooled is None else pooled)
    found = [ask(x, y[::step]) for step in (1, -1)]
    return min((one.p for one in found if isinstance(one, Outcome)), default=1.0)
