"""The run folder: all or nothing, nothing deleted, nothing foreign touched."""

import os
import subprocess
from multiprocessing import get_context
from pathlib import Path

import pytest

from beforehand.errors import FolderFault
from beforehand.record import folder as room
from beforehand.record.folder import check_target, read_folder, write_failed, write_run
from beforehand.record.manifest import altered

FIRST = {
    "plan.json": b"{}\n",
    "inputs-sha256.txt": b"",
    "record.json": b'{"a": 1}\n',
    "tests.csv": b"id\n",
    "environment.json": b'{"no report.pdf": "not asked for"}\n',
    "report.html": b"<p>",
}
SECOND = FIRST | {"record.json": b'{"a": 2}\n'}
RUN = b'{"began": "now"}\n'


def everything(folder: Path) -> dict[str, bytes]:
    return {str(path.relative_to(folder)): path.read_bytes() for path in sorted(folder.rglob("*")) if path.is_file()}


def test_writes_a_folder_whose_manifest_holds(tmp_path: Path) -> None:
    written = write_run(tmp_path / "a.run", FIRST, RUN)
    assert written.outcome == "written"
    assert sorted(path.name for path in tmp_path.iterdir()) == ["a.run"]
    assert altered(read_folder(tmp_path / "a.run")) == []
    done = subprocess.run(["sha256sum", "-c", "--quiet", "manifest-sha256.txt"], cwd=tmp_path / "a.run", check=False)
    assert done.returncode == 0


def test_the_same_run_writes_nothing(tmp_path: Path) -> None:
    write_run(tmp_path / "a.run", FIRST, RUN)
    before = everything(tmp_path)
    assert write_run(tmp_path / "a.run", FIRST, b'{"began": "later"}\n').outcome == "unchanged"
    assert everything(tmp_path) == before


def test_missing_files_are_restored(tmp_path: Path) -> None:
    target = tmp_path / "a.run"
    write_run(target, FIRST, RUN)
    before = everything(target)
    (target / "report.html").unlink()
    (target / "run.json").unlink()
    written = write_run(target, FIRST, RUN)
    assert written.outcome == "restored"
    assert set(written.restored) == {"report.html", "run.json"}
    assert everything(target) == before


def test_a_pdf_drawn_later_brings_its_environment(tmp_path: Path) -> None:
    target = tmp_path / "a.run"
    write_run(target, FIRST, RUN)
    written = write_run(target, FIRST | {"report.pdf": b"%PDF", "environment.json": b"{}\n"}, RUN)
    assert written.restored == ("report.pdf",)
    assert (target / "environment.json").read_bytes() == b"{}\n"
    assert altered(read_folder(target)) == []


def test_an_earlier_run_is_kept_under_its_checksum(tmp_path: Path) -> None:
    target = tmp_path / "a.run"
    write_run(target, FIRST, RUN)
    before = everything(target)
    written = write_run(target, SECOND, RUN)
    assert written.kept is not None
    assert written.kept.name == "a.run.e8c628ed"  # printf '{"a": 1}\n' | sha256sum
    assert everything(written.kept) == before
    assert (target / "record.json").read_bytes() == SECOND["record.json"]


def test_going_back_and_forth_keeps_every_folder(tmp_path: Path) -> None:
    target = tmp_path / "a.run"
    for files in (FIRST, SECOND, FIRST, SECOND):
        write_run(target, files, RUN)
    assert len([path for path in tmp_path.iterdir() if path.is_dir()]) == 4


def test_an_altered_folder_is_set_aside_and_written_again(tmp_path: Path) -> None:
    target = tmp_path / "a.run"
    write_run(target, FIRST, RUN)
    (target / "report.html").write_bytes(b"<p>altered")
    written = write_run(target, FIRST, RUN)
    assert written.kept is not None
    assert (written.kept / "report.html").read_bytes() == b"<p>altered"
    assert (target / "report.html").read_bytes() == b"<p>"


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (
            lambda path: (path.mkdir(), (path / "thesis.txt").write_text("mine")),
            "this folder holds something else than a run of beforehand; give another one with --out",
        ),
        (lambda path: path.write_text("mine"), "this is a file; give a folder for the report with --out"),
    ],
)
def test_what_is_not_ours_is_not_touched(tmp_path: Path, make: object, message: str) -> None:
    target = tmp_path / "a.run"
    make(target)  # type: ignore[operator]
    before = everything(tmp_path)
    with pytest.raises(FolderFault) as refused:
        write_run(target, FIRST, RUN)
    assert str(refused.value) == f"{target}: {message}"
    assert everything(tmp_path) == before
    with pytest.raises(FolderFault):
        check_target(target)


