"""The main job: from a spec to a written run folder."""

from dataclasses import asdict, dataclass
from pathlib import Path
from typing import Any

from beforehand.errors import TwoComputationsDisagree
from beforehand.record.canonical import json_bytes
from beforehand.record.folder import Written, check_target, write_failed
from beforehand.study.running import BOTH, Progress, Run, run, silent


@dataclass(frozen=True)
class Reported:
    """A run, and what writing it did."""

    run: Run
    written: Written

    def summary(self) -> dict[str, Any]:
        """Give both as plain values."""
        written = self.written
        return self.run.summary() | {
            "folder": str(written.folder),
            "outcome": written.outcome,
            "kept": str(written.kept) if written.kept else None,
            "restored": list(written.restored),
            "no_pdf_because": written.no_pdf_because or None,
        }


def report(
    spec: Path,
    out: Path | None = None,
    *,
    only: tuple[str, ...] = BOTH,
    data_root: Path | None = None,
    progress: Progress = silent,
) -> Reported:
    """Run a spec and write its run folder; when the two computations disagree, only ``OUT.failed``."""
    folder = out or Path(spec).with_suffix(".run")
    check_target(folder)  # before any computation: a folder that isn't ours is never touched
    try:
        done = run(spec, data_root=data_root, progress=progress)
    except TwoComputationsDisagree as disagreement:
        write_failed(folder, json_bytes([asdict(d) for d in disagreement.disagreements]))
        raise
    return Reported(done, done.write(folder, only=only, progress=progress))
