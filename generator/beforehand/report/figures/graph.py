"""A graph of the level as planned, and at the level of the study: a row for each node, arrows as arcs between rows."""

from collections.abc import Iterable
from typing import TYPE_CHECKING, Any, TypedDict

from beforehand.report.figures.canvas import ACCENT, HAIR, INK, QUIET, as_svg, broken, canvas
from beforehand.report.figures.model import Figure
from beforehand.spelling import NOTHING, calculated, exact, integer, short
from beforehand.terms import STATE_WORDS, State

if TYPE_CHECKING:
    from matplotlib.axes import Axes

Arrow = tuple[str, str, float | str]
WRITTEN = {"epsilon": "ε", "1 - epsilon": "1 − ε"}

# Where the two columns of nodes stand, and how far the shortest and the longest arc reach out from them, in widths of
# a half of the figure; how far beside a field an arc begins, and how far above or below its middle, in rows.
COLUMNS = (0.45, 1.45)
NEAREST, FURTHEST = 0.28, 0.53
SIDE, APART = 0.11, 0.16
AIRY = 12
# More arrows are drawn without their shares, which stand in the table of numbers.
LABELLED = 16
TOLD = 8


class Node(TypedDict):
    """What the record holds for one node."""

    id: str
    label: str
    state: State
    start: float
    share: float
    """What it holds at the level; once it has passed that on, what it was."""


class Step(TypedDict):
    """What the record holds for one step of the walk."""

    step: int
    id: str
    share: float
    p: float
    product: float
    adjusted: float
    taken: bool
    then: dict[str, float]


class Drawn(TypedDict):
    """What the record holds for a graph."""

    nodes_are: str
    level: float
    nodes: list[Node]
    arrows_before: list[Arrow]
    arrows_after: list[Arrow]
    steps: list[Step]


def draw(numbers: Drawn) -> Iterable[Figure]:
    """Draw the figure."""
    level = exact(numbers["level"])
    yield Figure(
        key="graph",
        svg=_svg(numbers),
        caption=(
            "The graph over which the level moves: in each field the share of the level that is held, on each arrow "
            f"the share of it that is passed on at a rejection. Left: as planned. Right: at the level {level}; filled: "
            "rejected, with the share that was held then. ε: less than any number, more than none."
        ),
        alternative_text=_told(numbers),
        table=tuple(_table(numbers)),
    )


def _svg(numbers: Drawn) -> str:
    nodes = numbers["nodes"]
    lines = max(broken(one["label"]).count("\n") + 1 for one in nodes)
    figure, (axes,) = canvas(len(nodes) * max(0.46 if len(nodes) <= AIRY else 0.4, 0.15 + 0.15 * lines) + 0.5, [1.0])
    axes.set_xlim(0, 2)
    axes.set_ylim(len(nodes) - 0.5, -0.5)
    axes.set_yticks(range(len(nodes)), [broken(one["label"]) for one in nodes])
    axes.set_xticks([])
    axes.spines["bottom"].set_visible(False)
    heads = ("as planned", f"at the level {exact(numbers['level'])}")
    both = (numbers["arrows_before"], numbers["arrows_after"])
    labelled = max(map(len, both)) <= LABELLED
    for x, head, arrows in zip(COLUMNS, heads, both, strict=True):
        axes.annotate(
            head, (x, 1), xycoords=("data", "axes fraction"), xytext=(0, 4), textcoords="offset points", ha="center",
            va="bottom", color=QUIET,
        )  # fmt: skip
        _draw_arrows(axes, x, arrows, {one["id"]: row for row, one in enumerate(nodes)}, labelled=labelled)
    for row, one in enumerate(nodes):
        _draw_node(axes, row, one)
    return as_svg(figure)


def _draw_node(axes: "Axes", row: int, one: Node) -> None:
    axes.axhline(row, color=HAIR, linewidth=0.5, zorder=0)
    fallen = one["state"] in ("rejected", "rejected_against_claim")
    quiet = one["state"] in ("not_tested", "no_result")
    before, after = COLUMNS
    _field(axes, before, row, one["start"], face="white", ink=INK if one["start"] else QUIET)
    face = ("white", ACCENT, INK)[fallen + (one["state"] == "rejected_against_claim")]
    _field(axes, after, row, one["share"], face=face, ink=QUIET if quiet else INK, dashed=quiet)
    axes.annotate(
        STATE_WORDS[one["state"]], (1, row), xycoords=("axes fraction", "data"), xytext=(8, 0),
        textcoords="offset points", va="center", color=INK if fallen else QUIET,
    )  # fmt: skip


