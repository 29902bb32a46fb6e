"""The figures, one to a file; each draws only the numbers that the record holds for it."""

from collections.abc import Callable, Iterable
from typing import Any

from beforehand.record.model import Record
from beforehand.report.figures import error_by_m, estimates, graph, staircase
from beforehand.report.figures.model import Figure

__all__ = ["Figure", "draw_figures"]

FIGURES: dict[str, Callable[[Any], Iterable[Figure]]] = {
    "error_by_m": error_by_m.draw,
    "estimates": estimates.draw,
    "graph": graph.draw,
    "staircase": staircase.draw,
}


def draw_figures(record: Record) -> tuple[Figure, ...]:
    """Draw every figure for which the record holds numbers, with the fonts that matplotlib has been given."""
    return tuple(
        figure for name, draw in FIGURES.items() if record.drawn.get(name) for figure in draw(record.drawn[name])
    )
