"""recheck.py on run folders made by hand: it recomputes what they hold, and sees whatever was altered in them."""

import ast
import csv
import hashlib
import io
import json
import subprocess
import sys
from collections.abc import Callable
from copy import deepcopy
from dataclasses import fields
from pathlib import Path
from typing import Any

import pytest

from beforehand.multiplicity.contract import PROCEDURES
from beforehand.multiplicity.scheme import SCHEMES
from beforehand.record import recheck_head
from beforehand.record.model import FamilyRecord, Results
from beforehand.record.recheck import recheck_text

# Worked by hand. Serial at 0.05: `closures` by Holm (0.01 x 3; 0.02 x 2; 0.04 x 1, 0.04 running), all rejected, so
# `alarms` by Bonferroni is tested (0.02 x 2; 0.4 x 2), is not all rejected, and closes the gate of `openings`.
# p_study: the largest on the way, so 0.04 for the first alarm; a member without result counts as 1.
# `channels` stands apart with Benjamini-Hochberg at 0.1 (0.01 x 3/1; 0.09 x 3/2; 1 x 3/3); its first member is
# rejected on the other side than its claim.
# alarm_brush is one-sided under a two-sided level (p doubled), channel_b two-sided under a one-sided one (p halved).
TESTS = """\
id,family,test,n,estimate,lower,upper,statistic,df,p,p_family,p_study,threshold,state,decides,side_agrees,p_entered,entered_as,rank,factor,product,from_rank
brush,closures,welch_t,80,-4.1,-7,-1,-2.6,77.2,0.01,0.03,0.03,0.05,rejected,p_study,yes,0.01,as it is,1,3.0,0.03,1
curtain,closures,welch_t,80,-3.3,-7,-1,-2.1,77.9,0.04,0.04,0.04,0.05,rejected,p_study,yes,0.04,as it is,3,1.0,0.04,2
magnetic,closures,welch_t,80,-3.9,-7,-1,-2.4,76.4,0.02,0.04,0.04,0.05,rejected,p_study,yes,0.02,as it is,2,2.0,0.04,2
alarm_brush,alarms,rate_ratio,80,0.7,0.5,0.9,,,0.01,0.04,0.04,0.05,rejected,p_study,yes,0.02,doubled,1,2.0,0.04,1
alarm_curtain,alarms,rate_ratio,80,0.9,0.5,1.3,,,0.2,0.8,0.8,0.05,not_rejected,p_study,yes,0.4,doubled,2,2.0,0.8,2
open_coast,openings,welch_t,40,1,0,2,3.4,38,0.001,,0.8,,not_tested,,yes,0.001,as it is,1,2.0,0.002,1
open_inland,openings,welch_t,0,,,,,,,,1.0,,no_result,,,1.0,no result,2,1.0,1.0,2
channels/a,channels,welch_t,24,2,1,3,2.8,22,0.01,0.03,,0.1,rejected_against_claim,p_family,no,0.01,as it is,1,3.0,0.03,1
channels/b,channels,welch_t,24,1,0,2,1.4,22,0.18,0.135,,0.1,not_rejected,p_family,yes,0.09,claim side,2,1.5,0.135,2
channels/c,channels,welch_t,24,0,-1,1,0,22,1.0,1.0,,0.1,not_rejected,p_family,,1.0,as it is,3,1.0,1.0,3
frost_as_treated,closures,fisher_exact,70,0.8,0.4,1.2,,,0.03,,,,described,,,,,0,,,0
"""


def family(name: str, procedure: str, members: list[str], states: dict[str, int], **other: Any) -> dict[str, Any]:
    return {
        "id": name, "procedure": procedure, "given": {}, "multiples": True, "level": 0.05, "members": members,
        "tested": True, "closed_by": "", "under_study_promise": True, "states": states, "computed": len(members),
    } | other  # fmt: skip


