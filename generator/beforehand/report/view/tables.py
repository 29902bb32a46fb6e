"""Tables whose numbers stand under each other at the decimal point."""

from collections.abc import Iterable, Sequence

from beforehand.report.view.model import Cell, Head, Row, Table
from beforehand.spelling import NOTHING

# The style sheets know classes for so many missing digits.
MOST_MISSING = 12


def head(*texts: str, numbers: Iterable[int] = ()) -> tuple[tuple[Head, ...], ...]:
    """Give a head of one row; ``numbers`` are the columns, counted from 0, that hold aligned numbers."""
    aligned = set(numbers)
    return (tuple(Head(text=text, style="number" if at in aligned else "") for at, text in enumerate(texts)),)


def _after_point(text: str) -> int:
    return len(text.partition(".")[2])


def aligned(texts: Sequence[str], style: str = "") -> tuple[Cell, ...]:
    """Give the cells of one column: right-aligned, each moved left by the digits it has fewer than the longest."""
    most = max((_after_point(text) for text in texts), default=0)
    return tuple(Cell(text, " ".join(_alignment(text, most, style))) for text in texts)


def _alignment(text: str, most: int, style: str) -> Iterable[str]:
    yield "number"
    if style:
        yield style
    missing = min(most - _after_point(text), MOST_MISSING)
    if missing and text != NOTHING:
        yield f"short-{missing}" if "." in text else f"short-{missing}-point"


def columns(*sides: Sequence[Cell]) -> tuple[tuple[Cell, ...], ...]:
    """Turn columns of cells into the cells of each row."""
    return tuple(zip(*sides, strict=True))


def plain(texts: Iterable[str], style: str = "") -> tuple[Cell, ...]:
    """Give the cells of a column of text, or of p-values (style "p"), which all begin with one digit and a point."""
    return tuple(Cell(text, style) for text in texts)


def rows(heads: Iterable[Cell], cells: Iterable[tuple[Cell, ...]]) -> tuple[Row, ...]:
    """Join the cells that name the rows with the others."""
    return tuple(Row(head=name, cells=others) for name, others in zip(heads, cells, strict=True))


def empty(caption: str) -> Table:
    """Give a table without rows, which templates leave out."""
    return Table(caption=caption, head=(), rows=())
