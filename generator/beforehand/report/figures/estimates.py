"""Estimates of one family with their intervals, each beside its name; ratios on a logarithmic axis."""

import math
from collections.abc import Iterable, Mapping
from typing import TYPE_CHECKING, TypedDict

from beforehand.report.figures.canvas import (
    ACCENT,
    HAIR,
    INK,
    MARKS,
    QUIET,
    as_svg,
    broken,
    canvas,
    legend_words,
    plain_ticks,
    put_marks,
)
from beforehand.report.figures.model import Figure
from beforehand.spelling import NOTHING, between, decimal, decimals_for, percent, ratio, short, with_unit
from beforehand.terms import STATE_WORDS, Scale, State

if TYPE_CHECKING:
    from matplotlib.axes import Axes

# More rows than this don't fit on a page.
MOST = 20
AIRY = 12
TOLD = 8
NAMED = 4


End = float | str | None
"""The end of an interval: a number, "infinity", "-infinity", or None where there is no interval."""


class Estimate(TypedDict):
    """What the record holds for one row."""

    id: str
    label: str
    estimate: float | None
    lower: End
    upper: End
    matching_lower: End
    matching_upper: End
    null_values: list[float]
    scale: Scale
    estimates: str
    unit: str
    state: State
    interval_level: float | None
    """None where the interval was supplied."""


Panel = list[Estimate]


def draw(families: Mapping[str, list[Estimate]]) -> Iterable[Figure]:
    """Draw one figure per family that has an estimate."""
    for family, every in families.items():
        drawn = [one for one in every if one["estimate"] is not None]
        if drawn:
            yield _figure(family, _foremost(drawn), every)


def _figure(family: str, shown: list[Estimate], every: list[Estimate]) -> Figure:
    return Figure(
        key=f"estimates-{family}",
        svg=_svg(_panels(shown)),
        caption=f"Estimates of family {family}. {_key(shown)}.{_left_out(shown, every)}",
        alternative_text=_told(family, shown),
        table=(_HEAD, *(_row(one) for one in shown)),
    )


def _left_out(shown: list[Estimate], every: list[Estimate]) -> str:
    drawable = sum(one["estimate"] is not None for one in every)
    part = f" {len(shown)} of {drawable} are drawn, rejections first." if len(shown) < drawable else ""
    without = [one["label"] for one in every if one["estimate"] is None]
    names = ", ".join(without[:NAMED]) + (f" and {len(without) - NAMED} more" if len(without) > NAMED else "")
    return f"{part} Without an estimate: {names}." if without else part


def _foremost(every: list[Estimate]) -> list[Estimate]:
    if len(every) <= MOST:
        return every
    order = list(MARKS)
    kept = sorted(range(len(every)), key=lambda at: (order.index(every[at]["state"]), at))[:MOST]
    return [every[at] for at in sorted(kept)]


def _panels(shown: list[Estimate]) -> list[Panel]:
    found: dict[tuple[object, ...], Panel] = {}
    for one in shown:
        found.setdefault((one["scale"], one["estimates"], one["unit"], *one["null_values"]), []).append(one)
    return list(found.values())


def _svg(panels: list[Panel]) -> str:
    heights = [_height(panel) for panel in panels]
    figure, axes = canvas(sum(heights), heights)
    for panel, one_axes in zip(panels, axes, strict=True):
        _draw_panel(one_axes, panel)
    return as_svg(figure)


def _height(panel: Panel) -> float:
    lines = max(broken(one["label"]).count("\n") + 1 for one in panel)
    air = 0.15 if len(panel) <= AIRY else 0.1
    return len(panel) * max(air + 0.15 * lines, 0.4 if _has_matching(panel) else 0) + 0.68


def _has_matching(shown: list[Estimate]) -> bool:
    return any(one["matching_lower"] is not None or one["matching_upper"] is not None for one in shown)


def _draw_panel(axes: "Axes", panel: Panel) -> None:
    axes.set_xscale("log" if panel[0]["scale"] == "ratio" else "linear")
    lower, upper = _limits(panel)
    axes.set_xlim(lower, upper)
    axes.set_ylim(len(panel) - 0.4, -0.6)
    axes.set_yticks(range(len(panel)), [broken(one["label"]) for one in panel])
    for null in panel[0]["null_values"]:
        axes.axvline(null, color=INK, linewidth=0.9, linestyle=(0, (4, 3)), zorder=1)
        axes.annotate(
            f"null value {short(null)}", (null, 1), xycoords=("data", "axes fraction"), xytext=(0, 3),
            textcoords="offset points", ha="center", va="bottom", color=QUIET,
        )  # fmt: skip
    for y, one in enumerate(panel):
        _draw_row(axes, y, one)
    if panel[0]["scale"] == "ratio":
        plain_ticks(axes)
    axes.set_xlabel(_axis(panel[0]))


