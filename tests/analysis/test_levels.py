"""How a level is read: doubling, sides, confidences; by the rules of the design and arithmetic."""

import pytest

from beforehand.analysis.levels import Reading


@pytest.mark.parametrize(
    ("level", "level_is", "shared_by", "confidence"),
    [
        (0.05, "two_sided", 1, 0.95),
        (0.05, None, 1, 0.95),
        (0.025, "one_sided", 1, 0.95),
        (0.05, "one_sided", 1, 0.90),  # equivalence with each side at 5 %: the 90 % interval
        (0.05, "two_sided", 10, 0.995),
        (0.025, "one_sided", 4, 0.9875),
    ],
)
def test_the_interval_has_the_level_per_side(level: float, level_is: object, shared_by: int, confidence: float) -> None:
    assert Reading(level, level_is).confidence(shared_by) == pytest.approx(confidence, abs=1e-15)  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("level_is", "one_sided", "direction", "how"),
    [
        ("two_sided", True, None, "doubled"),
        ("two_sided", False, "above", "as it is"),
        ("one_sided", True, None, "as it is"),
        ("one_sided", False, "below", "claim side"),
        (None, False, "either", "as it is"),
    ],
)
def test_how_p_enters(level_is: object, one_sided: bool, direction: object, how: str) -> None:
    reading = Reading(0.05, level_is)  # type: ignore[arg-type]
    assert reading.how_p_enters(one_sided=one_sided, direction=direction) == how  # type: ignore[arg-type]
