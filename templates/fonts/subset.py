"""Make the font files of this folder from the full fonts (for developers; the generator never runs it).

    python subset.py FOLDER

FOLDER holds ``Inter-Regular.woff2``, ``Inter-Italic.woff2`` and ``Inter-SemiBold.woff2`` of Inter 4.1 (the folder
``web`` of the npm package inter-ui 4.1.1). The DejaVu fonts 2.37 are those that matplotlib ships. The same inputs
and the same fontTools (4.68.0) and Brotli (1.2.1) give the same bytes.

Each font is written twice: as .ttf for the PDF and the figures, as .woff2 (the same font, packed) for the HTML.

Inter draws the text, DejaVu Sans whatever Inter lacks, DejaVu Sans Mono checksums and file contents. DejaVu Sans
holds the whole repertoire, ASCII and space too: a shaper that has once fallen back stays in the fallback font for
a following space, and draws an empty box where it finds none.
"""

import sys
from pathlib import Path

import matplotlib
from fontTools import subset
from fontTools.ttLib import TTFont

EVERYDAY = (
    (0x0020, 0x007E),  # ASCII
    (0x00A0, 0x00AC), (0x00AE, 0x017F), (0x0218, 0x021B),  # Latin, without the invisible soft hyphen
    (0x0300, 0x0304), (0x0306, 0x030C), (0x0327, 0x0328),  # combining marks
    (0x0370, 0x03FF), (0x0400, 0x045F), (0x0490, 0x0491), (0x1E00, 0x1EFF),  # Greek, Cyrillic, Vietnamese
    (0x2000, 0x200A), (0x2010, 0x2027), (0x202F, 0x205F),  # spaces, dashes, quotation marks
    (0x2070, 0x209F), (0x20A0, 0x20BF), (0x2100, 0x215F),  # raised and lowered digits, currencies, letterlike
    (0x2190, 0x2199), (0x21D0, 0x21D5), (0x2200, 0x22FF),  # arrows, mathematics
)  # fmt: skip
RARE = (
    (0x0180, 0x024F), (0x02B0, 0x02FF), (0x0300, 0x036F), (0x1D2C, 0x1D6A), (0x2C7C, 0x2C7C),  # Latin, raised letters
    (0x2190, 0x21FF), (0x2300, 0x230B), (0x25A0, 0x25FF), (0x2610, 0x2612), (0x2713, 0x2718), (0x27E8, 0x27E9),
)  # fmt: skip

# Inter's "calt" is left out on purpose: it draws -> as an arrow and so alters what an author wrote.
FEATURES = ("ccmp", "kern", "locl", "mark", "mkmk", "tnum")
# What stands in words too: Inter's "tnum" gives these the width of figures, and "two-sided" gaps in every table.
NO_FIGURES = {
    "hyphen", "space", "uni00A0", "semicolon", "asterisk", "asciitilde",
    "parenleft", "parenright", "bracketleft", "bracketright", "braceleft", "braceright",
}  # fmt: skip
UNUSED_TABLES = ("FFTM", "MATH", "gasp")


def cut(source: Path, target: Path, *repertoire: tuple[int, int]) -> None:
    """Write the part of a font that the report may need, with its names and its licence notice."""
    options = subset.Options(
        layout_features=list(FEATURES), hinting=False, name_IDs=["*"], name_languages=[0x409], notdef_outline=True
    )
    options.drop_tables += UNUSED_TABLES
    font = TTFont(source, recalcTimestamp=False)
    font.flavor = None
    keep_words_out_of_tabular_figures(font)
    cutter = subset.Subsetter(options)
    cutter.populate(unicodes=[code for first, last in repertoire for code in range(first, last + 1)])
    cutter.subset(font)
    font.save(target)
    packed = TTFont(target, recalcTimestamp=False)
    packed.flavor = "woff2"
    packed.save(target.with_suffix(".woff2"))


def keep_words_out_of_tabular_figures(font: TTFont) -> None:
    """Let "tnum" change figures, and the signs that stand among them, alone."""
    substitutions = font["GSUB"].table
    for entry in substitutions.FeatureList.FeatureRecord:
        for place in entry.Feature.LookupListIndex if entry.FeatureTag == "tnum" else ():
            for part in substitutions.LookupList.Lookup[place].SubTable:
                mapping = getattr(part, "ExtSubTable", part).mapping
                for glyph in NO_FIGURES & set(mapping):
                    del mapping[glyph]


if __name__ == "__main__":
    here = Path(__file__).parent
    inter = Path(sys.argv[1])
    dejavu = Path(matplotlib.get_data_path(), "fonts", "ttf")
    for style in ("Regular", "Italic", "SemiBold"):
        cut(inter / f"Inter-{style}.woff2", here / f"Inter-{style}.ttf", *EVERYDAY)
    cut(dejavu / "DejaVuSans.ttf", here / "DejaVuSans.ttf", *EVERYDAY, *RARE)
    cut(dejavu / "DejaVuSansMono.ttf", here / "DejaVuSansMono.ttf", *EVERYDAY)
