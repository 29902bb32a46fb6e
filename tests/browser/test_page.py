"""The page in a real browser: no error, no refusal by its own policy, nothing fetched, whole without scripts."""

import re
import subprocess
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
STUDIES = sorted(path.name for path in (ROOT / "sample_runs").iterdir() if path.is_dir())
OFFLINE = [
    "--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run",
    "--disable-background-networking", "--disable-component-update", "--disable-sync", "--enable-logging=stderr",
]  # fmt: skip


def open_page(page: Path, place: Path) -> tuple[str, list[str]]:
    """Give the document after its scripts ran, and what the page wrote to the console."""
    command = ["chromium", *OFFLINE, f"--user-data-dir={place / 'profile'}", "--dump-dom", page.as_uri()]
    done = subprocess.run(command, capture_output=True, text=True, check=True, timeout=120)
    return done.stdout, [line for line in done.stderr.splitlines() if ":CONSOLE" in line]


@pytest.mark.parametrize("study", STUDIES)
def test_opens_without_a_complaint(study: str, tmp_path: Path) -> None:
    document, console = open_page(ROOT / "sample_runs" / study / "report.html", tmp_path)
    assert console == []
    assert "</html>" in document


def test_the_policy_of_the_page_is_in_force(tmp_path: Path) -> None:
    """A style or an image from outside that somebody plants is refused, so the tests above can fail."""
    page = (ROOT / "sample_runs" / "cold_store" / "report.html").read_text("utf-8")
    planted = tmp_path / "planted.html"
    planted.write_text(
        page.replace("</main>", '<p style="color: red">x</p><img src="other.png" alt=""></main>'), "utf-8"
    )
    _, console = open_page(planted, tmp_path)
    assert len([line for line in console if "Content Security Policy" in line]) >= 2


def test_every_hypothesis_is_on_the_page_without_scripts(tmp_path: Path) -> None:
    folder = ROOT / "sample_runs" / "windscreens"
    page, scripts = re.subn(r"<script>.*?</script>", "", (folder / "report.html").read_text("utf-8"), flags=re.DOTALL)
    assert scripts
    (tmp_path / "plain.html").write_text(page, "utf-8")
    document, _ = open_page(tmp_path / "plain.html", tmp_path)
    ids = [line.split(",")[0] for line in (folder / "tests.csv").read_text("utf-8").splitlines()[1:]]
    text = re.sub(r"<[^>]+>", " ", document)
    assert [name for name in ids if name not in text] == []


def test_prints_on_paper(tmp_path: Path) -> None:
    page = ROOT / "sample_runs" / "cold_store" / "report.html"
    out = tmp_path / "page.pdf"
    command = ["chromium", *OFFLINE, f"--user-data-dir={tmp_path / 'profile'}", f"--print-to-pdf={out}", page.as_uri()]
    subprocess.run(command, capture_output=True, check=True, timeout=120)
    assert out.read_bytes().count(b"/Type /Page\n") >= 5
