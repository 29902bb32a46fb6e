"""Where success of a family and its gate differ, and where nothing is said."""

from pathlib import Path

import pytest
from small_study import SPEC, write_study
from study.test_schemes import CYCLE, SERIAL, STUDIES

from beforehand.planning.verdicts import verdicts
from beforehand.spec.load import load_spec


def said(folder: Path, text: str) -> tuple[str, ...]:
    return verdicts(load_spec(write_study(folder, spec=text)))


@pytest.mark.parametrize(
    ("procedure", "words"),
    [
        (
            "holm\n    success: any",
            "succeeds with 1 of 2 rejections, and lets others have their turn when all of it is",
        ),
        ("all_or_none\n    success: all", ""),
        ("holm\n    success: {at_least: 2}", ""),
        ("holm", ""),
    ],
)
def test_serial_gates(tmp_path: Path, procedure: str, words: str) -> None:
    found = said(tmp_path, SPEC.replace("procedure: holm", f"procedure: {procedure}"))
    assert [words in one for one in found] == ([True] if words else [])


def test_parallel_gates(tmp_path: Path) -> None:
    (found,) = said(tmp_path, STUDIES["parallel"][0])
    assert found == (
        "Family 'strength' succeeds with 2 of 2 rejections, and lets others have their turn when any of it is rejected."
    )


def test_a_graph_of_families(tmp_path: Path) -> None:
    text = SPEC.replace(SERIAL, "  across_families: graph\n").replace(
        "procedure: bonferroni", "procedure: bonferroni\n    success: any"
    )
    (found,) = said(tmp_path, text + CYCLE)
    assert found.startswith("Family 'second' succeeds with 1 of 2 rejections")


def test_the_last_family_opens_nothing(tmp_path: Path) -> None:
    assert said(tmp_path, SPEC.replace("procedure: bonferroni", "procedure: bonferroni\n    success: any")) == ()
