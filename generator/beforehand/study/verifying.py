"""Checking a run folder: its checksums, its arithmetic, and a full rerun when the data are at hand."""

import csv
import io
import json
import subprocess
import sys
import tempfile
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any, Literal

from beforehand.errors import DataFault, SpecFault
from beforehand.record.canonical import read_record, sha256
from beforehand.record.environment import environment
from beforehand.record.folder import read_folder
from beforehand.record.manifest import INPUTS, altered, read_checksums
from beforehand.record.model import Record
from beforehand.record.recheck import recheck_text
from beforehand.study.reprinting import environment_differences
from beforehand.study.running import Progress, Run, silent

Answer = Literal["holds", "differs", "not done"]

NUMBERS_AGREE = 1e-9
"""Relative difference of numbers that another environment may cause."""


@dataclass(frozen=True)
class Check:
    """One thing that was checked, and what came of it."""

    name: str
    answer: Answer
    detail: str


@dataclass(frozen=True)
class Verified:
    """What checking a run folder found."""

    folder: Path
    checks: tuple[Check, ...]

    @property
    def holds(self) -> bool:
        """Whether nothing differs; what could not be done is said, and isn't a difference."""
        return all(check.answer != "differs" for check in self.checks)

    def sentence(self) -> str:
        """Give the answer in one sentence."""
        if not self.holds:
            return "Something differs from what the run recorded."
        undone = [check for check in self.checks if check.answer == "not done"]
        return "Everything that could be checked holds." if undone else "Everything holds."

    def summary(self) -> dict[str, Any]:
        """Give it as plain values."""
        checks = [{"check": c.name, "answer": c.answer, "detail": c.detail} for c in self.checks]
        return {"folder": str(self.folder), "holds": self.holds, "checks": checks}


def verify(folder: str | Path, *, data_root: Path | None = None, progress: Progress = silent) -> Verified:
    """Check a run folder; nothing in it is executed, and nothing is written."""
    folder = Path(folder)
    files = read_folder(folder)
    progress("checking the checksums")
    checks = [_checksums(files)]
    progress("checking the arithmetic")
    checks.append(_arithmetic(folder, files))
    progress("rerunning")
    checks += _rerun(folder, files, data_root=data_root, progress=progress)
    return Verified(folder, tuple(checks))


def _checksums(files: dict[str, bytes]) -> Check:
    wrong = altered(files)
    if wrong:
        return Check("checksums", "differs", f"not as the manifest says: {', '.join(wrong)}")
    return Check("checksums", "holds", f"{len(files) - 2} files are as the manifest says")


def _arithmetic(folder: Path, files: dict[str, bytes]) -> Check:
    """Run the stand-alone checker that this version would write, never the one that lies in the folder."""
    content = json.loads(files["record.json"])
    procedures = tuple(sorted({family["procedure"] for family in content["families"]}))
    text = recheck_text(procedures, (content["scheme"],))
    with tempfile.TemporaryDirectory() as place:
        script = Path(place) / "recheck.py"
        script.write_text(text, "utf-8")
        command = [sys.executable, "-I", str(script), str(folder)]
        done = subprocess.run(command, capture_output=True, text=True, check=False)
    last = (done.stdout.strip() or done.stderr.strip()).splitlines()[-1:]
    answer: Answer = "holds" if done.returncode == 0 else "differs"
    return Check("arithmetic", answer, last[0] if last else f"recheck.py ended with exit code {done.returncode}")


def _rerun(folder: Path, files: dict[str, bytes], *, data_root: Path | None, progress: Progress) -> list[Check]:
    base = _base_with_inputs(folder, files, data_root)
    if base is None:
        return [Check("rerun", "not done", "not rerun: no data with the recorded checksums at hand; see --data-root")]
    try:
        again = _run_again(base, files, data_root=data_root, progress=progress)
    except (SpecFault, DataFault) as fault:
        return [Check("rerun", "differs", f"this version can't run the spec: {str(fault).splitlines()[0]}")]
    return [_same_results(files, again), *_same_pages(files, again)]