def _axis(one: Estimate) -> str:
    name = ", ".join(part for part in (one["estimates"], one["unit"]) if part)
    return f"{name} (logarithmic axis)" if one["scale"] == "ratio" else name


def _draw_row(axes: "Axes", y: int, one: Estimate) -> None:
    axes.axhline(y, color=HAIR, linewidth=0.5, zorder=0)
    words = STATE_WORDS[one["state"]]
    axes.annotate(
        words, (1, y), xycoords=("axes fraction", "data"), xytext=(8, 0), textcoords="offset points", va="center",
        color=INK if one["state"] in ("rejected", "rejected_against_claim") else QUIET,
    )  # fmt: skip
    colour = ACCENT if one["state"] == "rejected" else MARKS[one["state"]].edge
    if one["lower"] is not None:
        _draw_interval(axes, y, (one["lower"], one["upper"]), colour, width=2.6)
    if one["matching_lower"] is not None:
        _draw_interval(axes, y + 0.28, (one["matching_lower"], one["matching_upper"]), colour, width=0.9, caps=True)
    put_marks(axes, [(one["estimate"] or 0.0, y)], one["state"])


def _draw_interval(
    axes: "Axes", y: float, ends: tuple[End, End], colour: str, *, width: float, caps: bool = False
) -> None:
    limits = axes.get_xlim()
    drawn = [end if isinstance(end, float | int) else limit for end, limit in zip(ends, limits, strict=True)]
    axes.plot(drawn, [y, y], color=colour, linewidth=width, solid_capstyle="butt", zorder=3)
    for end, at, arrow in zip(ends, drawn, "<>", strict=True):
        if not isinstance(end, float | int):
            axes.plot([at], [y], marker=arrow, color=colour, markersize=5, clip_on=False, zorder=3)
        elif caps:
            axes.plot([at], [y], marker="|", color=colour, markersize=5, markeredgewidth=width, zorder=3)


def _limits(panel: Panel) -> tuple[float, float]:
    ratio = panel[0]["scale"] == "ratio"
    names = ("estimate", "lower", "upper", "matching_lower", "matching_upper")
    values = [one[name] for one in panel for name in names] + list(panel[0]["null_values"])  # type: ignore[literal-required]
    finite = [value for value in values if isinstance(value, float | int) and (value > 0 or not ratio)]
    lower, upper = min(finite, default=0.5), max(finite, default=2.0)
    if ratio:
        margin = (upper / lower) ** 0.06 if upper > lower else 1.5
        return lower / margin, upper * margin
    margin = 0.06 * (upper - lower) or 1.0
    return lower - margin, upper + margin


_HEAD = ("Hypothesis", "Estimate", "Unadjusted interval", "Simultaneous interval", "State")


def _number(end: End) -> float:
    return math.nan if end is None else float(end)


def _row(one: Estimate) -> tuple[str, ...]:
    """Write the numbers as the tables of the report write them: as fine as the interval is narrow."""
    ends = (one["estimate"], one["lower"], one["upper"], one["matching_lower"], one["matching_upper"])
    values = [_number(end) for end in ends]
    nulls = tuple(one["null_values"])
    if one["scale"] == "ratio":
        texts = [NOTHING if math.isnan(value) else ratio(value, nulls) for value in values]
    else:
        decimals = decimals_for(values[1], values[2], values[0], nulls)
        texts = [decimal(value, decimals) for value in values]
    estimate, lower, upper, matching_lower, matching_upper = texts
    return (
        one["label"],
        with_unit(estimate, one["unit"]),
        between(lower, upper),
        between(matching_lower, matching_upper),
        STATE_WORDS[one["state"]],
    )


def _key(shown: list[Estimate]) -> str:
    levels = {percent(level) for one in shown if (level := one["interval_level"]) is not None}
    said = f" ({', '.join(sorted(levels))})" if levels else " (as supplied)"
    thin = "; thin line below it: simultaneous interval" if _has_matching(shown) else ""
    return f"Thick line: unadjusted interval{said}{thin}; {legend_words([one['state'] for one in shown])}"


def _told(family: str, shown: list[Estimate]) -> str:
    told = [_sentence(one) for one in shown[:TOLD]]
    more = f" {len(shown) - TOLD} more stand in the table of numbers." if len(shown) > TOLD else ""
    return f"Estimates and intervals of family {family}, one row each. {' '.join(told)}{more}"


def _sentence(one: Estimate) -> str:
    label, estimate, interval, _, state = _row(one)
    return f"{label}: {estimate}, {interval}, {state}."
