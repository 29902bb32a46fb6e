"""The run folder: written beside, moved into place, never half-written; an earlier one is kept under its checksum."""

import fcntl
import os
import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from beforehand.errors import FolderFault
from beforehand.record.canonical import sha256
from beforehand.record.manifest import INPUTS, MANIFEST, RUN, altered, manifest, read_checksums

THREE_CHECKSUMS = ("plan.json", INPUTS, "record.json")


@dataclass(frozen=True)
class Written:
    """What writing a run folder did."""

    folder: Path
    outcome: Literal["written", "unchanged", "restored"]
    kept: Path | None = None
    """Where the earlier report is now."""
    restored: tuple[str, ...] = ()
    """Files that were missing and are back."""
    no_pdf_because: str = ""
    """Why there is no report.pdf although one was asked for; "" otherwise."""


def open_folder(folder: Path) -> dict[str, bytes]:
    """Read every file of a run folder as it is; FolderFault when it isn't one. Finishes an interrupted move first."""
    whole = folder.absolute()
    if _staged(whole).exists():
        with _alone(whole.parent):
            _finish_interrupted(whole)
    if not folder.is_dir():
        raise FolderFault(str(folder), "there is no such folder; give the folder that `beforehand report` wrote")
    if not _is_ours(folder):
        raise FolderFault(str(folder), f"this is not a run folder: it has no {MANIFEST} that lists record.json")
    files = _files(folder)
    if "record.json" not in files:
        raise FolderFault(str(folder), "record.json is missing; without it the run can't be read")
    return files


def read_folder(folder: Path) -> dict[str, bytes]:
    """Read a run folder whose files are as its manifest says; FolderFault names those that are not.

    A page that is missing is no fault: it can be drawn again.
    """
    files = open_folder(folder)
    wrong = [name for name in altered(files) if name in files or not name.startswith("report.")]
    if wrong:
        raise FolderFault(
            str(folder), f"not as {MANIFEST} says: {', '.join(wrong)}. `beforehand verify` says what differs."
        )
    return files


def write_run(folder: Path, files: dict[str, bytes], run: bytes) -> Written:
    """Write a run folder, all or nothing.

    ``files`` are all files but the manifest, which is made here, and ``run.json``, which is ``run``. When the folder
    already holds a run with the same three checksums nothing is written, except files that are missing.
    """
    folder = folder.absolute()
    try:
        return _write_run(folder, files, run)
    except OSError as refused:
        raise FolderFault(
            str(folder), f"the folder can't be written: {refused.strerror}. Nothing is half-written."
        ) from None


def _write_run(folder: Path, files: dict[str, bytes], run: bytes) -> Written:
    folder.parent.mkdir(parents=True, exist_ok=True)
    with _alone(folder.parent):
        _finish_interrupted(folder)
        present = check_target(folder)
        if present and _same_run(present, files):
            return _restore(folder, present, files | {RUN: run})
        kept = None
        _stage(folder, files | {MANIFEST: manifest(files), RUN: run})
        if present:
            kept = _name_for_earlier(folder, present)
            os.rename(folder, kept)
        elif folder.exists():
            folder.rmdir()
        os.rename(_staged(folder), folder)
        _flush_directory(folder.parent)
    return Written(folder, "written", kept)


def write_failed(folder: Path, disagreement: bytes) -> Path:
    """Write what is left of a run whose two computations disagree: ``OUT.failed/disagreement.json``."""
    failed = folder.with_name(f"{folder.name}.failed")
    failed.mkdir(parents=True, exist_ok=True)
    _write(failed / "disagreement.json", disagreement)
    return failed


def check_target(folder: Path) -> dict[str, bytes]:
    """Give the files of the run that a folder holds, {} when there is none; FolderFault when it isn't ours."""
    if not folder.exists() and not folder.is_symlink():
        return {}
    if not folder.is_dir():
        raise FolderFault(str(folder), "this is a file; give a folder for the report with --out")
    if not any(folder.iterdir()):
        return {}
    if not _is_ours(folder):
        raise FolderFault(
            str(folder), "this folder holds something else than a run of beforehand; give another one with --out"
        )
    return _files(folder)


def _is_ours(folder: Path) -> bool:
    listing = folder / MANIFEST
    return listing.is_file() and "record.json" in read_checksums(listing.read_bytes())


def _files(folder: Path) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in sorted(folder.iterdir()) if path.is_file()}


def _same_run(present: dict[str, bytes], files: dict[str, bytes]) -> bool:
    """Whether the three checksums are the same, and no file that is there has been altered."""
    listed = read_checksums(present[MANIFEST])
    same = all(listed.get(name) == sha256(files[name]) for name in THREE_CHECKSUMS)
    return same and not [name for name in altered(present) if name in present]


def _restore(folder: Path, present: dict[str, bytes], files: dict[str, bytes]) -> Written:
    lacking = tuple(name for name in files if name not in present)
    if not lacking:
        return Written(folder, "unchanged")
    # environment.json says whether the PDF could be drawn, so it belongs to the PDF
    back = lacking + (("environment.json",) if "report.pdf" in lacking else ())
    now = present | {name: files[name] for name in back}
    for name in dict.fromkeys(back):
        _write(folder / name, now[name])
    _write(folder / MANIFEST, manifest(now))
    _flush_directory(folder)
    return Written(folder, "restored", restored=lacking)


def _name_for_earlier(folder: Path, present: dict[str, bytes]) -> Path:
    """Give ``NAME.run.<8 digits of its results>``, with a number behind it when that name is taken."""
    digits = read_checksums(present[MANIFEST])["record.json"][:8]
    name, number = folder.with_name(f"{folder.name}.{digits}"), 2
    while name.exists():
        name, number = folder.with_name(f"{folder.name}.{digits}.{number}"), number + 1
    return name


def _staged(folder: Path) -> Path:
    return folder.with_name(f".{folder.name}.new")


def _stage(folder: Path, files: dict[str, bytes]) -> None:
    staged = _staged(folder)
    staged.mkdir()
    for name, body in files.items():
        _write(staged / name, body)
    _flush_directory(staged)


def _finish_interrupted(folder: Path) -> None:
    """Finish the move that an earlier command began, or clear away what it had not finished writing."""
    staged = _staged(folder)
    if not staged.exists():
        return
    files = _files(staged)
    if not folder.exists() and RUN in files and MANIFEST in files and not altered(files):
        os.rename(staged, folder)
    else:
        shutil.rmtree(staged)


@contextmanager
def _alone(parent: Path) -> Iterator[None]:
    """Hold the parent folder while a run is written: two reports of one spec wait for each other."""
    handle = os.open(parent, os.O_RDONLY)
    try:
        fcntl.flock(handle, fcntl.LOCK_EX)
        yield
    finally:
        os.close(handle)


def _write(path: Path, body: bytes) -> None:
    """Write one file whole and have it on the disk before it gets its name."""
    beside = path.with_name(f".{path.name}.part")
    with beside.open("wb") as file:
        file.write(body)
        file.flush()
        os.fsync(file.fileno())
    os.replace(beside, path)


def _flush_directory(folder: Path) -> None:
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)
