"""A p-value that was computed elsewhere, taken into a family as it is."""

import math
from typing import Any

import numpy as np

from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, statistical_test
from beforehand.terms import Alternative

AS_GIVEN = "p was computed elsewhere; nothing here can check it."
ROUNDED = "A p of exactly 0 was supplied: it must have been rounded or too small to hold."
OUTSIDE = "The supplied estimate does not lie in its supplied interval."


@statistical_test(
    title="Supplied p-value",
    design="supplied",
    outcome="supplied",
    scale="supplied",
    estimates="effect",
    parameter="θ",
    statistic="",
    p_is="as supplied",
    null="as stated by whoever computed p",
    assumptions=("p is valid: under its null hypothesis it is at most a with a probability of at most a",),
    second_route="the numbers read once more; nothing that lies behind them can be computed again",
    bound=1e-9,
    reference="none: no computation",
    independent_units=False,
    interval_inverts_p=False,
)
def supplied_p(
    p: Any,
    estimate: Any = math.nan,
    lower: Any = math.nan,
    upper: Any = math.nan,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = math.nan,
) -> Result:
    """Check a supplied p-value and pass it on with what came with it.

    Parameters
    ----------
    p : float or ndarray with one element
        The p-value.
    estimate, lower, upper : float or ndarray with one element
        Estimate and interval that came with it, in their own unit; NaN where none was supplied.
    null_value, alternative, confidence
        Taken so that every test is called alike; they change nothing.

    Returns
    -------
    Outcome or NotComputed
        The supplied numbers. No result when p is missing or not between 0 and 1.
    """
    given, middle, low, high = (_number(number) for number in (p, estimate, lower, upper))
    if math.isnan(given):
        return NotComputed("no p-value was supplied")
    if not 0 <= given <= 1:
        return NotComputed(f"the supplied p-value, {given!r}, does not lie between 0 and 1")
    return _passed_on(given, middle, low, high)


def second_route(
    p: Any,
    estimate: Any = math.nan,
    lower: Any = math.nan,
    upper: Any = math.nan,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = math.nan,
) -> Result:
    """Read the same numbers once more; there is nothing to compute, and what is said about them is shared."""
    given, middle, low, high = (_number(number) for number in (p, estimate, lower, upper))
    if math.isnan(given):
        return NotComputed("no p-value was supplied")
    if min(max(given, 0.0), 1.0) != given:
        return NotComputed(f"the supplied p-value, {given!r}, does not lie between 0 and 1")
    return _passed_on(given, middle, low, high)


def _number(supplied: Any) -> float:
    return float(np.asarray(supplied, dtype=np.float64).item())


def _passed_on(p: float, estimate: float, lower: float, upper: float) -> Outcome:
    rounded = (ROUNDED,) if p == 0 else ()
    outside = (OUTSIDE,) if estimate < lower or estimate > upper or lower > upper else ()
    return Outcome(
        estimate=estimate,
        lower=lower,
        upper=upper,
        statistic=math.nan,
        p=p,
        n=(),
        remarks=(AS_GIVEN, *rounded, *outside),
    )
