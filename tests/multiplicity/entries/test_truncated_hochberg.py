"""Truncated Hochberg: the printed thresholds, and both ends of the mixture."""

from typing import Any

import numpy as np
import pytest

from beforehand.multiplicity.entries.bonferroni import bonferroni
from beforehand.multiplicity.entries.hochberg import hochberg
from beforehand.multiplicity.entries.truncated_hochberg import truncated_hochberg

P = np.random.default_rng(4).random(12) ** 4


def test_thresholds(entry: Any) -> None:
    known = entry("truncated_holm", "truncated-holm-levels")  # the thresholds are the same; grade C: see the file
    steps = truncated_hochberg.steps([0.01, 0.02, 0.03], truncation=known["params"]["gamma"])
    found = steps.thresholds(known["params"]["alpha"])
    assert found == pytest.approx(known["expected"]["levels"], abs=known["tolerance"]["abs"])


def test_by_hand() -> None:
    # m = 2, g = 1/2: shares 1/2 and 1/2 / 1 + 1/4 = 3/4
    assert truncated_hochberg([0.027, 0.02], truncation=0.5) == pytest.approx([0.036, 0.036])
    assert truncated_hochberg([0.06, 0.02], truncation=0.5) == pytest.approx([0.08, 0.04])


def test_both_ends() -> None:
    assert truncated_hochberg(P, truncation=0.0) == pytest.approx(bonferroni(P), rel=1e-14)
    assert truncated_hochberg(P, truncation=1 - 1e-15) == pytest.approx(hochberg(P), rel=1e-13)


@pytest.mark.parametrize("truncation", [0.1, 0.5, 0.9])
def test_it_lies_between_bonferroni_and_hochberg(truncation: float) -> None:
    found = truncated_hochberg(P, truncation=truncation)
    assert np.all(hochberg(P) <= found * (1 + 1e-14))
    assert np.all(found <= bonferroni(P) * (1 + 1e-14))


def test_there_is_no_default() -> None:
    with pytest.raises(TypeError, match="truncation"):
        truncated_hochberg([0.1])
