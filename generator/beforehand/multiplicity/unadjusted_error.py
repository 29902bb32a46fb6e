"""What an unadjusted reader would risk: the probability of at least one error among m true nulls."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from beforehand.multiplicity.contract import Vector


@dataclass(frozen=True, kw_only=True)
class UnadjustedError:
    """The family-wise error rate of m unadjusted tests of true nulls; all arrays have the shape of ``m``."""

    m: NDArray[np.int64]
    independent: Vector
    """1 - (1 - level)^m: when the tests are independent and each errs with probability exactly the level."""
    at_least: Vector
    """The level: when all tests err together."""
    at_most: Vector
    """min(1, m x level): when no two err together."""


def unadjusted_error(m: ArrayLike, *, level: float) -> UnadjustedError:
    """Give the probability of at least one error among m true nulls, each tested at the full level.

    Parameters
    ----------
    m : array_like of int
        Numbers of hypotheses, each at least 1.
    level : float
        The level of each test, between 0 and 1.

    Returns
    -------
    UnadjustedError
        The value under independence, and the bounds that hold under any dependence (Boole's inequality).

    Raises
    ------
    ValueError
        When a number of hypotheses is below 1 or no integer, or the level isn't between 0 and 1.
    """
    asked = np.asarray(m)
    counts = asked.astype(np.int64)
    if np.any(counts != asked) or np.any(counts < 1):
        raise ValueError("numbers of hypotheses are integers from 1 on")
    if not 0 < level < 1:
        raise ValueError(f"a level lies between 0 and 1; found {level}")
    # 1 - (1 - a)^m itself loses every digit of a level below 1e-16.
    independent = -np.expm1(counts * np.log1p(-level))
    return UnadjustedError(
        m=counts,
        independent=independent,
        at_least=np.full(counts.shape, level),
        at_most=np.minimum(counts * level, 1.0),
    )
