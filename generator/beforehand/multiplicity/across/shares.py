"""Shares: each family has its own part of the level, fixed beforehand."""

from collections.abc import Mapping
from fractions import Fraction
from typing import Any

import numpy as np

from beforehand.multiplicity.contract import WHOLE
from beforehand.multiplicity.scheme import Decisions, Families, decide, one_level, scheme


@scheme(
    title="Shares of the level",
    keeps="The error rate of the whole study stays at the level, because the families' levels sum to it.",
    decides="p_study",
    replays=WHOLE,
    reference="Boole's inequality; Dunn (1961), Journal of the American Statistical Association 56:52-64",
)
def shares(families: Families, *, shares: Mapping[str, float | str]) -> Decisions:
    """Test each family at its share of the level; nothing is passed on.

    p_study is p_family / share, capped at 1: all local levels move in proportion to the study level.

    Parameters
    ----------
    families : sequence of FamilyResult
        In any order.
    shares : mapping from id to number, or fraction as text
        The share of the level of each family; they sum to at most 1.

    Returns
    -------
    tuple of FamilyDecision
        One for each family, all of them tested.

    Raises
    ------
    ValueError
        When the families don't share one level.

    Notes
    -----
    Needs families whose procedure keeps the family-wise error rate strongly; nothing is assumed of the dependence
    between families.
    """
    level = one_level(families)
    decisions = []
    for family in families:
        share = float(Fraction(shares[family.id]))
        p_study = np.minimum(family.p_family / share, 1.0)
        decisions.append(decide(family, decides="p_study", p_study=p_study, local_level=share * level))
    return tuple(decisions)


def replay(families: list[dict[str, Any]], shares: dict[str, Any]) -> list[dict[str, Any]]:
    """Each family's own procedure is run at its part of the level."""
    from fractions import Fraction

    again: list[dict[str, Any]] = []
    for family in families:
        share = Fraction(str(shares[family["id"]]))
        local = family["level"] * share.numerator / share.denominator
        judged = family["judge"](local)
        p_study = [min(1.0, p * share.denominator / share.numerator) for p in judged["adjusted"]]
        again.append({
            "closed_by": "", "local_level": local, "p_family": judged["adjusted"], "p_study": p_study,
            "tested": [True] * len(p_study), "rejected": judged["rejected"],
        })  # fmt: skip
    return again
