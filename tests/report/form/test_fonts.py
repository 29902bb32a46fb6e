"""The bundled fonts: one set for every medium, with what the report needs and without what would alter a text."""

import hashlib
import subprocess
import sys

import pytest
from fontTools.ttLib import TTFont

from beforehand.report.fonts import FACES, FALLBACK, FOLDER, checksums, css, drawn_characters, inline

# Greek, comparison, arrows, raised and lowered, sets, logic, calculus, ticks, dashes, thin spaces, Latin, Cyrillic
NEEDED = "αβμσρΔΣΩ≤≥≠≈∓±×÷∝←→↔⇒⁰¹²³⁻₀₁₂ᵢⱼₙ∈∉∪∩⊂⊆∅∧∨¬∀∃∞√∑∏∫∂∇✓✗–—−‑…‘’“”„\u2009\u202f\u00a0łőşžệЖя½‰§"


@pytest.fixture(params=FACES, ids=lambda face: face.name)
def face(request):
    return request.param


def test_the_fallback_draws_everything_the_report_needs():
    assert set(NEEDED) <= drawn_characters()
    assert {chr(code) for code in range(0x20, 0x7F)} <= drawn_characters()


def test_each_file_is_what_its_rule_says(face):
    with TTFont(face.path) as font:
        assert font["name"].getBestFamilyName() == face.family
        assert font["OS/2"].usWeightClass == face.weight
        assert bool(font["OS/2"].fsSelection & 1) == (face.style == "italic")
        assert "fvar" not in font  # a variable font would be cut anew, with the time of day in it
        assert "SIL Open Font License" in str(font["name"].getDebugName(13)) or face.family.startswith("DejaVu")


def test_no_feature_replaces_what_an_author_wrote(face):
    with TTFont(face.path) as font:
        features = {
            record.FeatureTag for table in ("GSUB", "GPOS") for record in font[table].table.FeatureList.FeatureRecord
        }
    assert features <= {"ccmp", "kern", "locl", "mark", "mkmk", "tnum"}
    assert face.family != "Inter" or {"kern", "tnum"} <= features


def test_tabular_figures_leave_words_alone(face):
    with TTFont(face.path) as font:
        table = font["GSUB"].table
        places = {
            place
            for entry in table.FeatureList.FeatureRecord
            if entry.FeatureTag == "tnum"
            for place in entry.Feature.LookupListIndex
        }
        changed = {
            glyph for place in places for part in table.LookupList.Lookup[place].SubTable for glyph in part.mapping
        }
    assert not changed & {"hyphen", "space", "parenleft", "a"}
    assert face.family != "Inter" or {"zero", "nine", "period", "minus"} <= changed


def test_the_packed_font_is_the_same_font(face):
    with TTFont(face.path) as plain, TTFont(face.packed) as packed:
        assert plain.getGlyphOrder() == packed.getGlyphOrder()
        assert plain.getBestCmap() == packed.getBestCmap()
        for table in ("GSUB", "GPOS", "OS/2", "name", "hhea"):
            assert plain.getTableData(table) == packed.getTableData(table), table
        for glyph in plain.getGlyphOrder():
            assert plain["glyf"][glyph] == packed["glyf"][glyph], glyph
            assert plain["hmtx"][glyph] == packed["hmtx"][glyph], glyph


def test_fonts_weigh_little_and_carry_their_licences():
    assert sum(face.packed.stat().st_size for face in FACES) < 225_000
    assert "SIL OPEN FONT LICENSE" in (FOLDER / "LICENSE-Inter.txt").read_text().upper()
    assert "Bitstream Vera" in (FOLDER / "LICENSE-DejaVu.txt").read_text()


def test_the_rules_hold_the_fonts_themselves():
    rules = css(inline)
    assert rules.count("@font-face") == len(FACES)
    assert "://" not in rules
    assert rules.count("url(data:font/woff2;base64,") == len(FACES)


def test_checksums_are_those_of_the_files():
    found = checksums()
    assert len(found) == 2 * len(FACES)
    assert found["DejaVuSans.ttf"] == hashlib.sha256(FALLBACK.path.read_bytes()).hexdigest()


DRAW = """
import io, warnings
from beforehand.report.fonts import register_in_matplotlib
register_in_matplotlib()
import matplotlib
from matplotlib import font_manager
from matplotlib.figure import Figure
matplotlib.rcParams["font.family"] = ["Inter", "DejaVu Sans"]
warnings.simplefilter("error")
figure = Figure()
figure.text(0.1, 0.5, "m₁ ∈ ∀ Inter")
figure.savefig(io.BytesIO(), format="svg")
used = {font.fname for font in font_manager.fontManager.ttflist}
print(len(used))
for weight in (400, 600):
    print(font_manager.findfont(font_manager.FontProperties(family="Inter", weight=weight)))
"""


def test_matplotlib_draws_with_these_files_alone(tmp_path):
    done = subprocess.run([sys.executable, "-c", DRAW], capture_output=True, text=True, check=True, cwd=tmp_path)
    assert done.stdout.splitlines() == [str(len(FACES)), str(FACES[0].path), str(FACES[2].path)]
