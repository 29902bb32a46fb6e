"""Checking a run folder: its checksums, its arithmetic, and a full rerun when the data are at hand."""

import json
import subprocess
import sys
import tempfile
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any, Literal

from beforehand.errors import DataFault, SpecFault
from beforehand.record.canonical import sha256
from beforehand.record.environment import environment
from beforehand.record.folder import open_folder
from beforehand.record.manifest import INPUTS, altered, read_checksums
from beforehand.record.recheck import recheck_text
from beforehand.study.comparing import record_differences, table_differences
from beforehand.study.reprinting import environment_differences
from beforehand.study.running import Progress, Run, silent

Answer = Literal["holds", "differs", "not done"]
Files = dict[str, bytes]

NAMED = 5
"""How many differences one line names."""
SAME_ANYWHERE = ("plan.json", "particulars.json", INPUTS)
"""Files that no environment changes; record.json holds the checksum of each."""


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
    """Check a run folder; nothing in it is executed, and nothing is written.

    Raises FolderFault when the folder is no run.
    """
    folder = Path(folder)
    files = open_folder(folder)
    progress("checking the checksums")
    checks = [_checksums(files), _parts(files)]
    progress("checking the arithmetic")
    checks.append(_arithmetic(folder, files))
    progress("rerunning")
    checks += _rerun(folder, files, data_root=data_root, progress=progress)
    return Verified(folder, tuple(checks))


def _checksums(files: Files) -> Check:
    wrong = altered(files)
    if wrong:
        return Check("checksums", "differs", f"not as the manifest says: {_named(wrong)}")
    return Check("checksums", "holds", "every file is as the manifest says")


def _parts(files: Files) -> Check:
    """Compare plan, particulars and inputs with the checksums that the record, and page one, give for them."""
    record = _record(files)
    named = {"plan.json": "plan_sha256", "particulars.json": "particulars_sha256", INPUTS: "data_sha256"}
    named |= {"tests.csv": "tests_csv_sha256"}
    wrong = [name for name, key in named.items() if sha256(files.get(name, b"")) != record.get(key)]
    if wrong:
        return Check("parts", "differs", f"not what record.json gives the checksum of: {_named(wrong)}")
    return Check("parts", "holds", "plan, particulars, inputs and tests have the checksums that record.json gives")


def _record(files: Files) -> dict[str, Any]:
    try:
        record = json.loads(files["record.json"])
    except ValueError:
        return {}
    return record if isinstance(record, dict) else {}


def _arithmetic(folder: Path, files: Files) -> Check:
    """Run the stand-alone checker that this version would write, never the one that lies in the folder."""
    record = _record(files)
    families = [family for family in record.get("families", []) if isinstance(family, dict)]
    procedures = tuple(sorted({str(family.get("procedure")) for family in families}))
    with tempfile.TemporaryDirectory() as place:
        script = Path(place) / "recheck.py"
        script.write_text(recheck_text(procedures, (str(record.get("scheme")),)), "utf-8")
        command = [sys.executable, "-I", str(script), str(folder)]
        done = subprocess.run(command, capture_output=True, text=True, check=False)
    last = (done.stdout.strip() or done.stderr.strip()).splitlines()[-1:]
    answer: Answer = "holds" if done.returncode == 0 else "differs"
    return Check("arithmetic", answer, last[0] if last else f"recheck.py ended with exit code {done.returncode}")


def _rerun(folder: Path, files: Files, *, data_root: Path | None, progress: Progress) -> list[Check]:
    base = _base_with_inputs(folder, files, data_root)
    if base is None:
        return [Check("rerun", "not done", "not rerun: no data with the recorded checksums at hand; see --data-root")]
    try:
        again = _run_again(base, files, data_root=data_root, progress=progress)
    except (SpecFault, DataFault) as fault:
        return [Check("rerun", "differs", f"this version can't run the spec: {str(fault).splitlines()[0]}")]
    return [_same_results(files, again), _same_pages(files, again)]


def _base_with_inputs(folder: Path, files: Files, data_root: Path | None) -> Path | None:
    """Find the folder from which every input file has the recorded checksum."""
    listed = read_checksums(files.get(INPUTS, b""))
    for base in (folder.absolute().parent, data_root):
        if base is not None and all(_has(base / name, checksum) for name, checksum in listed.items()):
            return base
    return None


def _has(path: Path, checksum: str) -> bool:
    return path.is_file() and sha256(path.read_bytes()) == checksum


def _run_again(base: Path, files: Files, *, data_root: Path | None, progress: Progress) -> Run:
    from beforehand.analysis.analyse import analyse
    from beforehand.data.dataset import read_data
    from beforehand.spec.load import read_spec

    spec = read_spec(files.get("spec.yaml", b""), Path("spec.yaml"))
    spec = replace(spec, path=base / "spec.yaml")
    record = analyse(spec, read_data(spec, data_root=data_root), progress=progress)
    return Run(
        record=record,
        spec=spec.source,
        plan=spec.plan,
        particulars=spec.particulars,
        default_folder=base / "spec.run",
    )


def _recorded_environment(files: Files) -> dict[str, str]:
    recorded: dict[str, str] = json.loads(files.get("environment.json", b"{}"))
    return recorded


def _same_results(files: Files, again: Run) -> Check:
    """Compare the rerun with what was recorded: byte for byte, or by meaning where the software is another one."""
    now = again.files()
    different = sorted(name for name, body in now.items() if files.get(name) != body)
    if not different:
        return Check("rerun", "holds", "the same bytes: record, tests, plan, particulars, inputs and checker")
    recorded = _recorded_environment(files)
    software = environment_differences({name: recorded.get(name, "") for name in again.environment}, again.environment)
    if not software:
        return Check("rerun", "differs", f"in the same environment, other bytes: {_named(different)}")
    wrong = [name for name in SAME_ANYWHERE if name in different]
    wrong += [f"record.json: {place}" for place in record_differences(files["record.json"], now["record.json"])]
    wrong += [f"tests.csv: {place}" for place in table_differences(files.get("tests.csv", b""), now["tests.csv"])]
    if wrong:
        return Check("rerun", "differs", f"in another environment, beyond what that explains: {_named(wrong)}")
    return Check("rerun", "holds", "in another environment: the same words and decisions, numbers agree to 1e-9")


def _same_pages(files: Files, again: Run) -> Check:
    """Draw the pages again and compare their bytes, where the software is the one that drew them."""
    from beforehand.report.draw import draw

    forms = tuple(form for form in ("html", "pdf") if f"report.{form}" in files)
    if not forms:
        return Check("pages", "not done", "there is neither report.html nor report.pdf")
    pages = draw(again.record, only=forms)
    drawn = {"report.html": pages.html, "report.pdf": pages.pdf}
    present, recorded = environment() | pages.environment, _recorded_environment(files)
    software = environment_differences({name: recorded.get(name, "") for name in present}, present)
    if software:
        return Check("pages", "not done", f"not compared byte for byte, the software differs: {_named(software)}")
    wrong = [name for name, body in drawn.items() if body is not None and files[name] != body]
    if wrong:
        return Check("pages", "differs", f"drawn again, other bytes: {_named(wrong)}")
    return Check("pages", "holds", f"drawn again, the same bytes: {_named([n for n, body in drawn.items() if body])}")


def _named(things: list[str]) -> str:
    more = f" and {len(things) - NAMED} more" if len(things) > NAMED else ""
    return ", ".join(things[:NAMED]) + more
