"""Serial gates: each family waits until everything before it is rejected."""

from typing import Any

import numpy as np

from beforehand.multiplicity.contract import WHOLE
from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.scheme import Decisions, Families, decide, one_level, scheme


@scheme(
    title="Serial gates",
    keeps="The error rate of the whole study stays at the level if each family's procedure keeps it within the family.",
    decides="p_study",
    replays=WHOLE,
    reference="Westfall & Krishen (2001), Journal of Statistical Planning and Inference 99:25-40",
)
def serial(families: Families) -> Decisions:
    """Test each family at the full level if and only if every member of those before it is rejected for its claim.

    p_study is the largest of the member's own p_family and all p_family before it, where a member before it that has
    no result, or whose estimate lies against its claim, counts as 1: at no level would it open the gate.

    Parameters
    ----------
    families : sequence of FamilyResult
        In the order of the promise. A family without members opens no gate.

    Returns
    -------
    tuple of FamilyDecision
        One for each family; ``closed_by`` names the first gate that stayed closed.

    Raises
    ------
    ValueError
        When the families don't share one level.

    Notes
    -----
    Needs families whose procedure keeps the family-wise error rate strongly; the dependence is that of the procedures.
    Any error in a later family implies one in each family before it that holds a true null, so the first such
    family's own error rate bounds the study's (Westfall & Krishen 2001).
    """
    level = one_level(families)
    decisions = []
    gate, closed_by = 0.0, ""
    for family in families:
        p_study = np.maximum(family.p_family, gate)
        decisions.append(decide(family, decides="p_study", p_study=p_study, local_level=level, closed_by=closed_by))
        gate = max(gate, family.opens_at)
        if not closed_by and not is_rejected(gate, level):
            closed_by = family.id
    return tuple(decisions)


def replay(families: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Walk the gates by the decisions of each family's own procedure; p_study is the largest p on the way."""
    closed_by = ""
    on_the_way = [0.0]
    again: list[dict[str, Any]] = []
    for family in families:
        judged, may_open = family["judge"](family["level"]), family["may_open"]
        p, rejected = judged["adjusted"], judged["rejected"]
        again.append({
            "closed_by": closed_by, "local_level": family["level"], "p_family": p,
            "p_study": [max([value, *on_the_way]) for value in p],
            "tested": [not closed_by] * len(p), "rejected": rejected,
        })  # fmt: skip
        on_the_way.append(max([p[i] if may_open[i] else 1.0 for i in range(len(p))], default=1.0))
        opened = [rejected[i] and may_open[i] for i in range(len(p))]
        if not closed_by and (not opened or not all(opened)):
            closed_by = family["id"]
    return again