def test_an_empty_folder_is_taken(tmp_path: Path) -> None:
    (tmp_path / "a.run").mkdir()
    assert write_run(tmp_path / "a.run", FIRST, RUN).outcome == "written"


def test_a_crash_before_the_move_loses_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """The machine stops between the two renames: the next command finishes the move."""
    target = tmp_path / "a.run"
    write_run(target, FIRST, RUN)
    real, calls = os.rename, []

    def stops(source: Path, goal: Path) -> None:
        calls.append(goal)
        if len(calls) == 2:
            raise KeyboardInterrupt
        real(source, goal)

    monkeypatch.setattr(room.os, "rename", stops)
    with pytest.raises(KeyboardInterrupt):
        write_run(target, SECOND, RUN)
    monkeypatch.undo()
    assert not target.exists()
    assert write_run(target, SECOND, RUN).outcome == "unchanged"
    assert (target / "record.json").read_bytes() == SECOND["record.json"]


def test_a_crash_while_writing_leaves_the_earlier_run(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    target = tmp_path / "a.run"
    write_run(target, FIRST, RUN)
    before = everything(target)

    def stops(path: Path, body: bytes) -> None:
        if path.name == "tests.csv":
            raise KeyboardInterrupt
        path.write_bytes(body)

    monkeypatch.setattr(room, "_write", stops)
    with pytest.raises(KeyboardInterrupt):
        write_run(target, SECOND, RUN)
    monkeypatch.undo()
    assert everything(target) == before
    assert write_run(target, SECOND, RUN).outcome == "written"
    assert not [path for path in tmp_path.iterdir() if path.name.startswith(".")]


def _write_number(target: Path, number: int) -> None:
    write_run(target, FIRST | {"record.json": b'{"a": %d}\n' % number}, RUN)


def test_two_reports_at_once_wait_for_each_other(tmp_path: Path) -> None:
    target = tmp_path / "a.run"
    fork = get_context("fork")
    both = [fork.Process(target=_write_number, args=(target, number)) for number in range(6)]
    for process in both:
        process.start()
    for process in both:
        process.join()
    assert [process.exitcode for process in both] == [0] * 6
    assert len(list(tmp_path.iterdir())) == 6
    assert all(altered(read_folder(path)) == [] for path in tmp_path.iterdir())


def test_a_folder_that_is_no_run_is_named(tmp_path: Path) -> None:
    with pytest.raises(FolderFault) as refused:
        read_folder(tmp_path / "none")
    assert str(refused.value).endswith("there is no such folder; give the folder that `beforehand report` wrote")
    with pytest.raises(FolderFault) as refused:
        read_folder(tmp_path)
    assert str(refused.value).endswith("this is not a run folder: it has no manifest-sha256.txt that lists record.json")
    write_run(tmp_path / "a.run", FIRST, RUN)
    (tmp_path / "a.run" / "tests.csv").unlink()
    with pytest.raises(FolderFault) as refused:
        read_folder(tmp_path / "a.run")
    assert str(refused.value).endswith(
        "not as manifest-sha256.txt says: tests.csv. `beforehand verify` says what differs."
    )
    (tmp_path / "a.run" / "record.json").unlink()
    with pytest.raises(FolderFault) as refused:
        read_folder(tmp_path / "a.run")
    assert str(refused.value).endswith("record.json is missing; without it the run can't be read")


def test_a_failed_run_leaves_both_numbers(tmp_path: Path) -> None:
    failed = write_failed(tmp_path / "a.run", b"[]\n")
    assert failed.name == "a.run.failed"
    assert (failed / "disagreement.json").read_bytes() == b"[]\n"
