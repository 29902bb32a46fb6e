"""The figures: what they draw, say and hold, from plain numbers."""

import re
from typing import Any, get_args

import pytest

from beforehand.report.figures import canvas, error_by_m, estimates, staircase
from beforehand.report.figures.canvas import MARKS, broken
from beforehand.report.fonts import register_in_matplotlib
from beforehand.terms import State


@pytest.fixture(scope="session", autouse=True)
def fonts() -> None:
    register_in_matplotlib()


def estimate(**changes: Any) -> dict[str, Any]:
    return {
        "id": "one", "label": "drill − hand", "estimate": -2.5, "lower": -4.0, "upper": -1.0, "matching_lower": None,
        "matching_upper": None, "matching_level": None, "null_values": [0.0], "scale": "difference",
        "estimates": "difference in means", "unit": "d", "state": "rejected", "interval_level": 0.95,
    } | changes  # fmt: skip


def stairs(p: list[float], states: list[State]) -> dict[str, Any]:
    points = [
        {"id": f"h{at}", "label": f"hypothesis {at}", "rank": at + 1, "p": value, "threshold": 0.05 / (len(p) - at),
         "state": state}
        for at, (value, state) in enumerate(zip(p, states, strict=True))
    ]  # fmt: skip
    return {"procedure": "holm", "procedure_title": "Holm step-down", "level": 0.05, "points": points}


def rises(m: int, last: int) -> dict[str, Any]:
    return {
        "level": 0.05, "m": list(range(1, last + 1)), "independent": [1 - 0.95**k for k in range(1, last + 1)],
        "at_most": [min(1.0, 0.05 * k) for k in range(1, last + 1)], "this_m": m, "this_independent": 1 - 0.95**m,
        "this_at_most": min(1.0, 0.05 * m),
    }  # fmt: skip


ESTIMATES = {
    "one": [estimate()],
    "every state": [estimate(state=state) for state in get_args(State)],
    "ratio": [estimate(scale="ratio", estimate=0.5, lower=0.1, upper=2.0, null_values=[1.0])],
    "open end": [estimate(upper="infinity"), estimate(lower="-infinity")],
    "no interval": [estimate(lower=None, upper=None)],
    "matching": [estimate(matching_lower=-5.0, matching_upper=-0.5)],
    "two margins": [estimate(null_values=[-1.0, 1.0])],
    "many": [estimate(id=f"h{at}", label=f"hypothesis {at}") for at in range(60)],
    "long and odd": [estimate(label="<b>$x_1$ & a label that goes on and on and on, far beyond any edge</b>")],
    "mixed units": [
        estimate(unit="d"), estimate(unit="kg"),
        estimate(estimates="odds ratio", scale="ratio", estimate=2.0, lower=1.5, upper=3.0, null_values=[1.0]),
    ],
    "equal ends": [estimate(estimate=0.0, lower=0.0, upper=0.0)],
}  # fmt: skip


@pytest.mark.parametrize("name", ESTIMATES)
def test_estimates_are_drawn_with_words_and_numbers(name: str) -> None:
    (figure,) = estimates.draw({"one": ESTIMATES[name]})
    assert figure.key == "estimates-one"
    assert figure.svg.startswith("<?xml")
    assert "<text" not in figure.svg, "type must be drawn as paths, or a viewer picks its own font"
    assert ESTIMATES[name][0]["label"] in figure.alternative_text
    assert len(figure.table) == 1 + min(len(ESTIMATES[name]), estimates.MOST)
    assert {len(row) for row in figure.table} == {len(figure.table[0])}


def test_the_numbers_behind_estimates_are_those_drawn() -> None:
    (figure,) = estimates.draw({"one": [estimate(upper="infinity")]})
    assert [text.replace("\u00a0", " ") for text in figure.table[1]] == [
        "drill − hand",
        "−2.5 d",
        "−4.0 to ∞",
        "–",
        "rejected",
    ]


