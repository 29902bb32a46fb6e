"""The figure of the graph: what it draws, says and holds, from plain numbers."""

from typing import Any

import pytest

from beforehand.report.figures import graph
from beforehand.report.fonts import register_in_matplotlib


@pytest.fixture(scope="module", autouse=True)
def fonts() -> None:
    register_in_matplotlib()


def node(name: str, state: str = "not_rejected", start: float = 0.0, share: float = 0.0) -> dict[str, Any]:
    return {"id": name, "label": f"{name} − hand", "state": state, "start": start, "share": share}


def step(number: int, name: str, *, taken: bool, **changes: Any) -> dict[str, Any]:
    return {
        "step": number, "id": name, "share": 0.5, "p": 0.01, "product": 0.02, "adjusted": 0.02, "from_step": number,
        "taken": taken, "then": {},
    } | changes  # fmt: skip


CHAIN = {
    "nodes_are": "hypotheses", "level": 0.025,
    "nodes": [node("drill", "rejected", 0.5, 0.5), node("disc", "not_rejected", 0.5, 1.0), node("tine", "not_tested")],
    "arrows_before": [["drill", "disc", "1 - epsilon"], ["drill", "tine", "epsilon"], ["disc", "tine", "1/3"]],
    "arrows_after": [["disc", "tine", 1 / 3]],
    "steps": [step(1, "drill", taken=True, then={"disc": 1.0}),
              step(2, "disc", taken=False, share=1.0, p=0.03, product=0.03, adjusted=0.03)],
}  # fmt: skip


def test_the_figure_has_its_words_and_numbers() -> None:
    (figure,) = graph.draw(CHAIN)  # type: ignore[arg-type]
    assert figure.key == "graph"
    assert figure.svg.startswith("<?xml")
    assert "<text" not in figure.svg, "type must be drawn as paths, or a viewer picks its own font"
    assert "at the level 0.025" in figure.caption
    assert "3 hypotheses, of which 1 fall at the level 0.025" in figure.alternative_text
    assert "drill − hand to disc − hand 1 − ε" in figure.alternative_text
    assert figure.table == (
        ("Step", "Hypothesis", "p / share held", "Rejected from", "At 0.025", "Passes on", "Held after the step"),
        (
            "1",
            "drill − hand",
            "0.01 / 0.5 = 0.02",
            "0.02",
            "taken",
            "disc − hand 1 − ε; tine − hand ε",
            "disc − hand 1",
        ),
        ("2", "disc − hand", "0.03 / 1 = 0.03", "0.03", "not taken", "tine − hand 1/3", "–"),
        ("–", "tine − hand", "no share reaches it", "–", "not taken", "–", "–"),
    )


def test_the_same_numbers_give_the_same_bytes() -> None:
    one, other = (next(iter(graph.draw(CHAIN))).svg for _ in range(2))  # type: ignore[arg-type]
    assert one == other


@pytest.mark.parametrize("n", [1, 2, 12, 18])
def test_every_size_is_drawn(n: int) -> None:
    names = [f"h{at}" for at in range(n)]
    numbers = {
        "nodes_are": "families", "level": 0.05, "nodes": [node(name, "no_result", 1 / n, 1 / n) for name in names],
        "arrows_before": [[a, b, 1.0] for a in names for b in names if a != b][:40], "arrows_after": [], "steps": [],
    }  # fmt: skip
    (figure,) = graph.draw(numbers)  # type: ignore[arg-type]
    assert len(figure.table) == n + 1
    assert figure.table[0][1] == "Family"
