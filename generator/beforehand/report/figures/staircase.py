"""Ordered p-values of one family against the thresholds they had to meet, smallest at the top."""

import math
from collections.abc import Iterable, Mapping
from itertools import pairwise
from typing import TYPE_CHECKING, TypedDict

from beforehand.report.figures.canvas import (
    ACCENT,
    HAIR,
    INK,
    QUIET,
    TINT,
    as_svg,
    broken,
    canvas,
    legend_words,
    plain_ticks,
    put_marks,
)
from beforehand.report.figures.model import Figure
from beforehand.spelling import exact, integer, p_value
from beforehand.terms import STATE_WORDS, State

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure as Canvas

# Up to so many hypotheses each has a row of its own with its name.
NAMED = 20
TOLD = 8
# Smaller p-values are drawn at the edge: how small they are is no matter for the threshold.
DECADES_BELOW = 6
# Spots for one decade: finer than a mark is wide.
GRAIN = 120
TABLED = 200


class Point(TypedDict):
    """What the record holds for one hypothesis, in the order of rank."""

    id: str
    label: str
    rank: int
    p: float
    threshold: float | None
    """None where the procedure sets no threshold for a p-value by itself."""
    state: State


class Stair(TypedDict):
    """A point that has a threshold."""

    label: str
    rank: int
    p: float
    threshold: float
    state: State


class Staircase(TypedDict):
    """What the record holds for one family."""

    procedure: str
    procedure_title: str
    level: float
    points: list[Point]


def draw(families: Mapping[str, Staircase]) -> Iterable[Figure]:
    """Draw one figure per family whose procedure sets every p-value a threshold."""
    for family, stairs in families.items():
        points = [_stair(one, one["threshold"]) for one in stairs["points"] if _is_number(one["threshold"])]
        if points and len(points) == len(stairs["points"]):
            yield _figure(family, stairs["procedure_title"], points)


def _is_number(threshold: float | None) -> bool:
    return threshold is not None and math.isfinite(threshold)


def _stair(one: Point, threshold: float | None) -> Stair:
    return Stair(label=one["label"], rank=one["rank"], p=one["p"], threshold=threshold or 0.0, state=one["state"])


def _figure(family: str, procedure: str, points: list[Stair]) -> Figure:
    return Figure(
        key=f"staircase-{family}",
        svg=_named(points) if len(points) <= NAMED else _many(points),
        caption=_caption(family, procedure, points),
        alternative_text=_told(family, procedure, points),
        table=(
            ("Hypothesis", "Rank", "p", "Threshold", "State"),
            *(_row(one) for one in points[:TABLED]),
            *_rest(points),
        ),
    )


def _rest(points: list[Stair]) -> Iterable[tuple[str, ...]]:
    if len(points) > TABLED:
        yield f"{integer(len(points) - TABLED)} more, in tests.csv", "", "", "", ""


def _row(one: Stair) -> tuple[str, ...]:
    p, threshold = p_value(one["p"], one["threshold"]), exact(one["threshold"])
    return one["label"], str(one["rank"]), p, threshold, STATE_WORDS[one["state"]]


def _caption(family: str, procedure: str, points: list[Stair]) -> str:
    shapes = legend_words([one["state"] for one in points])
    beyond = "; at the left edge: smaller p" if min(one["p"] for one in points) < _limits(points)[0] else ""
    return (
        f"p-values of family {family} in ascending order against the thresholds of {procedure}; "
        f"tinted: at or below the threshold of its rank; {shapes}{beyond}."
    )


def _limits(points: list[Stair]) -> tuple[float, float]:
    thresholds = [one["threshold"] for one in points]
    floor = min(thresholds) * 10.0**-DECADES_BELOW
    lowest = min([max(one["p"], floor) for one in points] + thresholds)
    return lowest / 2, 1.6


def _open(height: float, points: list[Stair]) -> "tuple[Canvas, Axes]":
    figure, (axes,) = canvas(height, [1.0])
    axes.set_xscale("log")
    axes.set_xlim(*_limits(points))
    plain_ticks(axes)
    axes.set_xlabel("p (logarithmic axis)")
    return figure, axes


