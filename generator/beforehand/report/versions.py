"""What the pages were drawn with: whatever can change a glyph or a byte of them."""

import ctypes
import sys
import zlib
from importlib.metadata import version

from beforehand.report.fonts import checksums

PACKAGES = ("cssselect2", "fonttools", "jinja2", "matplotlib", "pydyf", "tinycss2", "tinyhtml5", "weasyprint")
HARFBUZZ = ("libharfbuzz.so.0", "libharfbuzz.0.dylib")
FONTCONFIG = ("libfontconfig.so.1", "libfontconfig.1.dylib")


def versions() -> dict[str, str]:
    """Give versions by name; the system libraries of the PDF only where it was drawn."""
    return (
        {package: version(package) for package in PACKAGES}
        | {"zlib": zlib.ZLIB_RUNTIME_VERSION}
        | _system_libraries()
        | {f"font {name}": checksum for name, checksum in checksums().items()}
    )


def _system_libraries() -> dict[str, str]:
    drawn_with = sys.modules.get("weasyprint.text.ffi")
    if drawn_with is None:
        return {}
    harfbuzz, fontconfig = _loaded(HARFBUZZ), _loaded(FONTCONFIG)
    harfbuzz.hb_version_string.restype = ctypes.c_char_p
    return {
        "pango": _dotted(drawn_with.pango.pango_version()),
        "harfbuzz": harfbuzz.hb_version_string().decode(),
        "fontconfig": _dotted(fontconfig.FcGetVersion()),
    }


def _loaded(names: tuple[str, ...]) -> ctypes.CDLL:
    """Give a library that WeasyPrint has loaded already, under the name that this system has for it."""
    for name in names[:-1]:
        try:
            return ctypes.CDLL(name)
        except OSError:
            continue
    return ctypes.CDLL(names[-1])


def _dotted(number: int) -> str:
    """Write 15012 as 1.50.12, the way these libraries count."""
    return f"{number // 10000}.{number // 100 % 100}.{number % 100}"