RECORD: dict[str, Any] = {
    "scheme": "serial",
    "order": ["closures", "alarms", "openings"],
    "families": [
        family("closures", "holm", ["brush", "curtain", "magnetic"], {"rejected": 3}),
        family("alarms", "bonferroni", ["alarm_brush", "alarm_curtain"], {"rejected": 1, "not_rejected": 1}),
        family(
            "openings", "holm", ["open_coast", "open_inland"], {"not_tested": 1, "no_result": 1},
            tested=False, closed_by="alarms", computed=1,
        ),
        family(
            "channels", "benjamini_hochberg", ["channels/a", "channels/b", "channels/c"],
            {"rejected_against_claim": 1, "not_rejected": 2}, under_study_promise=False, level=0.1,
        ),
    ],
}  # fmt: skip


def write(folder: Path, *, tests: str = TESTS, record: dict[str, Any] | None = None, script: str | None = None) -> Path:
    """Write a run folder whose checksums are right, so that only the arithmetic can tell."""
    folder.mkdir(exist_ok=True)
    content = {"tests.csv": tests.encode()}
    whole = deepcopy(record or RECORD) | {"tests_csv_sha256": hashlib.sha256(content["tests.csv"]).hexdigest()}
    content["record.json"] = json.dumps(whole, indent=1).encode()
    text = script or recheck_text(tuple({one["procedure"] for one in RECORD["families"]}), ("serial",))
    content["recheck.py"] = text.encode()
    lines = (f"{hashlib.sha256(body).hexdigest()}  {name}\n" for name, body in sorted(content.items()))
    content["manifest-sha256.txt"] = "".join(lines).encode()
    for name, body in content.items():
        (folder / name).write_bytes(body)
    return folder


def recheck(folder: Path, *arguments: str) -> subprocess.CompletedProcess[str]:
    """Run the script as a stranger would: no packages at all, not even those of this installation."""
    command = [sys.executable, "-I", "-S", str(folder / "recheck.py"), *arguments]
    return subprocess.run(command, capture_output=True, text=True, check=False, encoding="utf-8")


def altered(name: str, column: str, cell: str) -> str:
    """Give the table with one cell changed."""
    rows = list(csv.reader(io.StringIO(TESTS)))
    (row,) = (row for row in rows if row[0] == name)
    assert row[rows[0].index(column)] != cell
    row[rows[0].index(column)] = cell
    return "".join(",".join(row) + "\n" for row in rows)


def test_all_agree(tmp_path: Path) -> None:
    done = recheck(write(tmp_path))
    assert done.stderr == ""
    assert done.stdout.splitlines() == [
        "Read: 10 hypotheses in 4 families; beside them, described and not decided: 1.",
        "Recomputed: the columns p_family, p_study, threshold, decides, state and product, and each family's gate and "
        "counts;",
        "  from column p_entered alone: benjamini_hochberg, bonferroni, holm, serial.",
        "Taken as recorded: p, from which p_entered has to follow as the column entered_as says (of a two-sided test",
        "  that enters with the side of its claim, that side's p); the families, their members and levels; what the",
        "  plan gives them (weights, shares, a graph); the sides of the estimates; every other column.",
        "Rechecked 10 hypotheses: everything agrees.",
    ]
    assert done.returncode == 0


def test_another_folder_may_be_named(tmp_path: Path) -> None:
    here, there = write(tmp_path / "here"), write(tmp_path / "there", tests=altered("brush", "p_family", "0.02"))
    assert recheck(here, str(there)).returncode == 1
    assert recheck(there, str(here)).returncode == 0


def test_separate_promises(tmp_path: Path) -> None:
    record = {"scheme": "separate", "order": [], "families": RECORD["families"][3:]}
    tests = "".join(line for line in TESTS.splitlines(True) if line.startswith(("id,", "channels")))
    folder = write(tmp_path, tests=tests, record=record)
    (folder / "recheck.py").write_text(recheck_text(("benjamini_hochberg",), ("separate",)), "utf-8")
    done = recheck(folder)
    assert done.stdout.splitlines()[-1] == "Rechecked 3 hypotheses: everything agrees."
    assert done.returncode == 0


