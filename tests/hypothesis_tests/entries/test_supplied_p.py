"""Supplied p-values are checked and passed on. There is no number to compare: none is computed."""

import math
from typing import Any

import numpy as np
import pytest

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.supplied_p import AS_GIVEN, OUTSIDE, ROUNDED, supplied_p


@pytest.mark.parametrize("wrap", [float, np.array, lambda number: np.array([number])])
def test_passed_on(wrap: Any, outcome: Any) -> None:
    found = outcome(supplied_p(wrap(0.031), wrap(1.4), wrap(0.1), wrap(2.7)))
    assert (found.p, found.estimate, found.lower, found.upper) == (0.031, 1.4, 0.1, 2.7)
    assert found.n == ()
    assert found.remarks == (AS_GIVEN,)
    again = supplied_p.again(wrap(0.031), wrap(1.4), wrap(0.1), wrap(2.7))
    assert repr(found) == repr(again)  # repr: a missing statistic is not equal to itself


def test_alone(outcome: Any) -> None:
    found = outcome(supplied_p(0.5))
    assert found.p == 0.5
    assert all(math.isnan(number) for number in (found.estimate, found.lower, found.upper, found.statistic))


def test_remarks(outcome: Any) -> None:
    assert outcome(supplied_p(0.0, 1.4, 1.5, 2.7)).remarks == (AS_GIVEN, ROUNDED, OUTSIDE)
    assert outcome(supplied_p(0.2, lower=3, upper=2)).remarks == (AS_GIVEN, OUTSIDE)


@pytest.mark.parametrize(
    ("p", "reason"),
    [
        (math.nan, "no p-value was supplied"),
        (1.2, "the supplied p-value, 1.2, does not lie between 0 and 1"),
        (-1e-9, "the supplied p-value, -1e-09, does not lie between 0 and 1"),
    ],
)
def test_no_result(p: float, reason: str) -> None:
    assert supplied_p(p) == supplied_p.again(p) == NotComputed(reason)
