"""Two computations compared: the rule of the design, number by number."""

import math

import pytest

from beforehand.analysis.agreement import Agreement, bound_near, relative_difference
from beforehand.errors import TwoComputationsDisagree


@pytest.mark.parametrize(
    ("x", "y", "floor", "expected"),
    [
        (0.5, 0.5, 1e-300, 0.0),
        (math.nan, math.nan, 1e-300, 0.0),
        (math.inf, math.inf, 1e-300, 0.0),
        (1.0, 1.1, 1e-300, 0.1 / 1.1),
        (1.0, math.nan, 1e-300, math.inf),
        (1e-320, 2e-320, 1e-300, 1e-20),  # |x - y| / floor: below the floor there is nothing to compare
        (0.0, 1e-12, 1e-8, 1e-4),
    ],
)
def test_relative_difference(x: float, y: float, floor: float, expected: float) -> None:
    assert relative_difference(x, y, floor=floor) == pytest.approx(expected, rel=1e-3)


def test_far_from_the_threshold_a_hundredth_of_the_distance_bounds() -> None:
    # 0.0499 is 0.002 (relative to 0.05) away: a hundredth of that is 2e-5, so the bound of 1e-4 is tightened
    assert bound_near(0.05, 0.0499, bound=1e-4) == pytest.approx(2e-5)
    assert bound_near(0.05, 0.01, bound=1e-9) == 1e-9
    assert bound_near(0.05, 0.05, bound=1e-6) == 1e-6
    assert bound_near(0.05, 0.05 * (1 - 1e-10), bound=1e-6) == 1e-6


def test_settles_with_the_largest_of_each_quantity() -> None:
    agreement = Agreement()
    agreement.numbers("a", "p", 0.5, 0.5, bound=1e-9)
    agreement.numbers("b", "p", 0.5, 0.5 + 1e-12, bound=1e-9)
    agreement.numbers("a", "estimate", 1.0, 1.0, bound=1e-9)
    p, estimate = agreement.settle()
    assert (p.quantity, p.compared, p.about) == ("p", 2, "b")
    assert p.largest == pytest.approx(2e-12, rel=1e-3)
    assert (estimate.largest, estimate.about) == (0.0, "")


def test_over_the_bound_both_numbers_are_named() -> None:
    agreement = Agreement()
    agreement.numbers("a", "p", 0.5, 0.50001, bound=1e-9)
    with pytest.raises(TwoComputationsDisagree) as stopped:
        agreement.settle()
    assert str(stopped.value) == (
        "The two computations disagree, so no report was written.\n"
        "This is a defect of beforehand: please report it with the folder that holds both numbers.\n"
        "  a: p 0.5 and 0.50001"
    )


def test_another_decision_stops_whatever_the_distance() -> None:
    agreement = Agreement()
    assert agreement.same("a", "decision", "rejected", "rejected")
    assert not agreement.same("b", "decision", "rejected", "not_rejected")
    with pytest.raises(TwoComputationsDisagree, match="b: decision rejected and not_rejected"):
        agreement.settle()