def test_a_missing_estimate_is_named() -> None:
    (figure,) = estimates.draw({"one": [estimate(), estimate(label="opening effort", estimate=None)]})
    assert "Without an estimate: opening effort." in figure.caption
    assert list(estimates.draw({"one": [estimate(estimate=None)]})) == []


def test_many_estimates_say_how_many_are_drawn() -> None:
    (figure,) = estimates.draw({"one": ESTIMATES["many"]})
    assert f"{estimates.MOST} of 60 are drawn" in figure.caption


@pytest.mark.parametrize(
    ("p", "states"),
    [
        ([0.001], ["rejected"]),
        ([0.001, 0.01, 0.2], ["rejected", "rejected", "not_rejected"]),
        ([0.0, 1e-200, 1.0], ["rejected", "rejected", "no_result"]),
        ([(at + 1) / 600 for at in range(600)], ["not_rejected"] * 600),
        ([1e-12] * 30 + [0.5] * 570, ["rejected"] * 30 + ["not_rejected"] * 570),
    ],
)
def test_staircases_are_drawn_for_few_and_many(p: list[float], states: list[State]) -> None:
    (figure,) = staircase.draw({"one": stairs(p, states)})
    assert figure.key == "staircase-one"
    assert len(figure.table) == min(len(p), staircase.TABLED + 1) + 1
    assert f"{states.count('rejected')} rejected" in figure.alternative_text
    assert ("left edge" in figure.caption) == (min(p) < 1e-8)


def test_twenty_thousand_points_stay_a_small_picture() -> None:
    m = 20_000
    (figure,) = staircase.draw({"one": stairs([(at + 1) / m for at in range(m)], ["not_rejected"] * m)})
    assert len(figure.svg) < 300_000  # characters; with every point by itself it would be several millions


def test_a_procedure_without_thresholds_has_no_staircase() -> None:
    without = stairs([0.01], ["rejected"])
    without["points"][0]["threshold"] = None
    assert list(staircase.draw({"one": without})) == []


def test_a_family_without_points_has_no_staircase() -> None:
    assert list(staircase.draw({"one": stairs([], [])})) == []


@pytest.mark.parametrize(("m", "last"), [(1, 10), (6, 12), (600, 1200)])
def test_the_error_by_m_marks_this_study(m: int, last: int) -> None:
    (figure,) = error_by_m.draw(rises(m, last))
    assert f"This study has m = {m}" in figure.caption
    assert str(m) in [row[0] for row in figure.table]
    assert len(figure.table) <= len(error_by_m.STEPS) + 2


def test_the_error_by_m_is_written_without_false_certainty() -> None:
    (figure,) = error_by_m.draw(rises(300, 600))
    row = next(row for row in figure.table if row[0] == "300")
    assert row[1].replace("\u202f", " ") == "> 99 %"
    assert row[2].replace("\u202f", " ") == "100 %"


def test_drawing_twice_gives_the_same_bytes() -> None:
    first, second = (next(iter(estimates.draw({"one": [estimate()]}))).svg for _ in range(2))
    assert first == second
    assert not re.search(r"<dc:date>|<dc:creator>", first)


def test_every_state_has_a_shape_of_its_own() -> None:
    assert set(MARKS) == set(get_args(State))
    looks = [(mark.marker, mark.face, mark.edge) for mark in MARKS.values()]
    assert len(set(looks)) == len(looks)


def test_type_is_printed_at_nine_points() -> None:
    width = canvas.WIDTH * 25.4
    assert 169.5 <= width <= 170.5  # millimetres: the figure is as wide as the text on the page, so nothing is shrunk
    assert canvas.SETTINGS["font.size"] >= 9


def test_long_labels_are_broken_and_cut() -> None:
    lines = broken("word " * 60).split("\n")
    assert len(lines) == 3
    assert lines[-1].endswith("…")
    assert max(map(len, lines)) <= canvas.LABEL_WIDTH
