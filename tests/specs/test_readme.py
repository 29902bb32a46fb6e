"""What the README shows really runs."""

import re
import shutil
from pathlib import Path

import pytest

import beforehand
from beforehand.data.dataset import read_data
from beforehand.spec.load import load_spec

ROOT = Path(__file__).parents[2]


def block(language: str) -> str:
    found = re.search(rf"```{language}\n(.*?)```", (ROOT / "README.md").read_text(encoding="utf-8"), re.DOTALL)
    assert found is not None
    return found[1]


def test_the_short_spec_is_sound_and_fits_the_data_of_the_example(tmp_path: Path) -> None:
    shutil.copytree(ROOT / "specs" / "cold_store" / "data", tmp_path / "data")
    (tmp_path / "short.yaml").write_text(block("yaml"), encoding="utf-8")
    spec = load_spec(tmp_path / "short.yaml")
    assert [member.id for member in spec.families[0].members] == [
        "energy/brush-standard", "energy/curtain-standard", "energy/magnetic-standard",
    ]  # fmt: skip
    lines = (tmp_path / "data" / "stores.csv").read_text(encoding="utf-8").count("\n")
    assert read_data(spec).tables["stores"].flow.received.rows == lines - 1  # the header is no row


def test_the_calls_of_single_procedures_and_tests_work() -> None:
    holm, welch = re.findall(r"^beforehand\.(?:procedures|statistical_tests)\..*$", block("python"), re.MULTILINE)
    # Holm by hand: 3 x 0.01; 2 x 0.03; and 1 x 0.04, which may not be smaller than the one before it
    assert list(eval(holm, {"beforehand": beforehand})) == pytest.approx([0.03, 0.06, 0.06], rel=1e-12)
    # means 15.5 / 3 and 18.2 / 3, by hand
    assert eval(welch, {"beforehand": beforehand}).estimate == pytest.approx((15.5 - 18.2) / 3, rel=1e-12)
