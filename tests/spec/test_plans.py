"""The plans that the spec language must be able to hold: sound in every key, refused only for what is not built."""

from pathlib import Path

import pytest
import yaml

from beforehand.errors import SpecFault
from beforehand.spec.load import load_spec

PLANS = Path(__file__).parent / "plans"
REFUSALS = yaml.safe_load((PLANS / "refusals.yaml").read_text(encoding="utf-8"))


@pytest.mark.parametrize("name", sorted(path.stem for path in PLANS.glob("*.yaml") if path.stem != "refusals"))
def test_only_what_is_not_built_is_refused(name: str) -> None:
    with pytest.raises(SpecFault) as caught:
        load_spec(PLANS / f"{name}.yaml")
    assert [str(fault) for fault in caught.value.faults] == REFUSALS[name]
    assert all("not available yet" in fault.text for fault in caught.value.faults)
