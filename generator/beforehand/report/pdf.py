"""The PDF: the print templates, laid out by WeasyPrint where this machine has the libraries for it."""

import re
import warnings

from beforehand.report import fonts
from beforehand.report.figures.model import Figure
from beforehand.report.html import fill
from beforehand.report.view.model import View

PACKAGES = "libpango-1.0-0, libpangoft2-1.0-0 and libharfbuzz-subset0"


def why_no_pdf() -> str:
    """Say why this machine can't draw a PDF, and what to do; "" where it can."""
    if missing := missing_library():
        return (
            f"the library {missing}, which drawing a PDF needs, is missing on this machine "
            f"(on Debian and Ubuntu install {PACKAGES})"
        )
    return ""


def missing_library() -> str:
    """Name the system library that drawing a PDF lacks here; "" where all are present."""
    with warnings.catch_warnings(record=True) as raised:
        warnings.simplefilter("always")
        try:
            import weasyprint  # type: ignore[import-untyped]  # noqa: F401 -- importing it loads Pango
        except OSError as fault:
            name = re.search(r"'([^']+)'", str(fault))
            return name[1] if name else str(fault)
    # Without this one WeasyPrint cuts the fonts by other code, and the file has other bytes.
    return "libharfbuzz-subset" if any("HarfBuzz-Subset" in str(warning.message) for warning in raised) else ""


def pdf(view: View, figures: tuple[Figure, ...]) -> bytes:
    """Draw ``report.pdf``, where ``why_no_pdf`` has nothing to say."""
    from beforehand.report.typeset import typeset

    text = fill(
        view,
        medium="print",
        figure_source=lambda key: f"res:{key}.svg",
        font_rules=fonts.css(lambda face: f"res:{face.path.name}"),
    )
    return typeset(text, {f"{figure.key}.svg": ("image/svg+xml", figure.svg.encode()) for figure in figures})
