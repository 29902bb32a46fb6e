"""The bundled fonts: the only ones that text, figures, HTML and PDF are drawn with, so that no machine adds its own."""

import base64
import hashlib
import os
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from io import BytesIO
from pathlib import Path

FOLDER = Path(str(files("beforehand.templates"))) / "fonts"


@dataclass(frozen=True)
class Face:
    """One font file, and what a style sheet calls it."""

    name: str
    family: str
    weight: int = 400
    style: str = "normal"

    @property
    def path(self) -> Path:
        """The file that the PDF and the figures are drawn with."""
        return FOLDER / f"{self.name}.ttf"

    @property
    def packed(self) -> Path:
        """The same font as the HTML carries it."""
        return FOLDER / f"{self.name}.woff2"


FACES = (
    Face("Inter-Regular", "Inter"),
    Face("Inter-Italic", "Inter", style="italic"),
    Face("Inter-SemiBold", "Inter", weight=600),
    Face("DejaVuSans", "DejaVu Sans"),
    Face("DejaVuSansMono", "DejaVu Sans Mono"),
)
FALLBACK = FACES[3]


def css(address: Callable[[Face], str]) -> str:
    """Write the style rules that declare the fonts; ``address`` says where each is found."""
    return "".join(
        f'@font-face{{font-family:"{face.family}";font-weight:{face.weight};font-style:{face.style};'
        f"src:url({address(face)})}}\n"
        for face in FACES
    )


def inline(face: Face) -> str:
    """Give a font as an address that holds the font itself."""
    return "data:font/woff2;base64," + base64.b64encode(face.packed.read_bytes()).decode()


@cache
def drawn_characters() -> frozenset[str]:
    """Give the characters that are drawn in every style: those of the font that every other falls back to."""
    from fontTools.ttLib import TTFont  # type: ignore[import-untyped]

    with TTFont(BytesIO(FALLBACK.path.read_bytes()), lazy=True) as font:
        return frozenset(map(chr, font.getBestCmap()))


def checksums() -> dict[str, str]:
    """Give the SHA-256 of every font file that is drawn with."""
    used = [path for face in FACES for path in (face.path, face.packed)]
    return {path.name: hashlib.sha256(path.read_bytes()).hexdigest() for path in used}


def register_in_matplotlib() -> None:
    """Let matplotlib draw with these fonts alone."""
    os.environ["MPL_IGNORE_SYSTEM_FONTS"] = "1"  # or the import below reads every font of the machine
    from matplotlib import font_manager

    del os.environ["MPL_IGNORE_SYSTEM_FONTS"]  # while it is set, matplotlib does not find the fonts added here
    font_manager.fontManager.ttflist.clear()
    for face in FACES:
        font_manager.fontManager.addfont(face.path)
