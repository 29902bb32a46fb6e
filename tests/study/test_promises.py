"""What a run promises, tried on a small study: same bytes, checkable folders, nothing half-written."""

import csv
import io
import json
import os
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from small_study import SPEC, rows, write_study

import beforehand
from beforehand.cli import exit_code
from beforehand.data import samples
from beforehand.hypothesis_tests.contract import Outcome
from beforehand.hypothesis_tests.entries import welch_t as welch
from beforehand.record.canonical import sha256
from beforehand.record.manifest import manifest
from beforehand.report import draw as drawing
from beforehand.study import verify


def beforehand_command(*arguments: str | Path, **surroundings: str) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-m", "beforehand", *map(str, arguments)]
    return subprocess.run(command, capture_output=True, text=True, check=False, env=os.environ | surroundings)


def contents(folder: Path) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in sorted(folder.iterdir()) if path.name != "run.json"}


@pytest.fixture(scope="session")
def finished(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Run the small study once, with both forms of the report."""
    spec = write_study(tmp_path_factory.mktemp("finished"))
    done = beforehand_command("report", spec)
    assert done.returncode == 0, done.stderr
    return spec.with_suffix(".run")


@pytest.fixture
def folder(finished: Path, tmp_path: Path) -> Path:
    """Give a copy of the finished run, beside its data."""
    spec = write_study(tmp_path)
    copy = spec.with_suffix(".run")
    copy.mkdir()
    for path in finished.iterdir():
        (copy / path.name).write_bytes(path.read_bytes())
    return copy


def test_the_folder_holds_what_it_should(finished: Path) -> None:
    assert sorted(path.name for path in finished.iterdir()) == [
        "environment.json", "inputs-sha256.txt", "manifest-sha256.txt", "particulars.json", "plan.json", "recheck.py",
        "record.json", "report.html", "report.pdf", "run.json", "spec.yaml", "tests.csv",
    ]  # fmt: skip
    head = (finished / "tests.csv").read_text("utf-8").splitlines()[0].split(",")
    assert head[:14] == [
        "id", "family", "test", "n", "estimate", "lower", "upper", "statistic", "df", "p", "p_family", "p_study",
        "threshold", "state",
    ]  # fmt: skip


def test_the_same_bytes_whatever_the_surroundings(finished: Path, tmp_path: Path) -> None:
    spec = write_study(tmp_path / "elsewhere" / "a b")
    umask = os.umask(0o077)
    try:
        done = beforehand_command(
            "report", spec,
            TZ="Asia/Tokyo", LANG="tr_TR.UTF-8", LC_ALL="C", PYTHONHASHSEED="99", SOURCE_DATE_EPOCH="1",
            OMP_NUM_THREADS="2", COLUMNS="40",
        )  # fmt: skip
    finally:
        os.umask(umask)
    assert done.returncode == 0, done.stderr
    again = contents(spec.with_suffix(".run"))
    different = [name for name, body in contents(finished).items() if again.get(name) != body]
    assert different == []


def test_the_order_of_rows_and_columns_changes_the_checksum_of_the_file_and_no_number(
    finished: Path, tmp_path: Path
) -> None:
    head, *body = rows()
    spec = write_study(tmp_path, lines=[head, *reversed(body)])
    run = beforehand.run(spec)
    assert run.files()["tests.csv"] == (finished / "tests.csv").read_bytes()
    earlier = beforehand.read_run(finished).record.inputs[0]
    assert run.record.inputs[0].content_sha256 == earlier.content_sha256
    assert run.record.inputs[0].sha256 != earlier.sha256


def test_standard_programs_check_the_folder(finished: Path) -> None:
    for listing, place in (("manifest-sha256.txt", finished), ("inputs-sha256.txt", finished.parent)):
        command = ["sha256sum", "-c", "--quiet", str(finished / listing)]
        assert subprocess.run(command, cwd=place, check=False).returncode == 0
    plan = subprocess.run(["sha256sum", finished / "plan.json"], capture_output=True, text=True, check=True)
    assert plan.stdout[:64] == beforehand.read_run(finished).record.plan_sha256


def recheck(folder: Path) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-I", str(folder / "recheck.py")]
    return subprocess.run(command, capture_output=True, text=True, check=False)


def test_recheck_recomputes_and_needs_nothing_of_ours(finished: Path) -> None:
    done = recheck(finished)
    assert done.returncode == 0, done.stdout + done.stderr
    assert "import beforehand" not in (finished / "recheck.py").read_text("utf-8")


@pytest.mark.parametrize(
    ("column", "text"), [("p_family", "0.0001"), ("p_study", "0.5"), ("p", "0.9"), ("state", "not_rejected")]
)
def test_recheck_finds_an_altered_cell_even_when_every_checksum_was_made_again(
    folder: Path, column: str, text: str
) -> None:
    table = list(csv.reader(io.StringIO((folder / "tests.csv").read_text("utf-8"))))
    table[2][table[0].index(column)] = text
    altered = "".join(",".join(row) + "\n" for row in table).encode()
    (folder / "tests.csv").write_bytes(altered)
    assert recheck(folder).returncode == 1
    record = json.loads((folder / "record.json").read_bytes())
    record["tests_csv_sha256"] = sha256(altered)
    (folder / "record.json").write_text(json.dumps(record), "utf-8")
    (folder / "manifest-sha256.txt").write_bytes(manifest(contents(folder)))
    done = recheck(folder)
    assert done.returncode == 1
    assert "strength/foam-plain" in done.stdout


def test_a_rerun_writes_nothing(folder: Path) -> None:
    before = {path: path.stat().st_mtime_ns for path in folder.iterdir()}
    done = beforehand_command("report", folder.with_suffix(".yaml"), "--only", "html")
    assert done.returncode == 0
    assert "Nothing changed" in done.stdout
    assert {path: path.stat().st_mtime_ns for path in folder.iterdir()} == before


def test_a_corrected_value_makes_a_new_report_and_keeps_the_earlier(folder: Path) -> None:
    before = contents(folder)
    lines = rows()
    lines[2] = "S01,fibre,36.0,0.480,no"
    write_study(folder.parent, lines=lines)
    done = beforehand_command("report", folder.with_suffix(".yaml"), "--only", "html")
    assert done.returncode == 0, done.stderr
    (kept,) = [path for path in folder.parent.iterdir() if path.name.startswith("screed.run.")]
    assert contents(kept) == before
    assert contents(folder)["record.json"] != before["record.json"]


def test_reprint_gives_the_same_bytes_without_the_data(folder: Path) -> None:
    (folder.parent / "slabs.csv").unlink()
    out = folder.parent / "again"
    done = beforehand_command("reprint", folder, "--out", out)
    assert done.returncode == 0, done.stderr
    assert "The same bytes as the first printing." in done.stdout
    assert contents(out) == contents(folder)


def test_verify_holds_for_a_run_as_it_was_written(folder: Path) -> None:
    done = beforehand_command("verify", folder, "--json")
    assert done.returncode == 0, done.stdout
    answers = {check["check"]: check["answer"] for check in json.loads(done.stdout)["checks"]}
    assert answers == dict.fromkeys(("checksums", "parts", "arithmetic", "rerun", "pages"), "holds")


def test_verify_says_what_it_could_not_do(folder: Path) -> None:
    (folder.parent / "slabs.csv").unlink()
    verified = verify(folder)
    assert verified.holds
    assert [(c.name, c.answer) for c in verified.checks] == [
        ("checksums", "holds"), ("parts", "holds"), ("arithmetic", "holds"), ("rerun", "not done"),
    ]  # fmt: skip
    assert verified.sentence() == "Everything that could be checked holds."


def test_verify_finds_the_data_under_another_root(folder: Path, tmp_path: Path) -> None:
    elsewhere = tmp_path / "archive"
    elsewhere.mkdir()
    (folder.parent / "slabs.csv").rename(elsewhere / "slabs.csv")
    answers = {check.name: check.answer for check in verify(folder, data_root=elsewhere).checks}
    assert answers["rerun"] == "holds"


def test_verify_finds_an_altered_page_and_never_runs_the_folders_own_checker(folder: Path) -> None:
    (folder / "report.html").write_bytes(b"<p>all claims hold</p>")
    (folder / "recheck.py").write_text("print('everything agrees')")
    done = beforehand_command("verify", folder)
    assert done.returncode == 1
    assert "not as the manifest says: recheck.py, report.html" in done.stdout
    assert done.stdout.splitlines()[-1] == "Something differs from what the run recorded."


def forged(folder: Path, name: str, old: str, new: str) -> None:
    """Alter one file of a run folder, and make the manifest again."""
    text = (folder / name).read_text("utf-8")
    assert old in text
    (folder / name).write_text(text.replace(old, new), "utf-8")
    (folder / "manifest-sha256.txt").write_bytes(manifest(contents(folder)))


def answers_of(folder: Path) -> dict[str, tuple[str, str]]:
    verified = verify(folder)
    assert not verified.holds
    return {check.name: (check.answer, check.detail) for check in verified.checks}


def test_verify_finds_a_forged_plan_without_the_data(folder: Path) -> None:
    (folder.parent / "slabs.csv").unlink()
    forged(folder, "plan.json", "stronger than plain", "as strong as plain")
    answers = answers_of(folder)
    assert answers["checksums"][0] == "holds"
    assert answers["parts"] == ("differs", "not what record.json gives the checksum of: plan.json")


def test_verify_finds_forged_words_even_beside_a_forged_environment(folder: Path) -> None:
    forged(folder, "record.json", "fibre screed is stronger than plain screed", "fibre screed never cracks")
    forged(folder, "environment.json", '"numpy": "', '"numpy": "0.')
    answers = answers_of(folder)
    assert answers["parts"][0] == "holds"
    where = "record.json: hypotheses[strength/fibre-plain].claim"
    assert answers["rerun"] == ("differs", f"in another environment, beyond what that explains: {where}")


def test_verify_finds_a_forged_checker(folder: Path) -> None:
    forged(folder, "recheck.py", "def main", "def main_of_another")
    assert answers_of(folder)["rerun"] == ("differs", "in the same environment, other bytes: recheck.py")


def test_verify_lists_every_check_for_an_altered_table(folder: Path) -> None:
    forged(folder, "tests.csv", "strength,welch_t,30", "strength,welch_t,31")
    answers = answers_of(folder)
    assert answers["parts"] == ("differs", "not what record.json gives the checksum of: tests.csv")
    assert answers["rerun"][0] == "differs"


def test_a_missing_page_is_a_difference_and_the_other_page_is_still_compared(folder: Path) -> None:
    (folder / "report.pdf").unlink()
    answers = answers_of(folder)
    assert answers["checksums"] == ("differs", "not as the manifest says: report.pdf")
    assert answers["pages"] == ("holds", "drawn again, the same bytes: report.html")


def test_verify_agrees_to_the_ninth_digit_in_another_environment(folder: Path) -> None:
    """The last digit of one number, as another processor might give it, with every checksum made to fit."""
    forged(folder, "environment.json", '"numpy": "', '"numpy": "0.')
    table = (folder / "tests.csv").read_text("utf-8").splitlines()
    cells = table[1].split(",")
    cells[4] = repr(float(cells[4]) * (1 + 1e-14))
    old = sha256((folder / "tests.csv").read_bytes())
    (folder / "tests.csv").write_text("\n".join([table[0], ",".join(cells), *table[2:]]) + "\n", "utf-8")
    forged(folder, "record.json", old, sha256((folder / "tests.csv").read_bytes()))
    verified = verify(folder)
    assert verified.holds
    rerun = next(check for check in verified.checks if check.name == "rerun")
    assert rerun.detail == "in another environment: the same words and decisions, numbers agree to 1e-9"


def test_an_altered_folder_is_neither_read_nor_reprinted(folder: Path) -> None:
    (folder / "record.json").write_bytes((folder / "record.json").read_bytes().replace(b"stronger", b"weaker"))
    with pytest.raises(beforehand.FolderFault, match=r"not as manifest-sha256\.txt says: record\.json"):
        beforehand.read_run(folder)
    assert exit_code(["reprint", str(folder), "--out", str(folder.parent / "again")]) == 2
    assert not (folder.parent / "again").exists()


def test_the_next_command_finishes_an_interrupted_move(folder: Path) -> None:
    folder.rename(folder.parent / f".{folder.name}.new")
    assert beforehand.read_run(folder).record.study.identifier == "SC-2032-01"


def test_a_folder_that_cannot_be_made_is_a_wrong_call(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    spec = write_study(tmp_path)
    monkeypatch.setattr("beforehand.report.draw.draw", _draws_no_pdf)
    assert exit_code(["report", str(spec), "--only", "html", "--out", "/proc/x", "--quiet"]) == 2


def test_a_swapped_group_is_seen_and_nothing_is_published(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    spec = write_study(tmp_path)
    right = samples.take

    def swapped(dataset: object, hypothesis: object) -> samples.Samples:
        taken = right(dataset, hypothesis)  # type: ignore[arg-type]
        return replace(taken, arrays=taken.arrays[::-1], n=taken.n[::-1])

    monkeypatch.setattr("beforehand.analysis.computed.take", swapped)
    assert exit_code(["report", str(spec), "--quiet"]) == 3
    assert not spec.with_suffix(".run").exists()
    both = json.loads((tmp_path / "screed.run.failed" / "disagreement.json").read_bytes())
    assert {one["about"] for one in both} >= {"strength/fibre-plain", "strength/foam-plain", "shrinkage_fibre"}


def test_a_wrong_formula_is_seen(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    spec = write_study(tmp_path)
    right = welch.second_route

    def wrong(*values: object, **settings: object) -> Outcome:
        outcome = right(*values, **settings)  # type: ignore[arg-type]
        assert isinstance(outcome, Outcome)
        return Outcome(**(vars(outcome) | {"p": outcome.p * (1 + 1e-6)}))

    monkeypatch.setattr(welch, "second_route", wrong)
    with pytest.raises(beforehand.errors.TwoComputationsDisagree, match="strength/fibre-plain: p "):
        beforehand.run(spec)


def test_without_pango_everything_but_the_pdf_comes(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    spec = write_study(tmp_path)
    monkeypatch.setattr("beforehand.report.draw.draw", _draws_no_pdf)
    assert exit_code(["report", str(spec), "--quiet"]) == 1
    out = spec.with_suffix(".run")
    assert "report.pdf" not in contents(out)
    assert json.loads(contents(out)["environment.json"])["no report.pdf"] == "Pango is not here."
    assert exit_code(["report", str(spec), "--quiet", "--only", "html"]) == 0
    assert exit_code(["report", str(spec), "--out", str(tmp_path / "b"), "--quiet", "--only", "pdf"]) == 2
    assert not (tmp_path / "b").exists()


def _draws_no_pdf(_: object, *, only: tuple[str, ...]) -> drawing.Pages:
    page = b"<p>" if "html" in only else None
    return drawing.Pages(
        html=page, pdf=None, no_pdf_because="Pango is not here." if "pdf" in only else "", environment={}
    )


def test_from_python(finished: Path, tmp_path: Path) -> None:
    run = beforehand.run(write_study(tmp_path))
    read = beforehand.read_run(finished)
    assert run.record.plan_sha256 == read.record.plan_sha256
    assert run.identifier == read.identifier
    tests = run.tests
    assert list(tests["id"]) == ["strength/fibre-plain", "strength/foam-plain", "shrinkage_fibre", "cracks_fibre"]
    assert tests["p"].dtype == np.float64
    assert tests.equals(read.tests)
    assert "<caption>Three mixes of a floor screed" in run._repr_html_()
    written = run.write(tmp_path / "out", only=("html",))
    assert written.outcome == "written"
    assert (tmp_path / "out" / "report.html").exists()


def test_catalogues_are_called_by_the_words_of_the_spec() -> None:
    # by hand: 3 x 0.01, 2 x 0.03, and 0.04 lifted to the 0.06 before it
    assert beforehand.procedures.holm([0.01, 0.04, 0.03]).tolist() == pytest.approx([0.03, 0.06, 0.06])
    outcome = beforehand.statistical_tests.welch_t(np.array([1.0, 2.0, 3.0]), np.array([2.0, 3.0, 4.0]))
    assert outcome.estimate == -1.0


def test_a_notebook_may_show_markup_in_a_title(tmp_path: Path) -> None:
    spec = write_study(tmp_path, spec=SPEC.replace("Three mixes", "<b>Three</b> mixes"))
    assert "&lt;b&gt;Three&lt;/b&gt;" in beforehand.run(spec)._repr_html_()
