"""The command line: exit codes, whole messages, one JSON object, help."""

import json
import subprocess
import sys
from pathlib import Path

import pytest
from small_study import SPEC, rows, write_study

from beforehand.cli import COMMANDS, exit_code


def test_every_command_has_help(capsys: pytest.CaptureFixture[str]) -> None:
    assert exit_code(["--help"]) == 0
    listing = capsys.readouterr().out
    for command in COMMANDS:
        assert f"\n  {command} " in listing
        assert exit_code([command, "--help"]) == 0
        assert f"Usage: beforehand {command}" in capsys.readouterr().out


def test_module_and_version() -> None:
    done = subprocess.run([sys.executable, "-m", "beforehand", "--version"], capture_output=True, text=True, check=True)
    assert done.stdout.startswith("beforehand 0.1.0")


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (["reprot"], "there is no command 'reprot'. The nearest is 'report'.\nSee: beforehand --help\n"),
        (["report"], "Missing argument 'SPEC'.\nSee: beforehand report --help\n"),
        (["report", "no.yaml"], "no.yaml: the file can't be read: No such file or directory\n"),
        (["verify", "nowhere"], "nowhere: there is no such folder; give the folder that `beforehand report` wrote\n"),
        (
            ["methods", "holms"],
            "beforehand methods: no test, procedure or warning is called 'holms'. The nearest name is 'holm'.\n",
        ),
    ],
)
def test_a_wrong_call_is_one_message_and_exit_code_2(
    arguments: list[str], message: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert exit_code(arguments) == 2
    captured = capsys.readouterr()
    assert captured.err == message
    assert captured.out == ""


def test_a_bad_spec_writes_nothing(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    spec = write_study(tmp_path, spec=SPEC.replace("procedure: holm", "procedure: hom"))
    before = sorted(tmp_path.iterdir())
    assert exit_code(["report", str(spec)]) == 2
    assert capsys.readouterr().err == (
        "screed.yaml: 1 fault\n"
        "  line 30, column 16: no multiplicity procedure is called 'hom'. The nearest name is 'holm'.\n"
    )
    assert sorted(tmp_path.iterdir()) == before


def test_bad_data_write_nothing(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    lines = rows()
    lines[3] = "S02,foam,n/a,0.5,no"
    spec = write_study(tmp_path, lines=lines)
    before = sorted(tmp_path.iterdir())
    assert exit_code(["report", str(spec)]) == 2
    assert "line 4" in capsys.readouterr().err
    assert sorted(tmp_path.iterdir()) == before


def test_faults_as_json_are_one_object(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    spec = write_study(tmp_path, spec=SPEC.replace("procedure: holm", "procedure: hom"))
    assert exit_code(["check", str(spec), "--json"]) == 2
    captured = capsys.readouterr()
    assert captured.err == ""
    assert json.loads(captured.out)["faults"][0]["line"] == 30


def test_a_folder_that_is_not_ours_is_refused_before_any_test(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    spec = write_study(tmp_path)
    spec.with_suffix(".run").mkdir()
    (spec.with_suffix(".run") / "thesis.txt").write_text("mine")
    assert exit_code(["report", str(spec)]) == 2
    assert "this folder holds something else than a run of beforehand" in capsys.readouterr().err


def test_check_prints_the_plan_and_the_rows(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    spec = write_study(tmp_path)
    assert exit_code(["check", str(spec)]) == 0
    out = capsys.readouterr().out
    assert "strength/fibre-plain" in out
    assert "excluded: broken in transport" in out
    assert exit_code(["check", str(spec), "--json"]) == 0
    summary = json.loads(capsys.readouterr().out)
    assert [family["planned"] for family in summary["families"]] == [2, 2]
    assert summary["rows"]["slabs"]["received"] == 48
    assert summary["rows"]["slabs"]["analysed"] == 47  # one slab was broken; the one whose strength is missing stays

    (tmp_path / "slabs.csv").unlink()
    assert exit_code(["check", str(spec)]) == 0
    assert "No data yet" in capsys.readouterr().out


def test_check_says_what_no_data_could_reject(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Fisher's test on 3 and 3 slabs: the smallest one-sided p is 1 / C(6, 3) = 0.05, doubled 0.1."""
    spec = write_study(tmp_path, lines=[rows()[0], *rows()[1:10]])
    assert exit_code(["check", str(spec)]) == 1
    assert "cracks_fibre cannot be rejected" in capsys.readouterr().out


def test_draft_writes_names_and_kinds_and_no_number(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    write_study(tmp_path)
    (tmp_path / "screed.yaml").unlink()
    out = tmp_path / "spec.yaml"
    assert exit_code(["draft", str(tmp_path / "slabs.csv"), "--out", str(out)]) == 0
    text = out.read_text("utf-8")
    assert "mix: {kind: category, levels: [plain, fibre, foam]}" in text
    assert 'cracked: {kind: category, levels: ["yes", "no"]}' in text
    assert not [line for line in rows()[1:] if line.split(",")[2] in text.split() and line.split(",")[2]]
    assert (tmp_path / "beforehand.schema.json").is_file()
    capsys.readouterr()
    assert exit_code(["draft", str(tmp_path / "slabs.csv"), "--out", str(out)]) == 2
    assert "this file exists already and is left as it is" in capsys.readouterr().err


def test_a_draft_checks_once_its_empty_keys_are_written(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    write_study(tmp_path)
    out = tmp_path / "spec.yaml"
    exit_code(["draft", str(tmp_path / "slabs.csv"), "--out", str(out)])
    assert exit_code(["check", str(out)]) == 2
    faults = capsys.readouterr().err
    empty = ["title", "identifier", "one_row_is", "question", "claim"]
    assert faults.count("has no value") == len(empty)
    text = out.read_text("utf-8")
    for key in empty:
        text = text.replace(f" {key}:\n", f" {key}: written\n").replace(f" {key}:  ", f" {key}: written  ")
    out.write_text(text, "utf-8")
    assert exit_code(["check", str(out)]) == 0


def test_a_draft_without_data_names_what_is_left(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out = tmp_path / "spec.yaml"
    assert exit_code(["draft", "--out", str(out)]) == 0
    assert exit_code(["check", str(out)]) == 2
    assert "line 7, column 3: the key 'title' has no value." in capsys.readouterr().err


def test_methods_lists_every_entry(capsys: pytest.CaptureFixture[str]) -> None:
    assert exit_code(["methods", "--json"]) == 0
    listing = json.loads(capsys.readouterr().out)
    assert "holm" in listing["procedures"]
    assert "welch_t" in listing["statistical tests"]
    assert "extreme_pair_picked" in listing["warnings"]
    for names in listing.values():
        for name in names:
            assert exit_code(["methods", name]) == 0
            assert name in capsys.readouterr().out


def test_methods_says_what_a_test_takes_of_each_row(capsys: pytest.CaptureFixture[str]) -> None:
    assert exit_code(["methods", "log_rank"]) == 0
    assert "  takes of each row  strata where the plan has any; time\n" in capsys.readouterr().out
    assert exit_code(["methods", "welch_t"]) == 0
    assert "takes of each row" not in capsys.readouterr().out


def test_an_interruption_is_130(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def stop(*_: object, **__: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("beforehand.study.report", stop)
    assert exit_code(["report", str(write_study(tmp_path))]) == 130


def test_a_defect_is_ours_and_says_how_to_report_it(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def breaks(*_: object, **__: object) -> None:
        raise ZeroDivisionError("by nothing")

    monkeypatch.setattr("beforehand.study.report", breaks)
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path))
    assert exit_code(["report", str(write_study(tmp_path))]) == 3
    assert "This is a defect of beforehand" in capsys.readouterr().err


def test_draft_leaves_a_foreign_schema_file_alone(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "beforehand.schema.json").write_text('{"mine": 1}', "utf-8")
    assert exit_code(["draft", "--out", str(tmp_path / "spec.yaml")]) == 2
    assert "this file exists already and is no schema of beforehand" in capsys.readouterr().err
    assert (tmp_path / "beforehand.schema.json").read_text("utf-8") == '{"mine": 1}'
    assert not (tmp_path / "spec.yaml").exists()
    (tmp_path / "beforehand.schema.json").unlink()
    assert exit_code(["draft", "--out", str(tmp_path / "spec.yaml")]) == 0
    (tmp_path / "spec.yaml").unlink()
    assert exit_code(["draft", "--out", str(tmp_path / "spec.yaml")]) == 0  # over a schema of our own