def _field(axes: "Axes", x: float, row: int, share: float, *, face: str, ink: str, dashed: bool = False) -> None:
    box: dict[str, Any] = {"boxstyle": "round,pad=0.32", "facecolor": face, "edgecolor": ink, "linewidth": 1.0}
    axes.text(
        x, row, short(share, 3), ha="center", va="center", color=ink if face == "white" else "white", zorder=6,
        bbox=box | {"linestyle": (0, (3, 2)) if dashed else "solid"},
    )  # fmt: skip


def _draw_arrows(axes: "Axes", x: float, arrows: list[Arrow], rows: dict[str, int], *, labelled: bool) -> None:
    from matplotlib.patches import FancyArrowPatch
    from matplotlib.path import Path

    longest = max((abs(rows[a] - rows[b]) for a, b, _ in arrows), default=1)
    for sender, receiver, share in arrows:
        start, end = rows[sender], rows[receiver]
        way = 1 if end > start else -1  # down on the right, up on the left
        out = (abs(end - start) - 1) / max(longest - 1, 1)
        side, reach = x + way * SIDE, x + way * (NEAREST + (FURTHEST - NEAREST) * out)
        points = [(side, start + way * APART), (reach, start + way * APART), (reach, end - way * APART),
                  (side, end - way * APART)]  # fmt: skip
        arc = Path(points, [Path.MOVETO, Path.CURVE4, Path.CURVE4, Path.CURVE4])
        axes.add_patch(
            FancyArrowPatch(
                path=arc, arrowstyle="-|>", mutation_scale=7, color=QUIET, linewidth=0.9, fill=False, zorder=3,
                linestyle=(0, (1, 1.5)) if share == "epsilon" else "solid", shrinkA=0, shrinkB=0,
            )
        )  # fmt: skip
        if labelled:
            # three quarters of the way to its control points lies the outermost point of an arc
            axes.text(
                side + 0.75 * (reach - side), (start + end) / 2, _share(share), ha="center", va="center", color=INK,
                zorder=5, bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.8},
            )  # fmt: skip


def _share(share: float | str) -> str:
    return WRITTEN.get(share, share) if isinstance(share, str) else short(share, 3)


def _table(numbers: Drawn) -> Iterable[tuple[str, ...]]:
    """Tabulate the steps; an adjusted p is the largest quotient so far."""
    labels = {one["id"]: one["label"] for one in numbers["nodes"]}
    level, noun = numbers["level"], "Hypothesis" if numbers["nodes_are"] == "hypotheses" else "Family"
    passes = {node: _listed(labels, [(b, _share(x)) for a, b, x in numbers["arrows_before"] if a == node])
              for node in labels}  # fmt: skip
    yield "Step", noun, "p / share held", "Rejected from", f"At {exact(level)}", "Passes on", "Held after the step"
    for one in numbers["steps"]:
        quotient = f"{calculated(one['p'])} / {short(one['share'])} = {calculated(one['product'], level)}"
        yield (
            integer(one["step"]), labels[one["id"]], quotient, calculated(one["adjusted"], level),
            "taken" if one["taken"] else "not taken", passes[one["id"]],
            _listed(labels, [(node, short(share)) for node, share in one["then"].items()]),
        )  # fmt: skip
    stepped = {one["id"] for one in numbers["steps"]}
    for node, label in labels.items():
        if node not in stepped:
            yield NOTHING, label, "no share reaches it", NOTHING, "not taken", passes[node], NOTHING


def _listed(labels: dict[str, str], shares: list[tuple[str, str]]) -> str:
    return "; ".join(f"{labels[node]} {share}" for node, share in shares) or NOTHING


def _told(numbers: Drawn) -> str:
    nodes = numbers["nodes"]
    labels = {one["id"]: one["label"] for one in nodes}
    told = " ".join(
        f"{one['label']}: starts with {short(one['start'], 3)}, {STATE_WORDS[one['state']]}, {short(one['share'], 3)}."
        for one in nodes[:TOLD]
    )
    arrows = "; ".join(
        f"{labels[sender]} to {labels[receiver]} {_share(share)}"
        for sender, receiver, share in numbers["arrows_before"][:TOLD]
    )
    more = " More stand in the table of numbers." if max(len(nodes), len(numbers["arrows_before"])) > TOLD else ""
    taken = sum(one["taken"] for one in numbers["steps"])
    return (
        f"A graph of {integer(len(nodes))} {numbers['nodes_are']}, of which {integer(taken)} fall at the level "
        f"{exact(numbers['level'])}. {told} Arrows as planned: {arrows or 'none'}.{more}"
    )
