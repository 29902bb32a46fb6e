"""What the plan gives each hypothesis of a family: its share of the level, and its place in a written order."""

import math

import numpy as np
from numpy.typing import NDArray

from beforehand.multiplicity.contract import Ascending, Ranks, Vector

NO_SHARE = "weight 0: no share of the level"


def shares_of(weights: Vector) -> Vector:
    """Give each weight as its share of their sum: only the ratios of the weights matter.

    Raises
    ------
    ValueError
        When a weight is missing, infinite or negative, or all of them are 0.
    """
    if not np.all(np.isfinite(weights) & (weights >= 0)):
        raise ValueError("weights are numbers from 0 on")
    if weights.size and not np.any(weights > 0):
        raise ValueError("all weights are 0, so nothing could be rejected")
    return weights / math.fsum(weights)  # exact, so that the order in which they come changes no digit


def order_of(positions: NDArray[np.int64]) -> Ranks:
    """Give the hypotheses in the written order, first to last.

    Raises
    ------
    ValueError
        When two hypotheses have the same place.
    """
    order = np.argsort(positions, kind="stable")
    if np.any(np.diff(positions[order]) == 0):
        raise ValueError("two hypotheses have the same place in the written order")
    return order


def per_share(p: Ascending, share: Vector) -> Vector:
    """Give p / share: infinite without a share, but 0 where p is 0, which no valid test gives a true null."""
    ratio = np.divide(p, share, out=np.full(p.size, np.inf), where=share > 0)
    return np.where(p == 0, 0.0, ratio)


def product_of(p: Ascending, factor: Vector) -> Vector:
    """Give factor x p; where there is no factor because there is no share, 1, but 0 where p is 0."""
    return np.where(np.isnan(factor), np.where(p == 0, 0.0, 1.0), factor * p)
