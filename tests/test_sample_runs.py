"""The committed sample runs are what the code makes: words exactly, numbers to 1e-9. PDFs are looked at instead."""

import csv
import io
import json
import re
import subprocess
from html.parser import HTMLParser
from pathlib import Path
from typing import Any

import pytest

from beforehand.record.manifest import MANIFEST, RUN, altered
from beforehand.report.draw import draw
from beforehand.study import run

ROOT = Path(__file__).parents[1]
STUDIES = sorted(path.parent.name for path in (ROOT / "specs").glob("*/spec.yaml"))
AGREE = 1e-9  # what another processor or library version may change


def committed(study: str) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in (ROOT / "sample_runs" / study).iterdir()}


@pytest.fixture(scope="module", params=STUDIES)
def pair(request: pytest.FixtureRequest) -> tuple[dict[str, bytes], Any]:
    """Give a committed sample run, and the run made again."""
    return committed(request.param), run(ROOT / "specs" / request.param / "spec.yaml")


def alike(one: Any, other: Any, path: str = "") -> list[str]:
    """Name every place where two values differ by more than the agreement."""
    if isinstance(one, dict) and isinstance(other, dict):
        keys = one.keys() | other.keys()
        return [line for key in sorted(keys) for line in alike(one.get(key), other.get(key), f"{path}.{key}")]
    if isinstance(one, list) and isinstance(other, list) and len(one) == len(other):
        return [line for i, (x, y) in enumerate(zip(one, other, strict=True)) for line in alike(x, y, f"{path}[{i}]")]
    if isinstance(one, float) and isinstance(other, float):
        return [] if abs(one - other) <= AGREE * max(abs(one), abs(other), 1e-300) else [f"{path}: {one!r}, {other!r}"]
    return [] if one == other else [f"{path}: {one!r}, {other!r}"]


def test_every_study_has_its_sample_run() -> None:
    assert sorted(path.name for path in (ROOT / "sample_runs").iterdir() if path.is_dir()) == STUDIES


def test_the_record_is_what_the_code_makes(pair: tuple[dict[str, bytes], Any]) -> None:
    files, again = pair
    was, now = (json.loads(body) for body in (files["record.json"], again.files()["record.json"]))
    for record in (was, now):
        del record["tests_csv_sha256"]  # of the very bytes: another processor may give another last digit
        for one in record["agreement"]:
            del one["largest"], one["about"]  # rounding error, in essence
    assert alike(was, now) == []


def test_the_table_is_what_the_code_makes(pair: tuple[dict[str, bytes], Any]) -> None:
    files, again = pair
    tables = [list(csv.reader(io.StringIO(body.decode()))) for body in (files["tests.csv"], again.files()["tests.csv"])]

    def typed(cell: str) -> float | str:
        try:
            return float(cell)
        except ValueError:
            return cell

    was, now = ([[typed(cell) for cell in row] for row in table] for table in tables)
    assert alike(was, now) == []


def test_plan_and_inputs_have_the_committed_checksums(pair: tuple[dict[str, bytes], Any]) -> None:
    files, again = pair
    for name in ("plan.json", "particulars.json", "inputs-sha256.txt", "spec.yaml"):
        assert files[name] == again.files()[name], name


class Text(HTMLParser):
    """The text of a page, without styles and scripts."""

    def __init__(self) -> None:
        super().__init__()
        self.parts: list[str] = []
        self.skipping = False

    def handle_starttag(self, tag: str, attrs: Any) -> None:
        self.skipping = tag in ("style", "script")

    def handle_endtag(self, tag: str) -> None:
        self.skipping = False

    def handle_data(self, data: str) -> None:
        if not self.skipping and data.strip():
            self.parts.append(" ".join(data.split()))


def words(page: bytes) -> list[str]:
    """Give the text of a report; what follows from the very last digit of a number is left out."""
    parser = Text()
    parser.feed(page.decode())
    # checksums of results, and with them the report's number; rounding errors of the second computation
    volatile = re.compile(r"^[0-9a-f ]{60,}$|\.[0-9a-f]{8}\b|× 10⁻¹\d|^10⁻|e-1\d")
    return [part for part in parser.parts if not volatile.search(part)]


def test_the_page_says_what_the_code_says(pair: tuple[dict[str, bytes], Any]) -> None:
    files, again = pair
    page = draw(again.record, only=("html",)).html
    assert page is not None
    assert words(files["report.html"]) == words(page)


@pytest.mark.parametrize("study", STUDIES)
def test_a_sample_run_is_whole(study: str) -> None:
    files = committed(study)
    assert RUN not in files
    assert altered(files) == []
    assert MANIFEST in files
    done = subprocess.run(
        ["python3", "recheck.py"], cwd=ROOT / "sample_runs" / study, capture_output=True, text=True, check=False
    )
    assert done.returncode == 0, done.stdout
