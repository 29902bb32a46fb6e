"""A small study by each scheme across families: decisions by hand, the stand-alone checker, and what it finds."""

import csv
import io
import json
import math
import re
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from small_study import SPEC, write_study

import beforehand
from beforehand.multiplicity.scheme import SCHEMES
from beforehand.record.canonical import sha256
from beforehand.record.manifest import manifest
from beforehand.report.figures import graph
from beforehand.report.fonts import register_in_matplotlib
from beforehand.report.view import view

SERIAL = "  across_families: serial\n  order: [strength, second]\n"
IDS = ["strength/fibre-plain", "strength/foam-plain", "shrinkage_fibre", "cracks_fibre"]


def spec(level: str, scheme: str, *, first: str = "holm", second: str = "bonferroni", graph: str = "") -> str:
    text = SPEC.replace("  level: 0.05\n", f"  level: {level}\n").replace(SERIAL, f"  across_families: {scheme}\n")
    text = text.replace("    procedure: holm\n", f"    procedure: {first}\n")
    return text.replace("    procedure: bonferroni\n", f"    procedure: {second}\n") + graph


CYCLE = """\
graph:
  nodes_are: families
  start: {strength: 0.8, second: 0.2}
  pass:
    - {from: strength, to: second, share: 1}
    - {from: second, to: strength, share: 1}
"""
CHAIN = """\
graph:
  nodes_are: hypotheses
  start: {strength/fibre-plain: 1/2, strength/foam-plain: 0.5}
  pass:
    - {from: strength/fibre-plain, to: strength/foam-plain, share: 1 - epsilon}
    - {from: strength/fibre-plain, to: shrinkage_fibre, share: epsilon}
    - {from: strength/foam-plain, to: shrinkage_fibre, share: 1}
    - {from: shrinkage_fibre, to: cracks_fibre, share: 1}
"""
# The four p that enter (one-sided ones doubled): 1.32e-7 and 6.36e-4; 1.02e-11 and 1.63e-3. By hand, for each level:
STUDIES = {
    # truncated at 1/2: 1.32e-7 <= .5 x .0006; 6.36e-4 > .75 x .0006. Half of half is freed: .25 x .0006 = 1.5e-4, of
    # which Bonferroni gives each 7.5e-5. Both nulls of strength: joint p the larger p, 6.36e-4 > .0006
    "parallel": (
        spec("0.0006", "parallel\n  order: [strength, second]", first="truncated_holm\n    truncation: 0.5\n"
             "    success: {at_least: 2}"),
        ["rejected", "not_rejected", "rejected", "not_rejected"], {"strength": None, "second": 1.5e-4},
    ),
    # 4/5 of .002 is .0016: Holm rejects both; 1/5 is .0004: Bonferroni gives each .0002
    "shares": (
        spec("0.002", "shares", first="holm\n    share: 4/5", second="bonferroni\n    share: 0.2"),
        ["rejected", "rejected", "rejected", "not_rejected"], {"strength": 0.0016, "second": 0.0004},
    ),
    # Holm at .8 x .0006: 6.36e-4 is above it, so the family passes nothing on; .2 x .0006 for the other
    "graph of families": (
        spec("0.0006", "graph", graph=CYCLE),
        ["rejected", "not_rejected", "rejected", "not_rejected"], {"strength": 4.8e-4, "second": 1.2e-4},
    ),
    # fibre at half; foam then holds all of .0006, and is not rejected: the others hold epsilon and nothing
    "graph of hypotheses": (
        spec("0.0006", "graph", first="graph", second="graph", graph=CHAIN),
        ["rejected", "not_rejected", "not_tested", "not_tested"], {"strength": None, "second": None},
    ),
}  # fmt: skip


