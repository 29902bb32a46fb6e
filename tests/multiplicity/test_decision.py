"""The one comparison."""

import numpy as np
import pytest

from beforehand.multiplicity.decision import is_rejected


@pytest.mark.parametrize(
    ("value", "expected"),
    [(0.05, True), (0.05 * (1 + 5e-13), True), (0.05 * (1 + 2e-12), False), (0.0, True), (1.0, False)],
)
def test_rounding_decides_nothing(value: float, expected: bool) -> None:
    assert is_rejected(value, 0.05) is expected


def test_arrays_and_thresholds_of_their_own() -> None:
    decided = is_rejected(np.array([0.01, 0.02, np.nan]), np.array([0.01, 0.01, 0.05]))
    assert decided.tolist() == [True, False, False]
