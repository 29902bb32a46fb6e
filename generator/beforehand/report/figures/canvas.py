"""What all figures share: size, type, the one accent colour, a shape for each state, and how they become SVG."""

import io
import textwrap
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from beforehand.spelling import short
from beforehand.terms import STATE_WORDS, State

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure as Canvas

INK = "#1d2733"
QUIET = "#5a6672"
HAIR = "#c8d0d6"
ACCENT = "#0d5c7d"
TINT = "#e7eff3"

WIDTH = 6.7
"""Inches; the width of the text on A4, so that type is printed at its own size."""
POINTS = 9.0
LABEL_WIDTH = 30
"""Characters after which a label is broken."""

SETTINGS: dict[Any, Any] = {
    "svg.hashsalt": "beforehand",
    "svg.fonttype": "path",
    "font.family": ["Inter", "DejaVu Sans"],
    "font.size": POINTS,
    "axes.labelsize": POINTS,
    "axes.titlesize": POINTS,
    "xtick.labelsize": POINTS,
    "ytick.labelsize": POINTS,
    "text.color": INK,
    "text.parse_math": False,  # a name in the data may hold a dollar sign
    "axes.labelcolor": INK,
    "axes.edgecolor": HAIR,
    "axes.linewidth": 0.8,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.spines.left": False,
    "axes.unicode_minus": True,
    "xtick.color": QUIET,
    "ytick.color": INK,
    "xtick.major.width": 0.8,
    "ytick.major.size": 0,
    "xtick.minor.size": 0,
    "figure.constrained_layout.use": True,
    "figure.constrained_layout.h_pad": 0.05,
    "figure.constrained_layout.w_pad": 0.02,
}


@dataclass(frozen=True)
class Mark:
    """How the point of a hypothesis in one state is drawn: told by shape and filling, not by colour alone."""

    marker: str
    edge: str
    face: str
    words: str


MARKS: dict[State, Mark] = {
    "rejected": Mark("o", ACCENT, ACCENT, "filled circle"),
    "rejected_against_claim": Mark("v", INK, INK, "filled triangle"),
    "not_rejected": Mark("o", INK, "white", "open circle"),
    "not_tested": Mark("D", QUIET, "white", "open diamond"),
    "no_result": Mark("x", QUIET, QUIET, "cross"),
    "described": Mark("s", QUIET, "white", "open square"),
    "continue": Mark("s", INK, "white", "open square"),
}


def canvas(height: float, rows: Sequence[float]) -> "tuple[Canvas, list[Axes]]":
    """Open a drawing with one panel above the other, of heights in proportion to ``rows``."""
    import matplotlib
    from matplotlib.backends.backend_svg import FigureCanvasSVG
    from matplotlib.figure import Figure as Canvas

    matplotlib.rcdefaults()
    for setting, value in SETTINGS.items():
        matplotlib.rcParams[setting] = value
    figure = Canvas(figsize=(WIDTH, height))
    FigureCanvasSVG(figure)
    panels = figure.subplots(len(rows), 1, squeeze=False, height_ratios=list(rows))
    return figure, list(panels[:, 0])


def as_svg(figure: "Canvas") -> str:
    """Write a drawing as SVG that holds no date and no random name."""
    out = io.StringIO()
    figure.savefig(out, format="svg", metadata={"Date": None, "Creator": None})
    return out.getvalue()


def broken(label: str) -> str:
    """Break a long label into lines; the last of three ends in an ellipsis where more follows."""
    lines = textwrap.wrap(label, LABEL_WIDTH) or [""]
    if len(lines) > 3:
        lines = [*lines[:2], f"{lines[2][: LABEL_WIDTH - 1]}…"]
    return "\n".join(lines)


def put_marks(axes: "Axes", places: Sequence[tuple[float, float]], state: State, *, size: float = 6.5) -> None:
    """Draw the points of hypotheses in one state."""
    mark = MARKS[state]
    axes.plot(
        [x for x, _ in places], [y for _, y in places], marker=mark.marker, markersize=size, linestyle="none", zorder=5,
        markeredgecolor=mark.edge, markerfacecolor=mark.face, markeredgewidth=size / 5, clip_on=False,
    )  # fmt: skip


def plain_ticks(axes: "Axes") -> None:
    """Write the ticks of a logarithmic axis as people write numbers."""
    from matplotlib.ticker import FuncFormatter, LogLocator, NullFormatter

    lower, upper = axes.get_xlim()
    subs = (1.0, 2.0, 5.0) if upper / lower < 300 else (1.0,)
    axes.xaxis.set_major_locator(LogLocator(subs=subs, numticks=8))
    axes.xaxis.set_major_formatter(FuncFormatter(lambda value, _: short(value, 3)))
    axes.xaxis.set_minor_formatter(NullFormatter())


def legend_words(states: Sequence[State]) -> str:
    """Say what the shapes stand for, those that occur."""
    seen = [state for state in MARKS if state in states]
    return ", ".join(f"{MARKS[state].words}: {STATE_WORDS[state]}" for state in seen)
