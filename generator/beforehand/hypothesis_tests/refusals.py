"""Why a test can't be computed from these data, in plain words. Both routes of a test ask here."""

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests.contract import NotComputed, Values

UNIT = 2.0**-53  # a rounded operation is wrong by at most this share of its result


def count(n: int, noun: str) -> str:
    """Write a number of things: "1 value", "12 values"."""
    return f"{n} {noun}" if n == 1 else f"{n} {noun}s"


def too_few(n: int, least: int, *, noun: str, whose: str = "") -> str | None:
    """Say that fewer units are there than the test needs, or None."""
    if n >= least:
        return None
    there = f"there is {count(n, noun)}" if n == 1 else f"there are {n} {noun}s"
    return f"at least {count(least, noun)}{whose} {'is' if least == 1 else 'are'} needed; {there}"


def varies(values: Values, error: NDArray[np.float64] | float | None = None) -> bool:
    """Whether values differ by more than rounding explains.

    Parameters
    ----------
    values : ndarray, shape (n,)
        Values in any unit.
    error : ndarray, shape (n,), or float, optional
        By how much each value may be off through rounding. By default two units of rounding: values computed from
        equal inputs by one or two steps of arithmetic.
    """
    if values.size < 2:
        return False
    allowed = 2 * UNIT * np.abs(values) if error is None else error
    return bool((values - allowed).max() > (values + allowed).min())


def first_reason(*reasons: str | None, n: tuple[int, ...]) -> NotComputed | None:
    """Refuse with the first reason that applies, or not at all."""
    for reason in reasons:
        if reason is not None:
            return NotComputed(reason, n)
    return None
