"""The family-wise error that an unadjusted reader would run."""

from decimal import Decimal, localcontext

import numpy as np
import pytest

from beforehand.multiplicity.unadjusted_error import unadjusted_error


@pytest.mark.parametrize("level", ["0.05", "0.025", "1e-9", "1e-18"])
@pytest.mark.parametrize("m", [1, 7, 1000, 10**6])
def test_against_fifty_digits(m: int, level: str) -> None:
    with localcontext() as exactly:
        exactly.prec = 50
        expected = 1 - (1 - Decimal(float(level))) ** m  # the double nearest to the level, as the code gets it
    assert unadjusted_error(m, level=float(level)).independent == pytest.approx(float(expected), rel=1e-14)


def test_bounds_of_any_dependence() -> None:
    found = unadjusted_error(np.arange(1, 200), level=0.05)
    assert np.all(found.at_least <= found.independent * (1 + 1e-15))
    assert np.all(found.independent <= found.at_most * (1 + 1e-15))
    assert found.at_most[1] == 0.1
    assert found.at_most[-1] == 1
    assert found.independent.shape == found.m.shape == (199,)


@pytest.mark.parametrize(("m", "level"), [(0, 0.05), (1.5, 0.05), ([3, -1], 0.05), (3, 0.0), (3, 1.0)])
def test_what_makes_no_sense_is_refused(m: object, level: float) -> None:
    with pytest.raises(ValueError, match=r"integers from 1 on|between 0 and 1"):
        unadjusted_error(m, level=level)  # type: ignore[arg-type]