def test_families_may_be_reported_in_another_order_than_tested(tmp_path: Path) -> None:
    reported = RECORD | {"families": RECORD["families"][::-1]}
    assert recheck(write(tmp_path, record=reported)).returncode == 0
    assert recheck(write(tmp_path, record=reported | {"order": ["alarms", "closures", "openings"]})).returncode == 1


@pytest.mark.parametrize(
    ("name", "column", "cell", "says"),
    [
        # every column that decides, in every family
        ("brush", "p", "0.0004", "'brush', column p_entered: recorded 0.01, which is not p '0.0004' as it is"),
        ("brush", "p_entered", "0.0101", "'brush', column p_family: recorded '0.03', recomputed"),
        ("brush", "entered_as", "doubled", "'brush', column p_entered: recorded 0.01, which is not p '0.01' doubled"),
        ("brush", "entered_as", "halved", "'brush', column entered_as: recorded 'halved' beside p '0.01'"),
        ("open_inland", "entered_as", "as it is", "'open_inland', column entered_as: recorded 'as it is' beside p ''"),
        ("brush", "p_entered", "1.5", "'brush', column p_entered: recorded '1.5', which is no number from 0 to 1"),
        ("brush", "p_entered", "nan", "'brush', column p_family: recorded '0.03', recomputed 1.0"),
        ("brush", "p_family", "0.030000001", "'brush', column p_family: recorded '0.030000001', recomputed 0.03"),
        ("channels/b", "p_family", "0.13", "'channels/b', column p_family: recorded '0.13', recomputed 0.135"),
        ("open_coast", "p_family", "0.002", "'open_coast', column p_family: recorded '0.002', recomputed None"),
        ("alarm_brush", "p_study", "0.03", "'alarm_brush', column p_study: recorded '0.03', recomputed 0.04"),
        ("open_inland", "p_study", "0.8", "'open_inland', column p_study: recorded '0.8', recomputed 1.0"),
        ("channels/a", "p_study", "0.03", "'channels/a', column p_study: recorded '0.03', recomputed None"),
        ("brush", "p_family", "", "'brush', column p_family: recorded '', recomputed 0.03"),
        ("brush", "threshold", "0.06", "'brush', column threshold: recorded '0.06', recomputed 0.05"),
        ("open_coast", "threshold", "0.05", "'open_coast', column threshold: recorded '0.05', recomputed None"),
        ("brush", "decides", "p_family", "'brush', column decides: recorded 'p_family', recomputed 'p_study'"),
        ("alarm_curtain", "state", "rejected", "'alarm_curtain', column state: recorded 'rejected', recomputed 'not_"),
        ("channels/a", "state", "rejected", "column state: recorded 'rejected', recomputed 'rejected_against_claim'"),
        ("open_coast", "state", "rejected", "'open_coast', column state: recorded 'rejected', recomputed 'not_tested'"),
        ("open_inland", "state", "not_tested", "column state: recorded 'not_tested', recomputed 'no_result'"),
        ("frost_as_treated", "state", "rejected", "'frost_as_treated', column state: recorded 'rejected', but it is a"),
        ("frost_as_treated", "p_study", "0.03", "column p_study: recorded '0.03', but it is a member of no family"),
        ("channels/a", "side_agrees", "yes", "'channels/a', column state: recorded 'rejected_against_claim', recompu"),
        ("brush", "side_agrees", "no", "family 'alarms', tested: recorded True, recomputed False"),
        ("brush", "side_agrees", "maybe", "'brush', column side_agrees: recorded 'maybe', which is neither yes nor no"),
        ("brush", "product", "0.02", "'brush', column product: recorded '0.02', which is not factor x p_entered"),
        (
            "channels/c",
            "p",
            "many",
            "'channels/c', column p_entered: recorded 1.0, which is not p 'many' as it is",
        ),
        ("channels/c", "p", "inf", "'channels/c', column p_entered: recorded 1.0, which is not p 'inf' as it is"),
        ("channels/c", "p", "", "'channels/c', column state: recorded 'not_rejected', recomputed 'no_result'"),
        ("channels/c", "from_rank", "9", "'channels/c', column from_rank: the product at rank '9' is not its p_family"),
        ("curtain", "from_rank", "1", "'curtain', column from_rank: the product at rank '1' is not its p_family"),
        ("brush", "factor", "", "'brush', column product: recorded '0.03', which is not factor x p_entered"),
        ("brush", "family", "alarms", "'brush', column family: recorded 'alarms', a member of 'closures'"),
        ("brush", "id", "brash", "'brush': a member of family 'closures' that has no row in tests.csv"),
        ("brush", "id", "curtain", "tests.csv: an id has more than one row"),
    ],
)
def test_an_altered_cell_is_named_by_the_arithmetic(
    tmp_path: Path, name: str, column: str, cell: str, says: str
) -> None:
    done = recheck(write(tmp_path, tests=altered(name, column, cell)))
    assert says in done.stdout
    assert done.stdout.splitlines()[-1].startswith("Rechecked 10 hypotheses: differences: ")
    assert done.stderr == ""
    assert done.returncode == 1


