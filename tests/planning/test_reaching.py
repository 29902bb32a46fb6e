"""First thresholds: the level of the family by its scheme, the first step of its procedure."""

from pathlib import Path

import pytest
from small_study import write_study
from study.test_schemes import STUDIES, spec

from beforehand.planning.reaching import first_thresholds, largest_shares
from beforehand.spec.load import load_spec

FIBRE, FOAM, SHRINKAGE, CRACKS = "strength/fibre-plain", "strength/foam-plain", "shrinkage_fibre", "cracks_fibre"


@pytest.mark.parametrize(
    ("name", "expected"),
    [
        # by hand; truncated Holm with m = 2: a share of 1/2; Bonferroni: 1/2 of what could be freed, all of the level
        ("parallel", {FIBRE: 0.0003, FOAM: 0.0003, SHRINKAGE: 0.0003, CRACKS: 0.0003}),
        ("shares", {FIBRE: 0.0008, FOAM: 0.0008, SHRINKAGE: 0.0002, CRACKS: 0.0002}),
        # either family holds all of the level once the other has passed its share on
        ("graph of families", {FIBRE: 0.0003, FOAM: 0.0003, SHRINKAGE: 0.0003, CRACKS: 0.0003}),
        # fibre holds its half at most, the others everything
        ("graph of hypotheses", {FIBRE: 0.0003, FOAM: 0.0006, SHRINKAGE: 0.0006, CRACKS: 0.0006}),
    ],
)
def test_by_scheme(tmp_path: Path, name: str, expected: dict[str, float]) -> None:
    found = first_thresholds(load_spec(write_study(tmp_path, spec=STUDIES[name][0])))
    assert found == pytest.approx(expected)


def test_weights_are_those_of_the_members(tmp_path: Path) -> None:
    text = spec("0.05", "serial\n  order: [strength, second]", second="weighted_bonferroni")
    text = text.replace("claim_direction: below", "claim_direction: below\n        weight: 0.8")
    text = text.replace("        alternative: below\n", "        alternative: below\n        weight: 0.2\n")
    found = first_thresholds(load_spec(write_study(tmp_path, spec=text)))
    assert (found[SHRINKAGE], found[CRACKS]) == pytest.approx((0.04, 0.01))


def test_without_a_scheme_every_family_could_hold_all(tmp_path: Path) -> None:
    assert largest_shares(load_spec(write_study(tmp_path))) == {}