def _named(points: list[Stair]) -> str:
    lines = max(broken(one["label"]).count("\n") + 1 for one in points)
    figure, axes = _open(len(points) * (0.13 + 0.15 * lines) + 0.68, points)
    axes.set_ylim(len(points) - 0.5, -0.5)
    axes.set_yticks(range(len(points)), [broken(one["label"]) for one in points])
    lower = axes.get_xlim()[0]
    for y, one in enumerate(points):
        axes.fill_betweenx([y - 0.5, y + 0.5], lower, one["threshold"], color=TINT, linewidth=0, zorder=0)
        axes.axhline(y, color=HAIR, linewidth=0.5, zorder=1)
        put_marks(axes, [(max(one["p"], lower), y)], one["state"])
        axes.annotate(
            STATE_WORDS[one["state"]], (1, y), xycoords=("axes fraction", "data"), xytext=(8, 0),
            textcoords="offset points", va="center", color=QUIET,
        )  # fmt: skip
    _stairs(axes, [one["threshold"] for one in points], [at - 0.5 for at in range(len(points) + 1)])
    return as_svg(figure)


def _stairs(axes: "Axes", thresholds: list[float], edges: list[float]) -> None:
    axes.stairs(thresholds, edges, orientation="horizontal", color=ACCENT, linewidth=1.4, baseline=None, zorder=2)
    axes.annotate(
        "threshold", (thresholds[0], 1), xycoords=("data", "axes fraction"), xytext=(0, 3),
        textcoords="offset points", ha="center", va="bottom", color=ACCENT,
    )  # fmt: skip


def _many(points: list[Stair]) -> str:
    figure, axes = _open(3.9, points)
    axes.set_yscale("log")
    axes.set_ylim(len(points) + 0.5, 0.5)
    axes.set_ylabel("rank (logarithmic axis)")
    _plain_ranks(axes, len(points))
    lower = axes.get_xlim()[0]
    steps = list({round(GRAIN * math.log10(one["rank"])): one for one in reversed(points)}.values())[::-1]
    thresholds = [one["threshold"] for one in steps]
    edges = [*(one["rank"] - 0.5 for one in steps), len(points) + 0.5]
    corners = [edge for pair in pairwise(edges) for edge in pair]
    axes.fill_betweenx(corners, lower, [t for t in thresholds for _ in range(2)], color=TINT, linewidth=0, zorder=0)
    _stairs(axes, thresholds, edges)
    for state, places in _places(points, lower).items():
        put_marks(axes, places, state, size=3.2)
    _mark_last(axes, points)
    return as_svg(figure)


def _places(points: list[Stair], lower: float) -> dict[State, list[tuple[float, float]]]:
    """Gather the points by state; of those that would be printed on one spot, the first is enough."""
    found: dict[State, dict[tuple[int, int], tuple[float, float]]] = {}
    for one in points:
        p, rank = max(one["p"], lower), float(one["rank"])
        spot = round(GRAIN * math.log10(p)), round(GRAIN * math.log10(rank))
        found.setdefault(one["state"], {}).setdefault(spot, (p, rank))
    return {state: list(spots.values()) for state, spots in found.items()}


def _mark_last(axes: "Axes", points: list[Stair]) -> None:
    last = max((one["rank"] for one in points if one["state"] == "rejected"), default=0)
    if last:
        axes.axhline(last + 0.5, color=INK, linewidth=0.8, linestyle=(0, (4, 3)))
        axes.annotate(
            f"{integer(last)} rejected", (1, last + 0.5), xycoords=("axes fraction", "data"), xytext=(0, 3),
            textcoords="offset points", ha="right", va="bottom", color=INK,
        )  # fmt: skip


def _plain_ranks(axes: "Axes", most: int) -> None:
    from matplotlib.ticker import FixedLocator, FuncFormatter, NullLocator

    ranks = [step * 10**power for power in range(6) for step in (1, 2, 5) if step * 10**power <= most]
    axes.yaxis.set_major_locator(FixedLocator(ranks))
    axes.yaxis.set_minor_locator(NullLocator())
    axes.yaxis.set_major_formatter(FuncFormatter(lambda value, _: integer(round(value))))


def _told(family: str, procedure: str, points: list[Stair]) -> str:
    rejected = sum(one["state"] in ("rejected", "rejected_against_claim") for one in points)
    rows = [_row(one) for one in points[:TOLD]]
    told = " ".join(
        f"Rank {rank}, {label}: p {p}, threshold {threshold}, {state}." for label, rank, p, threshold, state in rows
    )
    more = f" {integer(len(points) - TOLD)} more stand in the table of numbers." if len(points) > TOLD else ""
    return (
        f"The {integer(len(points))} ordered p-values of family {family} and their thresholds by {procedure}; "
        f"{integer(rejected)} rejected. {told}{more}"
    )
