"""The numbers of one hypothesis as they are written everywhere in the report."""

import math
from dataclasses import dataclass

from beforehand.report.view.lines import Line
from beforehand.spelling import (
    NO_BREAK,
    between,
    decimal,
    decimals_for,
    exact,
    integer,
    p_value,
    percent,
    ratio,
    with_unit,
)
from beforehand.terms import State

MET: frozenset[State] = frozenset({"rejected", "rejected_against_claim"})


@dataclass(frozen=True, kw_only=True)
class Written:
    """An estimate with its ends, without units."""

    estimate: str
    lower: str
    upper: str
    matching_lower: str
    matching_upper: str
    standard_error: str


ENDS = ("estimate", "lower", "upper", "matching_lower", "matching_upper")


def written(line: Line) -> Written:
    """Write an estimate, its intervals and its standard error with one number of decimals."""
    values = {name: line.number(name) for name in ENDS}
    nulls, error = line.hypothesis.null_values, line.number("standard_error")
    if line.hypothesis.scale == "ratio":
        texts = {name: ratio(value, nulls) for name, value in values.items()}
        return Written(**texts, standard_error=ratio(error))
    decimals = decimals_for(values["lower"], values["upper"], values["estimate"], nulls)
    if not math.isnan(line.number("matching_level")):
        matching = decimals_for(values["matching_lower"], values["matching_upper"], values["estimate"], nulls)
        decimals = max(decimals, matching)
    texts = {name: decimal(value, decimals) for name, value in values.items()}
    return Written(**texts, standard_error=decimal(error, decimals + 1))


def size(line: Line) -> str:
    """Write the analysed units: "37 + 39" of two groups, or how many there are in all."""
    if line.count("n_second"):
        return f"{integer(line.count('n_first'))} + {integer(line.count('n_second'))}"
    return integer(line.count("n"))


def has_estimate(line: Line) -> bool:
    """Say whether there is an estimate to print."""
    return not math.isnan(line.number("estimate"))


def with_interval(line: Line) -> str:
    """Write "−8.2 kWh/day (95 % interval −12.9 to −3.5)"."""
    numbers = written(line)
    estimate = with_unit(numbers.estimate, line.hypothesis.unit)
    if math.isnan(line.number("lower")) and math.isnan(line.number("upper")):
        return estimate
    level = line.number("interval_level")
    kind = "supplied" if math.isnan(level) else percent(level)
    return f"{estimate} ({kind} interval {between(numbers.lower, numbers.upper)})"


def bound(line: Line) -> str:
    """Write the one-sided bound of a one-sided test: "≤ −3.5"; "" for other tests."""
    numbers = written(line)
    ends = {"above": ("≥", "lower", numbers.lower), "below": ("≤", "upper", numbers.upper)}
    if line.hypothesis.side not in ends:
        return ""
    sign, column, end = ends[line.hypothesis.side]
    return "" if math.isnan(line.number(column)) else f"{sign}{NO_BREAK}{end}"


def bound_level(line: Line) -> str:
    """Write the confidence of a one-sided bound: each end of an interval at 95 % is one at 97.5 %."""
    return percent(1 - (1 - line.number("interval_level")) / 2)


def p_of(line: Line, column: str = "p") -> str:
    """Write one of the p-values of a hypothesis, never on the wrong side of its threshold."""
    return p_value(line.number(column), line.threshold)


def deciding_name(line: Line) -> str:
    """Name the value that was compared with the threshold."""
    if line.family.promise.criterion == "per_comparison_error_rate":
        return "unadjusted p"
    return "adjusted p" if line.values["decides"] else "p"


def comparison(line: Line) -> str:
    """Write what was compared, in the direction that the state says: "adjusted p 0.0008 ≤ 0.025"."""
    sign = "≤" if line.state in MET else ">"
    words = f"{deciding_name(line)} {p_value(line.deciding, line.threshold)} {sign} {exact(line.threshold)}"
    return words.replace(" ", NO_BREAK)
