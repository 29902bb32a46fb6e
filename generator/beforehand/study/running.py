"""A run: made from a spec and its data, or read back from its folder."""

import getpass
import html
import json
import platform
import time
from collections.abc import Callable
from dataclasses import dataclass, field, fields, replace
from datetime import UTC, datetime
from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING, Any

from beforehand.errors import CallFault
from beforehand.record.canonical import json_bytes, read_record, record_bytes, report_number, results_bytes, sha256
from beforehand.record.environment import environment
from beforehand.record.folder import Written, check_target, read_folder, write_run
from beforehand.record.manifest import INPUTS, checksum_lines
from beforehand.record.model import Record, WarningRecord
from beforehand.record.recheck import recheck_text
from beforehand.terms import STATE_WORDS

if TYPE_CHECKING:
    import pandas as pd

Progress = Callable[[str], None]
"""Called with the name of each stage as it begins."""

BOTH = ("html", "pdf")


def silent(_: str) -> None:
    """Show no progress."""


@dataclass(frozen=True, kw_only=True)
class Run:
    """One run: its record, and what a run folder holds beside it."""

    record: Record
    spec: bytes
    plan: bytes
    particulars: bytes
    default_folder: Path
    """``NAME.run`` beside the spec, or the folder the run was read from."""
    environment: dict[str, str] = field(default_factory=environment)
    began: float = field(default_factory=time.time)

    @property
    def identifier(self) -> str:
        """The report's number."""
        return report_number(self.record, self.results_sha256)

    @cached_property
    def results_sha256(self) -> str:
        """The results checksum: SHA-256 of record.json."""
        return sha256(record_bytes(self.record))

    @property
    def tests(self) -> "pd.DataFrame":
        """The table of record: one row per hypothesis."""
        import pandas as pd

        results = self.record.results
        return pd.DataFrame({column.name: list(getattr(results, column.name)) for column in fields(results)})

    @property
    def warnings(self) -> tuple[WarningRecord, ...]:
        """What the warning rules found."""
        return self.record.warnings

    def write(
        self, folder: str | Path | None = None, *, only: tuple[str, ...] = BOTH, progress: Progress = silent
    ) -> Written:
        """Write the run folder, all or nothing; without Pango everything but the PDF.

        Raises FolderFault when the folder holds something else, CallFault when only a PDF was asked for and can't be.
        """
        from beforehand.report.draw import draw

        target = Path(folder) if folder is not None else self.default_folder
        check_target(target)
        progress("drawing the report")
        pages = draw(self.record, only=only)
        lacking = "pdf" in only and pages.pdf is None
        if lacking and only == ("pdf",):
            raise CallFault("report.pdf", f"{pages.no_pdf_because} Nothing was written.")
        drawn = {"report.html": pages.html, "report.pdf": pages.pdf}
        files = self.files() | {name: body for name, body in drawn.items() if body is not None}
        why_none = {} if pages.pdf is not None else {"no report.pdf": pages.no_pdf_because or "not asked for"}
        files["environment.json"] = json_bytes(self.environment | pages.environment | why_none)
        progress("writing the run folder")
        written = write_run(target, files, self._run_json(target))
        return replace(written, no_pdf_because=pages.no_pdf_because) if lacking else written

    def files(self) -> dict[str, bytes]:
        """Give the files of the run folder that repeat byte for byte and need no drawing."""
        record = self.record
        procedures = tuple(sorted({family.procedure for family in record.families}))
        return {
            "record.json": record_bytes(record),
            "tests.csv": results_bytes(record.results),
            "spec.yaml": self.spec,
            "plan.json": self.plan,
            "particulars.json": self.particulars,
            INPUTS: checksum_lines({entry.file: entry.sha256 for entry in record.inputs}),
            "recheck.py": recheck_text(procedures, (record.scheme,)).encode(),
        }

    def summary(self) -> dict[str, Any]:
        """Give the summary of decisions as plain values."""
        return {
            "identifier": self.identifier,
            "title": self.record.study.title,
            "families": {family.id: dict(family.states) for family in self.record.families},
            "decisions": dict(zip(self.record.results.id, self.record.results.state, strict=True)),
            "warnings": [
                {"rule": warning.rule, "severity": warning.severity, "about": warning.about}
                for warning in self.record.warnings
            ],
            "checksums": {
                "plan": self.record.plan_sha256,
                "data": self.record.data_sha256,
                "results": self.results_sha256,
            },
        }

    def _run_json(self, folder: Path) -> bytes:
        return json_bytes(
            {
                "began": datetime.fromtimestamp(self.began, UTC).isoformat(timespec="seconds"),
                "seconds": round(time.time() - self.began, 3),
                "machine": platform.node(),
                "system": platform.platform(),
                "user": getpass.getuser(),
                "folder": str(folder.absolute()),
            }
        )

    def _repr_html_(self) -> str:
        """Show the summary of decisions in a notebook."""
        head = "".join(
            f"<th scope='col'>{word}</th>" for word in ("family", "procedure", "m planned", "m computed", "decisions")
        )
        rows = "".join(
            f"<tr><th scope='row'>{html.escape(family.id)}</th><td>{html.escape(family.procedure)}</td>"
            f"<td>{family.planned}</td><td>{family.computed}</td>"
            f"<td>{', '.join(f'{count} {STATE_WORDS[state]}' for state, count in family.states.items())}</td></tr>"
            for family in self.record.families
        )
        caption = html.escape(f"{self.record.study.title} ({self.identifier})")
        return f"<table><caption>{caption}</caption><thead><tr>{head}</tr></thead><tbody>{rows}</tbody></table>"


def run(spec: str | Path, *, data_root: str | Path | None = None, progress: Progress = silent) -> Run:
    """Run a spec: read it and its data, test, adjust, decide, warn.

    Parameters
    ----------
    spec : str or Path
        The YAML file.
    data_root : str or Path, optional
        A folder in which data may lie besides the spec's own.
    progress : callable, optional
        Called with the name of each stage as it begins.

    Raises
    ------
    SpecFault, DataFault
        When the spec or the data are wrong; the message names every fault.
    """
    from beforehand.analysis.analyse import analyse
    from beforehand.data.dataset import read_data
    from beforehand.spec.load import load_spec

    began = time.time()
    progress("reading the spec")
    planned = load_spec(Path(spec))
    progress("reading the data")
    dataset = read_data(planned, data_root=None if data_root is None else Path(data_root))
    record = analyse(planned, dataset, progress=progress)
    return Run(
        record=record,
        spec=planned.source,
        plan=planned.plan,
        particulars=planned.particulars,
        default_folder=planned.path.with_suffix(".run"),
        began=began,
    )


def read_run(folder: str | Path) -> Run:
    """Read a run folder back, without the data; FolderFault when it isn't one, or was altered."""
    files = read_folder(Path(folder))
    return Run(
        record=read_record(files["record.json"], files["tests.csv"]),
        spec=files.get("spec.yaml", b""),
        plan=files.get("plan.json", b""),
        particulars=files.get("particulars.json", b""),
        default_folder=Path(folder),
        environment=json.loads(files.get("environment.json", b"{}")),
    )
