"""Every fault of a spec, as the whole message that a reader sees."""

from pathlib import Path

import pytest
import yaml

from beforehand.errors import SpecFault
from beforehand.multiplicity.contract import PROCEDURES
from beforehand.spec.load import load_spec, read_spec

HERE = Path(__file__).parent
BASE = (HERE / "faults" / "base.yaml").read_text(encoding="utf-8")
CASES = yaml.safe_load((HERE / "faults" / "table.yaml").read_text(encoding="utf-8"))


def message_of(text: str, name: str = "buoys.yaml") -> str:
    with pytest.raises(SpecFault) as caught:
        read_spec(text.encode(), Path(name))
    return str(caught.value)


def keeping() -> str:
    """The procedures that a message lists; the list grows with the catalogue."""
    return ", ".join(name for name in PROCEDURES if PROCEDURES[name].keeps("familywise_error_rate"))


def test_the_base_is_sound() -> None:
    spec = load_spec(HERE / "faults" / "base.yaml")
    assert [hypothesis.id for hypothesis in spec.hypotheses] == [
        "main/copper-bare",
        "main/silicone-bare",
        "lost_silicone",
        "gained",
        "limit",
    ]


@pytest.mark.parametrize("case", CASES, ids=[case["name"] for case in CASES])
def test_message(case: dict) -> None:
    text = BASE
    for there, instead in case["edits"]:
        assert there in text, "the edit no longer fits base.yaml"
        text = text.replace(there, instead, 1)
    assert message_of(text) == case["message"].rstrip("\n").replace("KEEPING", keeping())


def test_names_of_cases_are_unique() -> None:
    names = [case["name"] for case in CASES]
    assert len(names) == len(set(names))


def test_faults_stand_in_the_order_of_the_file() -> None:
    text = BASE.replace("level: 0.025", "level: 5 %").replace("procedure: holm", "procedure: hom")
    with pytest.raises(SpecFault) as caught:
        read_spec(text.encode(), Path("buoys.yaml"))
    lines = [fault.line for fault in caught.value.faults]
    assert lines == sorted(lines)
    assert len(lines) == 2


def test_no_file() -> None:
    with pytest.raises(SpecFault) as caught:
        load_spec(HERE / "faults" / "nowhere.yaml")
    assert str(caught.value) == "nowhere.yaml: the file can't be read: No such file or directory"


@pytest.mark.parametrize("text", ["", "# only a comment\n", "- 1\n", "a word\n", "{}\n"])
def test_no_spec_at_all(text: str) -> None:
    assert message_of(text) == (
        "buoys.yaml: this is no spec: it has no keys. `beforehand draft` writes one to begin with."
    )


def test_not_utf_8() -> None:
    with pytest.raises(SpecFault) as caught:
        read_spec("beforehand: 1\nstudy: {title: Größe}\n".encode("latin-1"), Path("buoys.yaml"))
    assert str(caught.value) == ("buoys.yaml: 1 fault\n  line 2: this is not UTF-8 text. Save the file as UTF-8.")


def test_utf_16_is_not_read() -> None:
    with pytest.raises(SpecFault, match="not UTF-8"):
        read_spec(BASE.encode("utf-16"), Path("buoys.yaml"))
