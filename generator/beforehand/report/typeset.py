"""One HTML document laid out by WeasyPrint, which gets nothing but what it is handed; importing this loads Pango."""

import logging
from collections.abc import Mapping
from typing import Any

import weasyprint  # type: ignore[import-untyped]
from weasyprint.urls import FatalURLFetchingError, URLFetcher, URLFetcherResponse  # type: ignore[import-untyped]

from beforehand.report import fonts
from beforehand.report.conform import conform

Resources = Mapping[str, tuple[str, bytes]]
"""Media type and content by name; the document calls them ``res:NAME``."""


def typeset(text: str, resources: Resources) -> bytes:
    """Lay out a document as a PDF/A-2a and PDF/UA-1 file; RuntimeError if any part of it would be missing."""
    faces = {face.path.name: ("font/ttf", face.path.read_bytes()) for face in fonts.FACES}
    fetcher = _Handed({**resources, **faces})
    complaints: list[str] = []

    def note(entry: logging.LogRecord) -> bool:
        if entry.levelno >= logging.WARNING:
            complaints.append(entry.getMessage())
        return True

    logger = logging.getLogger("weasyprint")
    logger.addFilter(note)
    try:
        document = weasyprint.HTML(string=text, base_url="res:", url_fetcher=fetcher)
        content: bytes = document.write_pdf(pdf_variant="pdf/a-2a", finisher=conform)
    except FatalURLFetchingError as fault:  # a BaseException, which would pass by every handler above
        raise RuntimeError(f"the PDF asks for what it was not handed: {', '.join(fetcher.refused)}") from fault
    finally:
        logger.removeFilter(note)
    # A refusal inside a picture does not stop WeasyPrint: the page is then drawn without the picture.
    if fetcher.refused or complaints:
        raise RuntimeError("the PDF is not whole: " + "; ".join([*fetcher.refused, *complaints]))
    return content


class _Handed(URLFetcher):  # type: ignore[misc]  # WeasyPrint takes nothing but a subclass
    """Answers from a table and refuses everything else."""

    def __init__(self, table: Resources) -> None:
        super().__init__(allowed_protocols=("res",), allow_redirects=False, fail_on_errors=True)
        self.table = table
        self.refused: list[str] = []

    def fetch(self, url: str, headers: Any = None) -> Any:
        """Give one resource; PermissionError for any other address."""
        scheme, _, name = url.partition(":")
        if scheme == "res" and name in self.table:
            media_type, content = self.table[name]
            return URLFetcherResponse(url, content, {"Content-Type": media_type})
        self.refused.append(url[:80])
        raise PermissionError(f"refused: {url[:80]}")
