"""The fixed sequence against a check value and its definition."""

from typing import Any

import numpy as np
import pytest

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.fixed_sequence import fixed_sequence


def test_reference(entry: Any) -> None:
    known = entry("fixed_sequence", "fixed-sequence-4-stop")
    adjusted = fixed_sequence(known["inputs"]["p"], positions=[0, 1, 2, 3])
    np.testing.assert_allclose(adjusted, known["expected"]["adjusted_p"], rtol=0, atol=known["tolerance"]["abs"])
    rejected = np.flatnonzero(is_rejected(adjusted, known["params"]["alpha"])) + 1
    assert rejected.tolist() == known["expected"]["rejected"]


def test_the_written_order_counts_and_not_the_order_of_the_members() -> None:
    # written: third, first, second
    p, positions = [0.03, 0.2, 0.01], [1, 2, 0]
    assert fixed_sequence(p, positions=positions).tolist() == [0.03, 0.2, 0.01]
    assert fixed_sequence(p, positions=[0, 1, 2]).tolist() == [0.03, 0.2, 0.2]
    assert fixed_sequence.replay(p, 0.05, positions=[0, 1, 2])["rejected"] == [True, False, False]


def test_the_rank_that_counts() -> None:
    steps = fixed_sequence.steps([0.03, 0.2, 0.01], positions=[0, 1, 2])
    # by rank: 0.01 (last in the order), 0.03, 0.2; the first takes the largest before it
    assert steps.taken_from.tolist() == [2, 1, 2]
    assert steps.thresholds(0.05).tolist() == [0.05] * 3


def test_two_with_one_place_are_refused() -> None:
    with pytest.raises(ValueError, match="the same place"):
        fixed_sequence([0.1, 0.2], positions=[1, 1])
