"""Ordered p-values of one family against the thresholds they had to meet, smallest at the top."""

from collections.abc import Iterable, Mapping
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
    put_mark,
)
from beforehand.report.figures.model import Figure
from beforehand.spelling import exact, integer, p_value
from beforehand.terms import STATE_WORDS, State

if TYPE_CHECKING:
    from matplotlib.axes import Axes

# Up to so many hypotheses each has a row of its own with its name.
NAMED = 20
TOLD = 8
# Smaller p-values are drawn at the edge: how small they are is no matter for the threshold.
DECADES_BELOW = 6


class Point(TypedDict):
    """What the record holds for one hypothesis, in the order of rank."""

    id: str
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
    """Draw one figure per family that has a p-value."""
    for family, stairs in families.items():
        if stairs["points"]:
            yield _figure(family, stairs)


def _figure(family: str, stairs: Staircase) -> Figure:
    points = stairs["points"]
    return Figure(
        key=f"staircase-{family}",
        svg=_named(points) if len(points) <= NAMED else _many(points),
        caption=_caption(family, stairs),
        alternative_text=_told(family, stairs),
        table=(
            ("Hypothesis", "Rank", "p", "Threshold", "State"),
            *(
                (
                    one["label"], str(one["rank"]), p_value(one["p"], one["threshold"]), exact(one["threshold"]),
                    STATE_WORDS[one["state"]],
                )
                for one in points
            ),
        ),
    )  # fmt: skip


def _caption(family: str, stairs: Staircase) -> str:
    points = stairs["points"]
    shapes = legend_words([one["state"] for one in points])
    beyond = "; at the left edge: smaller p" if min(one["p"] for one in points) < _limits(points)[0] else ""
    return (
        f"p-values of family {family} in ascending order against the thresholds of {stairs['procedure_title']}; "
        f"tinted: at or below the threshold of its rank; {shapes}{beyond}."
    )


def _limits(points: list[Point]) -> tuple[float, float]:
    thresholds = [one["threshold"] for one in points]
    floor = min(thresholds) * 10.0**-DECADES_BELOW
    lowest = min([max(one["p"], floor) for one in points] + thresholds)
    return lowest / 2, 1.6


def _open(height: float, points: list[Point]) -> "tuple[object, Axes]":
    figure, (axes,) = canvas(height, [1.0])
    axes.set_xscale("log")
    axes.set_xlim(*_limits(points))
    plain_ticks(axes)
    axes.set_xlabel("p (logarithmic axis)")
    return figure, axes


def _named(points: list[Point]) -> str:
    lines = max(broken(one["label"]).count("\n") + 1 for one in points)
    figure, axes = _open(len(points) * (0.13 + 0.15 * lines) + 0.68, points)
    axes.set_ylim(len(points) - 0.5, -0.5)
    axes.set_yticks(range(len(points)), [broken(one["label"]) for one in points])
    lower = axes.get_xlim()[0]
    for y, one in enumerate(points):
        axes.fill_betweenx([y - 0.5, y + 0.5], lower, one["threshold"], color=TINT, linewidth=0, zorder=0)
        axes.axhline(y, color=HAIR, linewidth=0.5, zorder=1)
        put_mark(axes, max(one["p"], lower), y, one["state"])
        axes.annotate(
            STATE_WORDS[one["state"]], (1, y), xycoords=("axes fraction", "data"), xytext=(8, 0),
            textcoords="offset points", va="center", color=QUIET,
        )  # fmt: skip
    _stairs(axes, [one["threshold"] for one in points], [at - 0.5 for at in range(len(points) + 1)])
    return as_svg(figure)  # type: ignore[arg-type]


def _stairs(axes: "Axes", thresholds: list[float], edges: list[float]) -> None:
    axes.stairs(thresholds, edges, orientation="horizontal", color=ACCENT, linewidth=1.4, baseline=None, zorder=2)
    axes.annotate(
        "threshold", (thresholds[0], 1), xycoords=("data", "axes fraction"), xytext=(0, 3),
        textcoords="offset points", ha="center", va="bottom", color=ACCENT,
    )  # fmt: skip


def _many(points: list[Point]) -> str:
    figure, axes = _open(3.9, points)
    axes.set_yscale("log")
    axes.set_ylim(len(points) + 0.5, 0.5)
    axes.set_ylabel("rank (logarithmic axis)")
    _plain_ranks(axes, len(points))
    lower = axes.get_xlim()[0]
    thresholds = [one["threshold"] for one in points]
    edges = [at + 0.5 for at in range(len(points) + 1)]
    for one, top, bottom in zip(points, edges, edges[1:], strict=False):
        axes.fill_betweenx([top, bottom], lower, one["threshold"], color=TINT, linewidth=0, zorder=0)
    _stairs(axes, thresholds, edges)
    for one in points:
        put_mark(axes, max(one["p"], lower), one["rank"], one["state"], size=3.2)
    last = max((one["rank"] for one in points if one["state"] == "rejected"), default=0)
    if last:
        axes.axhline(last + 0.5, color=INK, linewidth=0.8, linestyle=(0, (4, 3)))
        axes.annotate(
            f"{integer(last)} rejected", (1, last + 0.5), xycoords=("axes fraction", "data"), xytext=(0, 3),
            textcoords="offset points", ha="right", va="bottom", color=INK,
        )  # fmt: skip
    return as_svg(figure)  # type: ignore[arg-type]


def _plain_ranks(axes: "Axes", most: int) -> None:
    from matplotlib.ticker import FixedLocator, FuncFormatter, NullLocator

    ranks = [step * 10**power for power in range(6) for step in (1, 2, 5) if step * 10**power <= most]
    axes.yaxis.set_major_locator(FixedLocator(ranks))
    axes.yaxis.set_minor_locator(NullLocator())
    axes.yaxis.set_major_formatter(FuncFormatter(lambda value, _: integer(round(value))))


def _told(family: str, stairs: Staircase) -> str:
    points = stairs["points"]
    rejected = sum(one["state"] in ("rejected", "rejected_against_claim") for one in points)
    told = " ".join(
        f"Rank {one['rank']}, {one['label']}: p {p_value(one['p'], one['threshold'])}, threshold "
        f"{exact(one['threshold'])}, {STATE_WORDS[one['state']]}."
        for one in points[:TOLD]
    )
    more = f" {integer(len(points) - TOLD)} more stand in the table of numbers." if len(points) > TOLD else ""
    return (
        f"The {integer(len(points))} ordered p-values of family {family} and their thresholds by "
        f"{stairs['procedure_title']}; {integer(rejected)} rejected. {told}{more}"
    )
