"""The report again, from the run folder alone."""

import json
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from beforehand.errors import FolderFault
from beforehand.record.folder import Written, read_folder
from beforehand.study.running import BOTH, read_run


@dataclass(frozen=True)
class Reprinted:
    """What reprinting did, and whether the software is the one of the first printing."""

    written: Written
    same_environment: bool
    differences: tuple[str, ...]
    """One line for each difference of the environment."""
    same_bytes: bool
    """Whether the pages have the bytes of the first printing."""

    def summary(self) -> dict[str, Any]:
        """Give it as plain values."""
        return {
            "folder": str(self.written.folder),
            "same_environment": self.same_environment,
            "differences": list(self.differences),
            "same_bytes": self.same_bytes,
            "no_pdf_because": self.written.no_pdf_because or None,
        }

    def sentences(self) -> list[str]:
        """Say in words what was found."""
        if self.same_bytes:
            return ["The same bytes as the first printing."]
        if self.same_environment:
            return ["The environment is the same, yet the pages are not the bytes of the first printing."]
        return ["Printed with other software than the first time:", *(f"  {line}" for line in self.differences)]


def reprint(folder: Path, out: Path, *, only: tuple[str, ...] = BOTH) -> Reprinted:
    """Print the report of a run folder again, into another folder."""
    if Path(out).absolute() == Path(folder).absolute():
        raise FolderFault(str(out), "this is the run folder itself; give another one with --out")
    earlier = read_folder(Path(folder))
    was = read_run(folder)
    written = was.write(out, only=only)
    now = read_folder(Path(out))
    present = json.loads(now["environment.json"])
    differences = environment_differences({name: was.environment.get(name, "") for name in present}, present)
    pages = [name for name in ("report.html", "report.pdf") if name in now and name in earlier]
    return Reprinted(
        written=written,
        same_environment=not differences,
        differences=tuple(differences),
        same_bytes=all(now[name] == earlier[name] for name in pages),
    )


def environment_differences(was: dict[str, str], now: dict[str, str]) -> list[str]:
    """Name each line of the environment that differs."""
    names = sorted((was.keys() | now.keys()) - {"no report.pdf"})
    return [
        f"{name}: was {was.get(name, 'absent')}, is {now.get(name, 'absent')}"
        for name in names
        if was.get(name) != now.get(name)
    ]