def change(record: dict[str, Any], index: int, **other: Any) -> None:
    record["families"][index].update(other)


@pytest.mark.parametrize(
    ("edit", "says"),
    [
        (lambda record: change(record, 0, level=0.03), "'brush', column threshold: recorded '0.05', recomputed 0.03"),
        (lambda record: change(record, 1, tested=False), "family 'alarms', tested: recorded False, recomputed True"),
        (lambda record: change(record, 2, closed_by="closures"), "closed_by: recorded 'closures', recomputed 'alarms'"),
        (lambda record: change(record, 0, computed=2), "family 'closures', computed: recorded 2, recomputed 3"),
        (lambda record: change(record, 0, states={"rejected": 2}), "states: recorded {'rejected': 2}, recomputed {'re"),
        (
            lambda record: change(record, 0, procedure="bonferroni"),
            "'curtain', column p_family: recorded '0.04', recomp",
        ),
        (lambda record: change(record, 0, procedure="hommel"), "not recomputed: this file does not hold hommel"),
        (lambda record: change(record, 0, members=["brush", "curtain"]), "'magnetic', column state: recorded 'rejecte"),
        (lambda record: change(record, 0, members=["brush"] * 3), "'brush': a member of family 'closures', and again"),
        (lambda record: change(record, 3, under_study_promise=True), "'channels/a', column p_study: recorded ''"),
        (lambda record: record.update(scheme="graph"), "not recomputed: this file does not hold graph"),
        (lambda record: record["order"].reverse(), "family 'openings', closed_by: recorded 'alarms', recomputed ''"),
    ],
)
def test_an_altered_record_is_named_by_the_arithmetic(
    tmp_path: Path, edit: Callable[[dict[str, Any]], None], says: str
) -> None:
    record = deepcopy(RECORD)
    edit(record)
    done = recheck(write(tmp_path, record=record))
    assert says in done.stdout
    assert done.returncode == 1


def test_checksums(tmp_path: Path) -> None:
    folder = write(tmp_path)
    (folder / "tests.csv").write_text(TESTS.replace("80,-4.1", "80,-4.2"), "utf-8")  # no arithmetic sees an estimate
    done = recheck(folder)
    assert done.stdout.splitlines()[-3:] == [
        "tests.csv: its checksum is not the one in manifest-sha256.txt",
        "tests.csv: its checksum is not the one in record.json",
        "Rechecked 10 hypotheses: differences: 2.",
    ]
    assert done.returncode == 1
    write(folder)
    (folder / "record.json").write_bytes((folder / "record.json").read_bytes() + b" ")
    done = recheck(folder)
    assert done.stdout.splitlines()[-2] == "record.json: its checksum is not the one in manifest-sha256.txt"
    assert done.returncode == 1


