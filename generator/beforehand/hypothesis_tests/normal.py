"""Tails and quantiles of the standard normal distribution, by scipy."""

from scipy import special

from beforehand.hypothesis_tests.sides import Asked


def upper_tail(z: float) -> float:
    """Give P(Z >= z), small values to all their digits."""
    return float(special.ndtr(-z))


def critical(tail: float) -> float:
    """Give the z whose upper tail is this one, for a tail below 1/2."""
    return -float(special.ndtri(tail))


def p_of(asked: Asked, z: float) -> float:
    """Give the p of the side asked for, of a z that grows with the estimate."""
    return asked.p(above=upper_tail(z), below=upper_tail(-z))
