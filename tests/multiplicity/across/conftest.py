"""Families for the tests of schemes: from their adjusted p, or adjusted by a procedure."""

from typing import Any

import numpy as np
import pytest

from beforehand.multiplicity.contract import PROCEDURES
from beforehand.multiplicity.scheme import FamilyResult


def family(
    name: str, *p: float | None, procedure: str = "", against: tuple[int, ...] = (), level: float = 0.05, **given: Any
) -> FamilyResult:
    """Make one family; None among the p-values is a missing result. Without a procedure p is taken as adjusted."""
    entered = [1.0 if value is None else value for value in p]
    return FamilyResult(
        id=name,
        p_family=np.asarray(PROCEDURES[procedure](entered, **given) if procedure else entered, dtype=np.float64),
        has_result=np.array([value is not None for value in p], dtype=bool),
        against_claim=np.isin(np.arange(len(p)), against),
        level=level,
        members=tuple(f"{name}_{i}" for i in range(1, len(p) + 1)),
    )


@pytest.fixture(name="family")
def family_() -> Any:
    return family
