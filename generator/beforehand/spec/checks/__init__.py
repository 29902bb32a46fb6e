"""What must fit together across the keys of a spec."""

from collections.abc import Iterator

from beforehand.spec.model import Document
from beforehand.spec.places import Path


def faults_across(document: Document, *, whole: bool) -> Iterator[tuple[Path, str]]:
    """Find what doesn't fit; ``whole`` is False where unsound families were left out."""
    yield from ()
