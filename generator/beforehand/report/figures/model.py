"""What a figure is."""

from dataclasses import dataclass


@dataclass(frozen=True, kw_only=True)
class Figure:
    """A figure as SVG, with the words for a reader who can't see it and the numbers behind it."""

    key: str
    svg: str
    alternative_text: str
    caption: str
    table: tuple[tuple[str, ...], ...]
    """The numbers as strings: the first row is the head, the first cell of each row names it."""
