"""Separate promises: each family stands on its own."""

import numpy as np

from beforehand.multiplicity.contract import WHOLE
from beforehand.multiplicity.scheme import Decisions, Families, decide, scheme


@scheme(
    title="Separate promises",
    keeps="Each family keeps its own promise; nothing is promised of the families together.",
    decides="p_family",
    replays=WHOLE,
    reference="common practice, no source; families together: Boole's inequality, at most the sum of their levels",
)
def separate(families: Families) -> Decisions:
    """Decide each family at its own level; there is no p_study, for there is no study level.

    Parameters
    ----------
    families : sequence of FamilyResult
        In any order; each has its own level.

    Returns
    -------
    tuple of FamilyDecision
        One for each family, all of them tested; p_study is NaN.

    Notes
    -----
    Assumes nothing about the families together: k families at level a can err somewhere with probability up to k a.
    """
    return tuple(
        decide(family, decides="p_family", p_study=np.full_like(family.p_family, np.nan)) for family in families
    )


def replay(
    ids: list[str], p_family: list[list[float]], may_open: list[list[bool]], rejected: list[list[bool]]
) -> list[dict[str, object]]:
    """Every family is tested; there is no study level, and so no p_study."""
    return [{"closed_by": "", "p_study": [None] * len(p_family[k])} for k in range(len(ids))]