@pytest.mark.parametrize("name", ["record.json", "tests.csv", "manifest-sha256.txt"])
def test_a_missing_file(tmp_path: Path, name: str) -> None:
    folder = write(tmp_path)
    (folder / name).unlink()
    done = recheck(folder)
    assert "This folder can't be rechecked" in done.stderr
    assert name in done.stderr
    assert "Traceback" not in done.stderr
    assert done.stdout == ""
    assert done.returncode == 2


@pytest.mark.parametrize(
    ("name", "content", "says"),
    [
        ("record.json", b"{", "can't be rechecked"),
        ("record.json", b"[]", "record.json has no 'scheme'"),
        ("record.json", b'{"scheme": "serial", "families": [{"id": 3}]}', "record.json has no 'id'"),
        ("tests.csv", b"", "tests.csv has no column 'id'"),
        ("tests.csv", TESTS.replace("p_entered", "p_used").encode(), "tests.csv has no column 'p_entered'"),
        (
            "tests.csv",
            TESTS.replace("brush,closures,", "brush,", 1).encode(),
            "tests.csv, line 2: 21 cells under 22 col",
        ),
        ("tests.csv", b"\xff\xfe", "can't be rechecked"),
    ],
)
def test_a_file_that_cannot_be_read(tmp_path: Path, name: str, content: bytes, says: str) -> None:
    folder = write(tmp_path)
    (folder / name).write_bytes(content)
    done = recheck(folder)
    assert says in done.stderr
    assert "Traceback" not in done.stderr
    assert done.returncode == 2


def test_how_to_use_it(tmp_path: Path) -> None:
    folder = write(tmp_path)
    assert "python3 recheck.py FOLDER" in recheck(folder, "--help").stdout
    assert recheck(folder, "--help").returncode == 0
    assert recheck(folder, "one", "two").returncode == 2


def test_the_head_alone_says_what_it_lacks(tmp_path: Path) -> None:
    done = recheck(write(tmp_path, script=Path(recheck_head.__file__).read_text("utf-8")))
    assert "not recomputed: this file does not hold bonferroni or holm or serial" in done.stdout
    assert done.returncode == 1


def test_ingredients_taken_as_recorded_are_named(tmp_path: Path) -> None:
    text = recheck_text(("holm", "bonferroni", "benjamini_hochberg"), ("serial",))
    place = "\n\nif __name__"
    assert text.count(place) == 1
    done = recheck(write(tmp_path, script=text.replace(place, '\nTAKEN["holm"] = "its weights"' + place)))
    assert "from column p_entered alone: benjamini_hochberg, bonferroni, serial." in done.stdout
    assert "  For holm: its weights." in done.stdout


@pytest.mark.parametrize("procedures", [("holm",), tuple(PROCEDURES)])
def test_the_text(procedures: tuple[str, ...]) -> None:
    text = recheck_text(procedures, tuple(SCHEMES))
    tree = ast.parse(text, feature_version=(3, 8))
    imported = {alias.name for node in ast.walk(tree) if isinstance(node, ast.Import) for alias in node.names}
    imported |= {str(node.module) for node in ast.walk(tree) if isinstance(node, ast.ImportFrom)}
    assert imported <= {"__future__", "csv", "fractions", "hashlib", "io", "json", "math", "sys", "pathlib", "typing"}
    assert text == recheck_text(tuple(reversed(procedures)), tuple(SCHEMES))
    assert [name for name in PROCEDURES if f"def replay_{name}(" in text] == sorted(set(procedures) - set(SCHEMES))
    assert [name for name in SCHEMES if f"def across_{name}(" in text] == sorted(SCHEMES)
    assert max(len(line) for line in text.splitlines()) <= 120
    assert text.isascii()


def test_a_name_without_an_entry_is_left_to_the_script() -> None:
    assert recheck_text(("holm", "no_such_procedure"), ("no_such_scheme",)) == recheck_text(("holm",), ())


def test_it_reads_what_the_record_writes() -> None:
    columns = {column.name for column in fields(Results)}
    assert set(recheck_head.READ + recheck_head.RECOMPUTED) <= columns
    assert set(RECORD["families"][0]) <= {key.name for key in fields(FamilyRecord)}
