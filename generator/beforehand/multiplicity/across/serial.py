"""Serial gates: each family waits until everything before it is rejected."""

import numpy as np

from beforehand.multiplicity.contract import WHOLE
from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.scheme import Decisions, Families, decide, scheme


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
    if len({family.level for family in families}) > 1:
        raise ValueError("serial families are all tested at the full study level; found several levels")
    decisions = []
    gate, closed_by = 0.0, ""
    for family in families:
        p_study = np.maximum(family.p_family, gate)
        decisions.append(decide(family, decides="p_study", p_study=p_study, closed_by=closed_by))
        gate = max(gate, family.opens_at)
        if not closed_by and not is_rejected(gate, family.level):
            closed_by = family.id
    return tuple(decisions)


def replay(
    ids: list[str], p_family: list[list[float]], may_open: list[list[bool]], rejected: list[list[bool]]
) -> list[dict[str, object]]:
    """Walk the gates by the decisions of each family's own procedure; p_study is the largest p on the way."""
    closed_by = ""
    on_the_way = [0.0]
    again: list[dict[str, object]] = []
    for k, family in enumerate(ids):
        again.append({"closed_by": closed_by, "p_study": [max([p, *on_the_way]) for p in p_family[k]]})
        members = range(len(p_family[k]))
        on_the_way.append(max([p_family[k][i] if may_open[k][i] else 1.0 for i in members], default=1.0))
        opened = [rejected[k][i] and may_open[k][i] for i in members]
        if not closed_by and (not opened or not all(opened)):
            closed_by = family
    return again