def _base_with_inputs(folder: Path, files: dict[str, bytes], data_root: Path | None) -> Path | None:
    """Find the folder from which every input file has the recorded checksum."""
    listed = read_checksums(files.get(INPUTS, b""))
    for base in (folder.absolute().parent, data_root):
        if base is not None and all(_has(base / name, checksum) for name, checksum in listed.items()):
            return base
    return None


def _has(path: Path, checksum: str) -> bool:
    return path.is_file() and sha256(path.read_bytes()) == checksum


def _run_again(base: Path, files: dict[str, bytes], *, data_root: Path | None, progress: Progress) -> Run:
    from beforehand.analysis.analyse import analyse
    from beforehand.data.dataset import read_data
    from beforehand.spec.load import load_spec

    with tempfile.TemporaryDirectory() as place:
        path = Path(place) / "spec.yaml"
        path.write_bytes(files["spec.yaml"])
        spec = replace(load_spec(path), path=base / "spec.yaml")
    record = analyse(spec, read_data(spec, data_root=data_root), progress=progress)
    return Run(
        record=record,
        spec=spec.source,
        plan=spec.plan,
        particulars=spec.particulars,
        default_folder=base / "spec.run",
    )


def _same_results(files: dict[str, bytes], again: Run) -> Check:
    now = again.files()
    differing = sorted(name for name, body in now.items() if files.get(name) != body)
    if not differing:
        return Check("rerun", "holds", "the same bytes: record, tests, plan, particulars, input list and checker")
    was = read_record(files["record.json"], files["tests.csv"])
    flipped = _decisions_that_differ(was, again.record)
    if flipped:
        return Check("rerun", "differs", f"decisions differ: {', '.join(flipped)}")
    largest = _largest_difference(files["tests.csv"], now["tests.csv"])
    software = environment_differences(json.loads(files.get("environment.json", b"{}")), again.environment)
    where = "in another environment" if [line for line in software if "absent" not in line] else "in this environment"
    if largest <= NUMBERS_AGREE:
        return Check("rerun", "holds", f"{where}: the same decisions, numbers agree to {largest:.1e} (relative)")
    return Check(
        "rerun", "differs", f"{where}: the same decisions, but numbers differ by up to {largest:.1e} (relative)"
    )


def _decisions_that_differ(was: Record, now: Record) -> list[str]:
    states = dict(zip(was.results.id, was.results.state, strict=True))
    present = dict(zip(now.results.id, now.results.state, strict=True))
    return sorted(name for name in states.keys() | present.keys() if states.get(name) != present.get(name))


def _largest_difference(was: bytes, now: bytes) -> float:
    """Give the largest relative difference of two tables' numbers; infinite when anything else differs."""
    largest = 0.0
    rows = zip(csv.reader(io.StringIO(was.decode())), csv.reader(io.StringIO(now.decode())), strict=False)
    for row, other in rows:
        for x, y in zip(row, other, strict=False):
            if x != y:
                largest = max(largest, _difference(x, y))
    return largest


def _difference(x: str, y: str) -> float:
    try:
        a, b = float(x), float(y)
    except ValueError:
        return float("inf")
    return abs(a - b) / max(abs(a), abs(b), 1e-300)


def _same_pages(files: dict[str, bytes], again: Run) -> list[Check]:
    """Draw the pages again and compare their bytes, where the environment is the one that drew them."""
    from beforehand.report.draw import draw

    forms = tuple(form for form in ("html", "pdf") if f"report.{form}" in files)
    pages = draw(again.record, only=forms)
    drawn = {"report.html": pages.html, "report.pdf": pages.pdf}
    software = environment_differences(
        json.loads(files.get("environment.json", b"{}")), environment() | pages.environment
    )
    if software:
        return [Check("pages", "not done", f"not compared byte for byte, the software differs: {'; '.join(software)}")]
    wrong = [name for name, body in drawn.items() if body is not None and files[name] != body]
    if wrong:
        return [Check("pages", "differs", f"drawn again, other bytes: {', '.join(wrong)}")]
    return [Check("pages", "holds", f"drawn again, the same bytes: {', '.join(n for n, b in drawn.items() if b)}")]
