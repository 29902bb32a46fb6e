"""What a family must be for a procedure that judges statistics: every refusal as the whole message."""

from pathlib import Path

import pytest
import yaml

from beforehand.errors import SpecFault
from beforehand.spec.load import read_spec

HERE = Path(__file__).parent / "faults"
BASE = (HERE / "base.yaml").read_text(encoding="utf-8")
CASES = yaml.safe_load((HERE / "compared.yaml").read_text(encoding="utf-8"))


def edited(*edits: tuple[str, str]) -> bytes:
    text = BASE
    for there, instead in edits:
        assert there in text, "the edit no longer fits base.yaml"
        text = text.replace(there, instead, 1)
    return text.encode()


@pytest.mark.parametrize("case", CASES, ids=[case["name"] for case in CASES])
def test_message(case: dict) -> None:
    with pytest.raises(SpecFault) as caught:
        read_spec(edited(*case["edits"]), Path("buoys.yaml"))
    assert str(caught.value) == case["message"].rstrip("\n")


TWO_SIDED_LEVEL = ("level_is: one_sided", "level_is: two_sided")
TWO_SIDED = (
    "alternative: below\n      analysis_set",
    "alternative: two_sided\n      claim_direction: below\n      analysis_set",
)


@pytest.mark.parametrize("procedure", ["tukey", "scheffe"])
@pytest.mark.parametrize("pairs", ["all", "{each_with: bare}"])
def test_both_sides_of_all_pairs_or_some(procedure: str, pairs: str) -> None:
    spec = read_spec(
        edited(
            ("procedure: holm", f"procedure: {procedure}"), ("test: welch_t", "test: t_contrast"),
            ("pairs: {each_with: bare}", f"pairs: {pairs}"), TWO_SIDED_LEVEL, TWO_SIDED,
        ),
        Path("buoys.yaml"),
    )  # fmt: skip
    assert spec.family("main").planned == (3 if pairs == "all" else 2)


def test_games_howell_takes_welch() -> None:
    spec = read_spec(
        edited(("procedure: holm", "procedure: games_howell"), TWO_SIDED_LEVEL, TWO_SIDED), Path("buoys.yaml")
    )
    assert spec.family("main").procedure == "games_howell"


@pytest.mark.parametrize("edits", [(), (TWO_SIDED_LEVEL,), (TWO_SIDED,), (TWO_SIDED_LEVEL, TWO_SIDED)])
def test_dunnett_takes_one_side_or_both(edits: tuple[tuple[str, str], ...]) -> None:
    dunnett = ("procedure: holm", "procedure: dunnett"), ("test: welch_t", "test: t_contrast")
    assert read_spec(edited(*dunnett, *edits), Path("buoys.yaml")).family("main").planned == 2


def test_a_control_on_either_side_of_the_pair() -> None:
    hypotheses = "".join(
        f"      - {{id: {name}, test: t_contrast, outcome: growth, alternative: {side}, "
        f"groups: {{column: paint, first: {first}, second: {second}}}}}\n"
        for name, side, first, second in (("one", "below", "copper", "bare"), ("two", "above", "bare", "silicone"))
    )
    comparisons = BASE[BASE.index("    comparisons:") : BASE.index("  - id: further")]
    spec = read_spec(
        edited(("procedure: holm", "procedure: dunnett"), (comparisons, f"    hypotheses:\n{hypotheses}")),
        Path("buoys.yaml"),
    )
    assert [member.id for member in spec.family("main").members] == ["one", "two"]
