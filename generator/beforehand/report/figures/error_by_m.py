"""The chance of at least one false rejection without adjustment, step by step as the number of hypotheses grows."""

from collections.abc import Iterable
from typing import TypedDict

from beforehand.report.figures.canvas import ACCENT, HAIR, INK, QUIET, as_svg, canvas
from beforehand.report.figures.model import Figure
from beforehand.spelling import integer, percent

# The numbers of hypotheses that have a bar, where the record holds them; this study's m has one always.
STEPS = (1, 2, 3, 5, 10, 20, 40, 100, 200, 500, 1000)
ALMOST_SURE = 0.99


class ErrorByM(TypedDict):
    """What the record holds: for each m the chance under independence, and the largest possible one."""

    level: float
    m: list[int]
    independent: list[float]
    at_most: list[float]
    this_m: int
    this_independent: float
    this_at_most: float


class Step(TypedDict):
    """One bar."""

    m: int
    independent: float
    at_most: float


def draw(numbers: ErrorByM) -> Iterable[Figure]:
    """Draw the figure."""
    level, m = percent(numbers["level"]), integer(numbers["this_m"])
    independent, at_most = _chance(numbers["this_independent"]), _chance(numbers["this_at_most"])
    steps = _steps(numbers)
    yield Figure(
        key="error_by_m",
        svg=_svg(steps, numbers),
        caption=(
            f"What a reader would risk who took each unadjusted p at {level}: the chance of at least one false "
            "rejection when every null hypothesis is true. Bar: independent tests; thin line: at most, whatever the "
            f"dependence. This study has m = {m}: {independent}, at most {at_most}."
        ),
        alternative_text=(
            f"Bars that lengthen with the number of hypotheses m. At m = {m}, this study, the chance of at least one "
            f"false rejection without adjustment is {independent} for independent tests and at most {at_most}; for "
            f"one test it is {level}."
        ),
        table=(
            ("Number of hypotheses (m)", "Independent tests", "At most"),
            *((integer(one["m"]), _chance(one["independent"]), _chance(one["at_most"])) for one in steps),
        ),
    )


def _chance(share: float) -> str:
    return percent(share, 2) if share <= ALMOST_SURE or share == 1 else f"> {percent(ALMOST_SURE)}"


def _steps(numbers: ErrorByM) -> list[Step]:
    columns = zip(numbers["m"], numbers["independent"], numbers["at_most"], strict=True)
    every = [Step(m=m, independent=a, at_most=b) for m, a, b in columns]
    last = max(step["m"] for step in every)
    nearest = (min(every, key=lambda one: abs(one["m"] - wanted)) for wanted in STEPS if wanted <= last)
    found = {step["m"]: step for step in nearest}
    found[numbers["this_m"]] = Step(
        m=numbers["this_m"], independent=numbers["this_independent"], at_most=numbers["this_at_most"]
    )
    steps = [found[m] for m in sorted(found)]
    full = [step for step in steps if step["independent"] > ALMOST_SURE and step["m"] > numbers["this_m"]]
    return [step for step in steps if step not in full[1:]]


def _svg(steps: list[Step], numbers: ErrorByM) -> str:
    figure, (axes,) = canvas(0.2 * len(steps) + 0.72, [1.0])
    axes.set_xlim(0, 1)
    axes.set_ylim(len(steps) - 0.5, -0.5)
    axes.set_yticks(range(len(steps)), [_name(step, numbers["this_m"]) for step in steps])
    axes.set_xticks([0, 0.25, 0.5, 0.75, 1], [percent(share) for share in (0, 0.25, 0.5, 0.75, 1)])
    axes.set_xlabel("chance of at least one false rejection without adjustment")
    for y, step in enumerate(steps):
        here = step["m"] == numbers["this_m"]
        axes.plot([0, step["at_most"]], [y, y], color=INK if here else QUIET, linewidth=0.9, zorder=2)
        axes.plot([step["at_most"]], [y], marker="|", color=INK if here else QUIET, markersize=6, zorder=2)
        axes.barh(y, step["independent"], height=0.56, color=ACCENT if here else HAIR, zorder=3)
        axes.annotate(
            _chance(step["independent"]), (max(step["at_most"], step["independent"]), y), xytext=(6, 0),
            textcoords="offset points", va="center", color=INK if here else QUIET,
        )  # fmt: skip
    axes.axvline(numbers["level"], color=INK, linewidth=0.9, linestyle=(0, (4, 3)), zorder=4)
    axes.annotate(
        f"promised {percent(numbers['level'])}", (numbers["level"], 1), xycoords=("data", "axes fraction"),
        xytext=(0, 3), textcoords="offset points", va="bottom", ha="left", color=QUIET,
    )  # fmt: skip
    return as_svg(figure)


def _name(step: Step, this_m: int) -> str:
    return f"m = {integer(step['m'])}, this study" if step["m"] == this_m else f"m = {integer(step['m'])}"
