"""Record to pages, in one child process whose whole environment is written here.

What a notebook or a shell has set cannot reach the pages, what drawing sets cannot reach the caller, and the crash of
a C library is a message. The child reads the record from its standard input and answers with the pages as bytes.
"""

import gc
import json
import os
import signal
import subprocess
import sys
import warnings
from collections.abc import Iterator
from dataclasses import dataclass, replace
from pathlib import Path
from tempfile import TemporaryDirectory

from beforehand.record.canonical import read_record, record_bytes, results_bytes
from beforehand.record.model import Record

NO_SYSTEM_FONTS = (
    '<?xml version="1.0"?><!DOCTYPE fontconfig SYSTEM "urn:fontconfig:fonts.dtd"><fontconfig></fontconfig>\n'
)
# Where this machine keeps its programs and C libraries is all that is passed on.
PASSED_ON = ("PATH", "LD_LIBRARY_PATH", "DYLD_LIBRARY_PATH", "DYLD_FALLBACK_LIBRARY_PATH")


@dataclass(frozen=True)
class Pages:
    """The report as bytes, and what it was drawn with."""

    html: bytes | None
    pdf: bytes | None
    no_pdf_because: str
    """Why there is no PDF although one was asked for, in one sentence; otherwise ""."""
    environment: dict[str, str]
    """Versions of what can change a glyph, and the checksums of the fonts."""


def draw(record: Record, *, only: tuple[str, ...] = ("html", "pdf")) -> Pages:
    """Draw the pages of a record; RuntimeError, with what the child process said, when that fails."""
    order = (json.dumps(only).encode(), record_bytes(record), results_bytes(record.results))
    with TemporaryDirectory(prefix="beforehand-") as folder:
        child = subprocess.run(
            [sys.executable, "-P", "-X", "utf8", "-X", "faulthandler", "-m", "beforehand.report.draw"],
            input=b"".join(map(_framed, order)),
            capture_output=True,
            cwd=folder,
            env=_environment(Path(folder)),
            check=False,
        )
    if child.returncode:
        raise RuntimeError(f"{_ending(child.returncode)}:\n{child.stderr.decode(errors='replace')}")
    answer, html, pdf = _frames(child.stdout)
    return Pages(html=html or None, pdf=pdf or None, **json.loads(answer))


def _environment(folder: Path) -> dict[str, str]:
    fonts = folder / "fonts.conf"
    fonts.write_text(NO_SYSTEM_FONTS, encoding="utf-8")
    written = {
        "LC_ALL": "C.UTF-8",
        "TZ": "UTC",
        "SOURCE_DATE_EPOCH": "0",
        "PYTHONHASHSEED": "0",
        "PYTHONPATH": os.pathsep.join(entry for entry in sys.path if Path(entry).is_absolute()),
        "OMP_NUM_THREADS": "1",
        "OPENBLAS_NUM_THREADS": "1",
        "FONTCONFIG_FILE": str(fonts),
        **dict.fromkeys(("HOME", "TMPDIR", "MPLCONFIGDIR", "XDG_CACHE_HOME"), str(folder)),
    }
    return written | {name: os.environ[name] for name in PASSED_ON if name in os.environ}


def _ending(code: int) -> str:
    if code < 0:
        return f"The process that draws the report was ended by the signal {signal.Signals(-code).name}"
    return "The process that draws the report failed"


def _framed(content: bytes) -> bytes:
    return len(content).to_bytes(8, "big") + content


def _frames(stream: bytes) -> Iterator[bytes]:
    while stream:
        end = 8 + int.from_bytes(stream[:8], "big")
        yield stream[8:end]
        stream = stream[end:]


def _child() -> None:
    """Draw what standard input holds; everything that libraries print goes to standard error."""
    answer_to = os.fdopen(os.dup(1), "wb")
    os.dup2(2, 1)
    gc.disable()  # one report, then the process ends: collecting cycles would take a third of the time
    order, record_json, tests_csv = _frames(sys.stdin.buffer.read())
    pages = _drawn(read_record(record_json, tests_csv), json.loads(order))
    answer = json.dumps({"no_pdf_because": pages.no_pdf_because, "environment": pages.environment})
    for content in (answer.encode(), pages.html or b"", pages.pdf or b""):
        answer_to.write(_framed(content))
    answer_to.close()


def _drawn(record: Record, only: list[str]) -> Pages:
    from beforehand.report import fonts, html, pdf
    from beforehand.report.characters import printable_within
    from beforehand.report.figures import draw_figures
    from beforehand.report.versions import versions
    from beforehand.report.view import view

    warnings.filterwarnings("error", "Glyph .* missing")  # a figure with an empty box is not a figure
    fonts.register_in_matplotlib()
    figures = draw_figures(replace(record, drawn=printable_within(record.drawn)))
    shown = view(record, figures)
    lack = pdf.why_no_pdf() if "pdf" in only else ""
    return Pages(
        html=html.page(shown, figures) if "html" in only else None,
        pdf=pdf.pdf(shown, figures) if "pdf" in only and not lack else None,
        no_pdf_because=lack and lack + ("; everything else was written." if "html" in only else "."),
        environment=versions(),
    )


if __name__ == "__main__":
    _child()
