"""The whole: a record drawn in a child process that nothing outside reaches."""

import io
import json
import os
import re
import subprocess
import sys
import zlib

import page as validator
import pytest
from pypdf import PdfReader

from beforehand.record.canonical import record_bytes, results_bytes, sha256
from beforehand.report.draw import Pages, draw
from beforehand.report.fonts import checksums
from beforehand.report.pdf import missing_library

needs_pango = pytest.mark.skipif(bool(missing_library()), reason="no PDF here: Pango is missing")


@pytest.fixture(scope="module")
def pages(record) -> Pages:
    return draw(record)


@pytest.fixture(scope="module")
def text(pages) -> str:
    return pages.html.decode()


@needs_pango
@pytest.mark.parametrize("profile", ["2a", "ua1"])
def test_the_report_conforms(pages, profile):
    report = validator.validate_pdf_bytes(pages.pdf, profile=profile, limits=validator.SafetyLimits.unlimited())
    assert [(failure.rule_id, failure.message) for failure in report.failures] == []


@needs_pango
def test_readers_of_the_pdf_find_their_way(pages, record):
    reader = PdfReader(io.BytesIO(pages.pdf))
    assert reader.outline
    for number, sheet in enumerate(reader.pages[1:], 2):
        assert f"{number} of {len(reader.pages)}" in " ".join(sheet.extract_text().split())
    assert sha256(record_bytes(record))[:8] in reader.pages[0].extract_text().replace(" ", "")


@needs_pango
def test_the_world_of_the_caller_changes_no_byte(record, pages, tmp_path):
    """A notebook's rcParams, time zone, locale, folder, hash seed and umask stay outside."""
    (tmp_path / "record.json").write_bytes(record_bytes(record))
    (tmp_path / "tests.csv").write_bytes(results_bytes(record.results))
    (tmp_path / "matplotlibrc").write_text("font.family: serif\nsvg.fonttype: none\nfigure.dpi: 300\n")
    caller = """
import os, sys, time, zlib
os.umask(0o077)
import matplotlib
matplotlib.rcParams.update({"font.size": 30, "svg.fonttype": "none", "font.family": "serif", "text.usetex": True})
from pathlib import Path
from beforehand.record.canonical import read_record
from beforehand.report.draw import draw
here = Path(sys.argv[1])
pages = draw(read_record((here / "record.json").read_bytes(), (here / "tests.csv").read_bytes()))
(here / "report.html").write_bytes(pages.html)
(here / "report.pdf").write_bytes(pages.pdf)
"""
    world = {
        **os.environ, "PYTHONHASHSEED": "99", "TZ": "Asia/Tokyo", "LC_ALL": "C", "LANG": "de_DE.UTF-8",
        "SOURCE_DATE_EPOCH": "1234567890", "HOME": "/nonexistent", "OMP_NUM_THREADS": "3", "MPLBACKEND": "agg",
        "MPLCONFIGDIR": str(tmp_path), "FONTCONFIG_FILE": "/dev/null", "PYTHONWARNINGS": "error",
        "PYTHONPATH": os.pathsep.join(sys.path),
    }  # fmt: skip
    subprocess.run([sys.executable, "-W", "ignore", "-c", caller, tmp_path], cwd=tmp_path, env=world, check=True)
    assert (tmp_path / "report.html").read_bytes() == pages.html
    assert (tmp_path / "report.pdf").read_bytes() == pages.pdf


def test_one_form_can_be_asked_for(record, pages):
    alone = draw(record, only=("html",))
    assert alone.html == pages.html
    assert alone.pdf is None
    assert alone.no_pdf_because == ""


def test_the_environment_names_what_decides_a_glyph(pages):
    named = pages.environment
    assert {"weasyprint", "pydyf", "fonttools", "matplotlib", "jinja2"} <= set(named)
    assert named["zlib"] == zlib.ZLIB_RUNTIME_VERSION
    assert {f"font {name}": checksum for name, checksum in checksums().items()}.items() <= named.items()
    if not missing_library():
        assert all(re.fullmatch(r"\d+\.\d+\.\d+", named[library]) for library in ("pango", "harfbuzz", "fontconfig"))
    assert json.dumps(named)


def test_the_page_asks_for_nothing_and_runs_nothing_else(text):
    addresses = re.findall(r'\b(?:src|href|srcset|action|poster|data)="([^"]*)"', text)
    assert addresses
    assert all(address.startswith(("data:image/svg+xml;base64,", "#", "https://")) for address in addresses)
    assert not re.search(r"<(?:link|iframe|object|embed|base|form)\b", text)
    assert not re.search(r"\s(?:style|on\w+)=[\"']", text)  # a style attribute is dead under the policy
    assert "@import" not in text
    assert "\r" not in text


def test_the_policy_covers_each_style_and_script(text):
    policy = re.search(r'<meta http-equiv="Content-Security-Policy" content="([^"]+)">', text)[1]
    assert policy.startswith("default-src 'none'; style-src 'sha256-")
    assert "unsafe" not in policy
    opened = len(re.findall(r"<(?:style|script)\b", text))
    assert policy.count("'sha256-") == opened >= 2
    assert text.index("Content-Security-Policy") < text.index("<style")


def test_words_of_an_author_stay_words(text):
    assert "<script>alert" not in text
    assert "&lt;script&gt;alert(1)&lt;/script&gt;" in text
    assert "{{ 7*7 }}" in text


def test_a_character_without_a_glyph_is_shown_by_its_code(text):
    assert "U+51B7" in text
    assert "冷" not in text


@pytest.fixture
def engine_is(tmp_path, monkeypatch):
    """Put a weasyprint of our own before the real one; only the child imports it."""

    def replace(body):
        (tmp_path / "weasyprint.py").write_text(body)
        monkeypatch.syspath_prepend(tmp_path)

    return replace


NO_PANGO = """
print("WeasyPrint could not import some external libraries.")
raise OSError("cannot load library 'libpango-1.0-0': no such file")
"""
OLD_PANGO = """
import warnings
warnings.warn("HarfBuzz-Subset will be required by future versions of WeasyPrint.", DeprecationWarning)
"""
INSTALL = (
    "which drawing a PDF needs, is missing on this machine (on Debian and Ubuntu install libpango-1.0-0, "
    "libpangoft2-1.0-0 and libharfbuzz-subset0)"
)


@pytest.mark.parametrize(("body", "library"), [(NO_PANGO, "libpango-1.0-0"), (OLD_PANGO, "libharfbuzz-subset")])
def test_without_pango_everything_else_is_drawn(record, pages, engine_is, body, library):
    engine_is(body)
    lacking = draw(record)
    assert lacking.html == pages.html
    assert lacking.pdf is None
    assert lacking.no_pdf_because == f"the library {library}, {INSTALL}; everything else was written."
    assert "pango" not in lacking.environment
    assert draw(record, only=("pdf",)).no_pdf_because == f"the library {library}, {INSTALL}."


def test_a_crash_is_a_message(record, engine_is):
    engine_is("import os, signal; os.kill(os.getpid(), signal.SIGSEGV)")
    with pytest.raises(RuntimeError, match=r"ended by the signal SIGSEGV(?s:.*)missing_library"):
        draw(record)


def test_a_defect_shows_where_it_happened(record, engine_is):
    engine_is("raise ValueError('out of sorts')")
    with pytest.raises(RuntimeError, match=r"failed:(?s:.*)Traceback(?s:.*)ValueError: out of sorts"):
        draw(record)


def test_nothing_is_left_behind(record, tmp_path, monkeypatch):
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path))
    draw(record, only=("html",))
    assert list(tmp_path.iterdir()) == []
