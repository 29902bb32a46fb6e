"""Imports point down, never sideways; each outside library has its rooms."""

import ast
from collections.abc import Iterator
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parents[1] / "generator" / "beforehand"

FLOORS = {
    "terms": 0, "errors": 0, "spelling": 0, "catalogue": 0,
    "distributions": 1, "resampling": 1,
    "hypothesis_tests": 2, "multiplicity": 2,
    "spec": 3, "record": 4, "data": 5, "snooping": 6, "analysis": 7, "planning": 8, "report": 8, "study": 9, "cli": 10,
}  # fmt: skip
# the report is made again from a run folder years later, without data, tests or procedures
ONLY = {"report": {"record", "terms", "spelling", "errors"}}
# threadpoolctl: the environment says which linear algebra was loaded, and the analysis keeps it to one thread
ROOMS = {
    "pydantic": {"spec", "record"},
    "pydantic_core": {"spec"},
    "pandas": {"data", "study"},
    "jinja2": {"report"},
    "matplotlib": {"report"},
    "weasyprint": {"report"},
    "pydyf": {"report"},
    "fontTools": {"report"},
    "markupsafe": {"report"},
    "click": {"cli"},
    "rich": {"cli"},
    "yaml": {"spec"},
    "threadpoolctl": {"record", "analysis"},
}
MODULES = sorted(path for path in PACKAGE.rglob("*.py") if path.parent != PACKAGE or path.stem in FLOORS)


def room(path: Path) -> str:
    return path.relative_to(PACKAGE).parts[0].removesuffix(".py")


def imported(path: Path) -> Iterator[str]:
    for node in ast.walk(ast.parse(path.read_text("utf-8"))):
        if isinstance(node, ast.Import):
            yield from (name.name for name in node.names)
        elif isinstance(node, ast.ImportFrom) and node.module:
            yield node.module


@pytest.mark.parametrize("path", MODULES, ids=lambda path: str(path.relative_to(PACKAGE)))
def test_imports_point_down(path: Path) -> None:
    here = room(path)
    for name in imported(path):
        parts = name.split(".")
        if parts[0] != "beforehand":
            assert here in ROOMS.get(parts[0], {here}), f"{parts[0]} has no place in {here}"
        elif len(parts) > 1 and parts[1] not in (here, "templates"):
            assert FLOORS[parts[1]] < FLOORS[here], f"{here} imports {parts[1]}"
            assert parts[1] in ONLY.get(here, {parts[1]}), f"{here} may not know {parts[1]}"


def test_no_room_is_a_hallway() -> None:
    names = {path.stem for path in PACKAGE.rglob("*.py")} | {path.name for path in PACKAGE.rglob("*") if path.is_dir()}
    assert not names & {"utils", "helpers", "core", "manager", "common", "misc", "base"}


def test_nothing_outside_the_tests_is_called_a_test() -> None:
    for path in PACKAGE.rglob("*.py"):
        for node in ast.walk(ast.parse(path.read_text("utf-8"))):
            if isinstance(node, ast.FunctionDef | ast.ClassDef):
                assert not node.name.startswith(("test_", "Test")), f"{path.name}: {node.name}"
