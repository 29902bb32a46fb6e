"""Whether a family succeeds when that takes several rejections together."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from beforehand.multiplicity.contract import Vector
from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.partial_conjunction import partial_conjunction


@dataclass(frozen=True, kw_only=True)
class Success:
    """What one family's claim about several of its hypotheses together came to."""

    at_least: int
    """How many null hypotheses have to be false."""
    p: float
    """The joint p: of the null that fewer are."""
    level: float
    """The level at which the family was tested; 0 behind a closed gate."""
    reached: bool
    """Whether the joint p meets it."""


def success(p: Vector, counts: NDArray[np.bool_], *, at_least: int, level: float) -> Success:
    """Judge a claim about several hypotheses of a family together; it words the verdict, and opens no gate.

    The joint p is that of the partial conjunction, (m - r + 1) x the r-th smallest p, valid under any dependence
    (Benjamini & Heller 2008); with r = m, the largest p (Berger 1982). Counting unadjusted rejections instead errs in
    9.75 % of studies with one real effect among three hypotheses and r = 2, at a level of 5 %.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of the family.
    counts : ndarray of bool, shape (m,)
        Whether each can count: with a result, and not against its claim; the others enter with p = 1.
    at_least : int
        r, from 1 to m.
    level : float
        The level at which the family was tested; 0 behind a closed gate.

    Returns
    -------
    Success
        Reached if and only if the joint p meets a level above 0.
    """
    joint = partial_conjunction(np.where(counts, p, 1.0), at_least=at_least).p
    return Success(at_least=at_least, p=joint, level=level, reached=level > 0 and is_rejected(joint, level))
