"""The second route of the normal distribution: the C library's erfc, and the quantile by Wichura's rational functions.

Wichura (1988), Applied Statistics 37:477-484 (algorithm AS 241), as Python's standard library has it. Nothing of scipy.
"""

import math
from decimal import Decimal
from statistics import NormalDist

from beforehand.hypothesis_tests.sides import Asked


def upper_tail(z: float) -> float:
    """Give P(Z >= z)."""
    return math.erfc(z / math.sqrt(2)) / 2


def critical(tail: float) -> Decimal:
    """Give the z whose upper tail is this one, as a decimal for what follows."""
    return Decimal(-NormalDist().inv_cdf(tail))


def p_of(asked: Asked, z: Decimal) -> float:
    """Give the p of the side asked for."""
    above, below = upper_tail(float(z)), upper_tail(-float(z))
    return {"above": above, "below": below, "two_sided": min(1.0, 2 * min(above, below))}[asked.alternative]