@pytest.fixture(scope="module", params=STUDIES)
def finished(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> tuple[str, Any]:
    text, _, _ = STUDIES[request.param]
    return request.param, beforehand.run(write_study(tmp_path_factory.mktemp("study"), spec=text))


def recheck(folder: Path) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-I", str(folder / "recheck.py")]
    return subprocess.run(command, capture_output=True, text=True, check=False)


def write(files: dict[str, bytes], folder: Path) -> Path:
    """Write the files a checker reads, with checksums that are right, so that only the arithmetic can tell."""
    record = json.loads(files["record.json"]) | {"tests_csv_sha256": sha256(files["tests.csv"])}
    kept = {"recheck.py": files["recheck.py"], "tests.csv": files["tests.csv"]}
    kept["record.json"] = json.dumps(record).encode()
    kept["manifest-sha256.txt"] = manifest(kept)
    for name, body in kept.items():
        (folder / name).write_bytes(body)
    return folder


def test_decisions_are_those_by_hand(finished: tuple[str, Any]) -> None:
    name, run = finished
    _, states, levels = STUDIES[name]
    assert list(run.tests["id"]) == IDS
    assert list(run.tests["state"]) == states
    for family in run.record.families:
        expected = levels[family.id]
        assert family.local_level == (None if expected is None else pytest.approx(expected))


def test_the_checker_agrees(finished: tuple[str, Any], tmp_path: Path) -> None:
    done = recheck(write(finished[1].files(), tmp_path))
    assert done.returncode == 0, done.stdout + done.stderr


@pytest.mark.parametrize(
    ("column", "text"),
    [("p_study", "0.0001"), ("state", "rejected_against_claim"), ("threshold", "0.01"), ("product", "0.5"),
     ("from_rank", "7"), ("p", "0.2"), ("p_family", "0.25"), ("decides", "p")],
)  # fmt: skip
def test_the_checker_finds_an_altered_cell(finished: tuple[str, Any], tmp_path: Path, column: str, text: str) -> None:
    files = dict(finished[1].files())
    table = list(csv.reader(io.StringIO(files["tests.csv"].decode())))
    table[1][table[0].index(column)] = text
    files["tests.csv"] = "".join(",".join(row) + "\n" for row in table).encode()
    done = recheck(write(files, tmp_path))
    assert done.returncode == 1, done.stdout + done.stderr
    assert f"'strength/fibre-plain', column {'p_entered' if column == 'p' else column}" in done.stdout


def other_share(record: dict[str, Any]) -> None:
    record["scheme_given"]["shares"]["strength"] = 0.7


def other_truncation(record: dict[str, Any]) -> None:
    record["scheme_given"]["truncations"]["strength"] = 0.1


def other_success(record: dict[str, Any]) -> None:
    record["families"][0]["success"]["reached"] = True


def other_joint_p(record: dict[str, Any]) -> None:
    record["families"][0]["success"]["p"] = 1e-4


def other_start(record: dict[str, Any]) -> None:
    start = record["scheme_given"]["start"]
    start[next(iter(start))] = 0.25


def other_arrow(record: dict[str, Any]) -> None:
    record["scheme_given"]["passes"][0][2] = 0.25


def other_level(record: dict[str, Any]) -> None:
    record["families"][1]["local_level"] = 0.0003


def no_gate(record: dict[str, Any]) -> None:
    record["families"][1]["closed_by"] = "strength"


EDITS = {
    "parallel": [other_truncation, other_success, other_joint_p, other_level, no_gate],
    "shares": [other_share, other_level, no_gate],
    "graph of families": [other_start, other_level, no_gate],
    "graph of hypotheses": [other_start, other_arrow, other_level, no_gate],
}


@pytest.mark.parametrize(("name", "edit"), [(name, edit) for name, edits in EDITS.items() for edit in edits])
def test_the_checker_finds_an_altered_record(name: str, edit: Callable[[dict[str, Any]], None], tmp_path: Path) -> None:
    run = beforehand.run(write_study(tmp_path / "study", spec=STUDIES[name][0]))
    files = dict(run.files())
    record = json.loads(files["record.json"])
    edit(record)
    files["record.json"] = json.dumps(record).encode()
    done = recheck(write(files, tmp_path))
    assert done.returncode == 1, done.stdout + done.stderr


def test_a_plan_that_is_no_plan_can_not_be_rechecked(tmp_path: Path) -> None:
    run = beforehand.run(write_study(tmp_path / "study", spec=STUDIES["shares"][0]))
    files = dict(run.files())
    record = json.loads(files["record.json"])
    record["scheme_given"]["shares"] = {"strength": 0.8}
    files["record.json"] = json.dumps(record).encode()
    done = recheck(write(files, tmp_path))
    assert done.returncode == 2
    assert "Traceback" not in done.stderr


def test_success_by_several_rejections_is_judged_and_told(tmp_path: Path) -> None:
    record = beforehand.run(write_study(tmp_path, spec=STUDIES["parallel"][0])).record
    found = record.families[0].success
    assert found is not None
    assert (found.at_least, found.reached, found.level) == (2, False, 0.0006)
    assert found.p == pytest.approx(2 * run_p(record, "strength/foam-plain"))
    assert record.families[1].success is None


def run_p(record: Any, name: str) -> float:
    return float(record.results.p[record.results.id.index(name)])


WORDS = {
    "parallel": [
        "each at the part of the level that the rejections in the families before it have set free",
        "tested at 0.00015",
        "0.00015, which is 0.25 of 0.0006",
        "Success takes at least 2 of its 2 null hypotheses to be false: not reached, joint p 0.0006358 > 0.0006.",
        "enough is held from 2.645 × 10⁻⁷ on",
    ],
    "shares": ["0.0016, which is 0.8 of 0.002", "divided by the share 0.2: 0.01631"],
    "graph of families": [
        "when every hypothesis of it is rejected, it passes its share on",
        "0.00048, which is 0.8 of 0.0006",
        "enough is held from 3.306 × 10⁻⁷ on",
    ],
    "graph of hypotheses": [
        "a rejected one passes its share on along arrows",
        "No claim is made, because no share of the level reached it from strength/foam-plain",
        "1.016 × 10⁻¹¹ × 1 = 1.016 × 10⁻¹¹; step 2 counts: 0.0006358",
        "The level rises from 0; a hypothesis falls when its p meets the share of the level that it holds",
    ],
}


def test_the_report_says_how_the_level_was_shared(finished: tuple[str, Any]) -> None:
    name, run = finished
    words = repr(view(run.record, ())).replace("\\xa0", " ")
    assert [phrase for phrase in WORDS[name] if phrase not in words] == []
    assert SCHEMES[run.record.scheme].reference in words
    assert "nan" not in re.findall(r"[a-z]+", words)


def test_the_figure_is_drawn_from_what_the_record_holds(finished: tuple[str, Any]) -> None:
    name, run = finished
    assert ("graph" in run.record.drawn) == name.startswith("graph")
    if "graph" in run.record.drawn:
        register_in_matplotlib()
        (figure,) = graph.draw(run.record.drawn["graph"])
        assert len(figure.table) == 1 + (4 if name == "graph of hypotheses" else 2)


def test_intervals_match_a_level_that_is_known_beforehand(finished: tuple[str, Any]) -> None:
    name, run = finished
    second = run.record.families[1]
    matching = run.tests.set_index("id")["matching_level"]["shrinkage_fibre"]
    if name == "shares":  # Bonferroni of two on 0.2 x .002, both sides of each: 1 - .0004 / 2
        assert matching == pytest.approx(0.9998)
        assert second.no_intervals_because == ""
    else:
        assert math.isnan(matching)
        assert second.no_intervals_because


def test_stairs_stand_at_the_level_of_the_family(finished: tuple[str, Any]) -> None:
    name, run = finished
    thresholds = [point["threshold"] for point in run.record.drawn["staircase"]["second"]["points"]]
    by_bonferroni = STUDIES[name][2]["second"]
    assert thresholds == [None if by_bonferroni is None else pytest.approx(by_bonferroni / 2)] * 2
