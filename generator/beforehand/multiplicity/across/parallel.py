"""Parallel gates: each family is tested at what the rejections before it have set free of the level."""

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from beforehand.multiplicity.contract import WHOLE, Vector
from beforehand.multiplicity.rising import RisingShare
from beforehand.multiplicity.scheme import Decisions, Families, FamilyResult, decide, one_level, scheme

SEPARABLE = ("bonferroni", "truncated_hochberg", "truncated_holm", "weighted_bonferroni")
"""The procedures of which it is known how much of the level they still need for what they have not rejected."""


@scheme(
    title="Parallel gates",
    keeps=(
        "The error rate of the whole study stays at the level: a family passes on only what its procedure can't spend "
        "any more on the hypotheses that it did not reject."
    ),
    decides="p_study",
    replays=WHOLE,
    reference="Dmitrienko, Tamhane & Wiens (2008), Biometrical Journal 50:667-677",
)
def parallel(
    families: Families, *, truncations: Mapping[str, float], weights: Mapping[str, Sequence[float]]
) -> Decisions:
    """Test each family at the level that the one before it has freed.

    Where A of the m hypotheses of a family that was tested at level a are not rejected for their claim, it frees
    a - (g + (1 - g) A/m) a, with g its truncation and 0 for Bonferroni; all of a where A = 0. Weights take the place
    of A/m by the sum of those of the hypotheses that are not rejected.

    p_study is exact: the freed share is a step function of the study level that never falls, so each family has a
    smallest study level at which its share of it meets the p_family of a member.

    Parameters
    ----------
    families : sequence of FamilyResult
        In the order of the promise. A family without members frees nothing.
    truncations : mapping from id to number
        For each family but the last: its truncation, from 0 to below 1.
    weights : mapping from id to sequence of numbers
        For weighted families but the last: the weights of their members, in their order; they sum to 1.

    Returns
    -------
    tuple of FamilyDecision
        One for each family; ``closed_by`` names the first that freed nothing.

    Raises
    ------
    ValueError
        When the families don't share one level.

    Notes
    -----
    Needs a separable procedure in every family but the last (``SEPARABLE``), and families whose procedure keeps the
    family-wise error rate strongly; the dependence is that of the procedures.
    """
    level = one_level(families)
    decisions, closed_by = [], ""
    share = RisingShare.fixed(1.0)
    for family in families:
        p_study, held = share.first_level(family.p_family), share.at_level(level)
        decisions.append(
            decide(family, decides="p_study", p_study=p_study, local_level=held * level, closed_by=closed_by)
        )
        if family is not families[-1]:
            share = share.times(_freed(family, p_study, truncations[family.id], weights.get(family.id)))
            if not closed_by and share.at_level(level) == 0:
                closed_by = family.id
    return tuple(decisions)


def _freed(family: FamilyResult, p_study: Vector, truncation: float, weights: Sequence[float] | None) -> RisingShare:
    """Give the share of its own level that a family frees, as the study level rises and its members fall."""
    m = p_study.size
    falling = np.flatnonzero(family.may_open)
    falling = falling[np.argsort(p_study[falling], kind="stable")]
    each = np.full(m, 1 / max(m, 1)) if weights is None else np.asarray(weights, dtype=np.float64)
    freed = (1 - truncation) * np.cumsum(each[falling])
    if m and falling.size == m:
        freed[-1] = 1.0
    return RisingShare(np.append(0.0, p_study[falling]), np.append(0.0, freed))


def replay(
    families: list[dict[str, Any]], truncations: dict[str, float], weights: dict[str, list[float]]
) -> list[dict[str, Any]]:
    """Run each procedure at the level freed before it; p_study by raising the level from one rejection to the next."""
    sizes = [len(family["p"]) for family in families]
    each = [weights.get(family["id"], [1 / max(m, 1)] * m) for family, m in zip(families, sizes)]  # noqa: B905
    may_open = [family["may_open"] for family in families]

    def freed(k: int, fallen: int, weight: float) -> float:
        if k == len(families) - 1:
            return 0.0  # there is no next
        return 1.0 if 0 < fallen == sizes[k] else (1 - truncations[families[k]["id"]]) * weight

    again, share, closed_by = [], 1.0, ""
    for k, family in enumerate(families):
        local = share * family["level"]
        judged = family["judge"](local)
        rejected = [local > 0 and yes for yes in judged["rejected"]]
        again.append({
            "closed_by": closed_by, "local_level": local, "p_family": judged["adjusted"], "p_study": [1.0] * sizes[k],
            "tested": [not closed_by] * sizes[k], "rejected": rejected,
        })  # fmt: skip
        fell = [i for i in range(sizes[k]) if rejected[i] and may_open[k][i]]
        share *= freed(k, len(fell), sum(each[k][i] for i in fell))
        closed_by = closed_by or ("" if share > 0 else family["id"])

    level, fallen, weight = 0.0, [0] * len(families), [0.0] * len(families)
    waiting = [sorted(range(len(one["p_family"])), key=one["p_family"].__getitem__, reverse=True) for one in again]
    while True:
        share, nearest = 1.0, (2.0, 0)  # a level above all, and whose it is
        for k, one in enumerate(again):
            if waiting[k] and share > 0:
                nearest = min(nearest, (one["p_family"][waiting[k][-1]] / share, k))
            share *= freed(k, fallen[k], weight[k])
        level = max(level, nearest[0])
        if level >= 1:
            return again
        k = nearest[1]
        i = waiting[k].pop()
        again[k]["p_study"][i] = level
        if may_open[k][i]:
            fallen[k], weight[k] = fallen[k] + 1, weight[k] + each[k][i]
