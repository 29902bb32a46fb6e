"""Supportive analyses and descriptions from the spec to the run folder: both pages, and the stand-alone checker."""

import csv
import io
import json
import subprocess
import sys
from pathlib import Path

import page as validator
import pytest
from pypdf import PdfReader
from supportive_study import write

import beforehand
from beforehand.record.canonical import sha256
from beforehand.record.manifest import manifest


@pytest.fixture(scope="module")
def finished(tmp_path_factory: pytest.TempPathFactory) -> Path:
    run = beforehand.run(write(tmp_path_factory.mktemp("screed")))
    return run.write().folder


@pytest.fixture
def folder(finished: Path, tmp_path: Path) -> Path:
    copy = write(tmp_path).with_suffix(".run")
    copy.mkdir()
    for path in finished.iterdir():
        (copy / path.name).write_bytes(path.read_bytes())
    return copy


def recheck(folder: Path) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-I", str(folder / "recheck.py")]
    return subprocess.run(command, capture_output=True, text=True, check=False)


def altered(folder: Path, name: str, column: str, cell: str) -> None:
    """Change one cell of tests.csv, and make every checksum again."""
    table = list(csv.reader(io.StringIO((folder / "tests.csv").read_text("utf-8"))))
    (row,) = (row for row in table if row[0] == name)
    row[table[0].index(column)] = cell
    content = "".join(",".join(row) + "\n" for row in table).encode()
    (folder / "tests.csv").write_bytes(content)
    record = json.loads((folder / "record.json").read_bytes())
    record["tests_csv_sha256"] = sha256(content)
    (folder / "record.json").write_text(json.dumps(record), "utf-8")
    names = (path for path in sorted(folder.iterdir()) if path.name != "run.json")
    (folder / "manifest-sha256.txt").write_bytes(manifest({path.name: path.read_bytes() for path in names}))


def test_the_checker_finds_nothing(finished: Path) -> None:
    done = recheck(finished)
    assert done.returncode == 0, done.stdout + done.stderr
    lines = done.stdout.splitlines()
    assert lines[0] == "Read: 4 hypotheses in 2 families; beside them, described and not decided: 4."
    assert lines[-1] == "Rechecked 4 hypotheses: everything agrees."


@pytest.mark.parametrize(
    ("column", "cell"),
    [("state", "rejected"), ("decides", "p_family"), ("p_family", "0.01"), ("p_study", "0.01"), ("threshold", "0.05")],
)
def test_the_checker_finds_a_described_row_that_was_given_a_decision(folder: Path, column: str, cell: str) -> None:
    altered(folder, "by_ranks", column, cell)
    done = recheck(folder)
    assert done.returncode == 1
    assert f"'by_ranks', column {column}: recorded {cell!r}, but it is a member of no family" in done.stdout


def test_verify_reruns_them(folder: Path) -> None:
    verified = beforehand.study.verify(folder)
    assert verified.holds, verified.checks
    assert {check.name: check.answer for check in verified.checks}["rerun"] == "holds"


def test_both_pages_show_them(finished: Path) -> None:
    html = (finished / "report.html").read_text("utf-8")
    for words in ("<h4>Supportive analyses</h4>", "<h4>Descriptions</h4>", "1 of 1 supportive analysis agrees with it"):
        assert words in html
    text = " ".join("".join(page.extract_text() for page in PdfReader(finished / "report.pdf").pages).split())
    for words in ("Supportive analyses, family strength", "Description slabs_made", "Beside its hypothesis"):
        assert words in text


@pytest.mark.parametrize("profile", ["2a", "ua1"])
def test_the_pdf_conforms_with_their_tables(finished: Path, profile: str) -> None:
    content = (finished / "report.pdf").read_bytes()
    found = validator.validate_pdf_bytes(content, profile=profile, limits=validator.SafetyLimits.unlimited())
    assert [(failure.rule_id, failure.message) for failure in found.failures] == []


def test_the_plan_of_the_folder_holds_them(finished: Path) -> None:
    plan = json.loads((finished / "plan.json").read_bytes())
    assert [one["id"] for one in plan["supportive"]] == ["uncracked", "by_ranks", "shrinks_less"]
    assert [one["id"] for one in plan["describe"]] == ["slabs_made"]


def test_the_summary_counts_only_decisions(folder: Path) -> None:
    summary = beforehand.read_run(folder).summary()
    assert {name: sum(states.values()) for name, states in summary["families"].items()} == {"strength": 2, "second": 2}
    assert summary["decisions"]["by_ranks"] == "described"
