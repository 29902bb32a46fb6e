"""Separate promises: each family stands on its own."""

from typing import Any

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
        decide(family, decides="p_family", p_study=np.full_like(family.p_family, np.nan), local_level=family.level)
        for family in families
    )


def replay(families: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Every family is tested at its own level; there is no study level, and so no p_study."""
    again: list[dict[str, Any]] = []
    for family in families:
        judged = family["judge"](family["level"])
        none = [None] * len(judged["adjusted"])
        again.append({
            "closed_by": "", "local_level": family["level"], "p_family": judged["adjusted"], "p_study": none,
            "tested": [True] * len(none), "rejected": judged["rejected"],
        })  # fmt: skip
    return again
