"""How many further groups a claim survives: checked by adding them."""

from typing import Any

import numpy as np
import pytest
from multiplicity.contrasts import drawn, family

from beforehand.multiplicity.contract import PROCEDURES, Procedure
from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.further_groups import largest_with_further_groups
from beforehand.multiplicity.survival import LARGEST_TRIED

LEVEL = 0.05
NAMES = [name for name in PROCEDURES if PROCEDURES[name].compares != "anything"]


def adjusted_with(procedure: Procedure, further: int, member: int, given: dict[str, Any]) -> float:
    """The adjusted p of one member in a family that really has further comparisons without effect."""
    m = len(given["statistics"])
    grown = given | {"statistics": np.concatenate([given["statistics"], np.zeros(further)])}
    for name in ("loadings", "dfs"):
        if name in given:
            grown[name] = np.concatenate([given[name], np.full(further, given[name][member])])
    if "groups" in given:
        grown["groups"] = given["groups"] + further
    p = np.concatenate([np.zeros(m), np.ones(further)])
    return float(procedure(p, **grown)[member])


@pytest.mark.parametrize("name", NAMES)
def test_one_more_would_be_one_too_many(name: str) -> None:
    procedure, checked = PROCEDURES[name], 0
    for seed in range(12):
        for found in family(name, drawn(np.random.default_rng(seed), 4)):
            m = found.p.size
            rejected = is_rejected(procedure(found.p, **found.given), LEVEL)
            sizes = largest_with_further_groups(procedure, level=LEVEL, **found.plain)
            assert (sizes > 0).tolist() == rejected.tolist()
            for member, size in enumerate(sizes):
                if not 0 < size < 500:
                    continue
                if procedure.compares == "control":
                    further = int(size) - m
                else:
                    groups = next(g for g in range(2, 40) if g * (g - 1) // 2 == size)
                    further = groups - found.given["groups"]
                assert is_rejected(adjusted_with(procedure, further, member, found.given), LEVEL)
                assert not is_rejected(adjusted_with(procedure, further + 1, member, found.given), LEVEL)
                checked += 1
    assert checked >= 4


@pytest.mark.parametrize("name", NAMES)
def test_a_clear_claim_survives_everything(name: str) -> None:
    found = family(name, drawn(np.random.default_rng(9), 3))[0]
    given = found.given | {"statistics": np.full_like(found.p, 300.0)}
    assert set(largest_with_further_groups(PROCEDURES[name], level=LEVEL, **given)) == {LARGEST_TRIED}


def test_a_member_without_result_has_none() -> None:
    given = {"statistics": np.array([9.0, 0.0]), "loadings": np.array([0.7, 0.0]), "df": 20.0, "sides": 2}
    sizes = largest_with_further_groups(PROCEDURES["dunnett"], level=LEVEL, doubled=False, **given)
    assert sizes[0] > 100
    assert sizes[1] == 0
