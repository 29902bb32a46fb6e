"""Python decides, templates word: no template compares, counts or formats, and no style is written into an element."""

import re
from importlib.resources import files
from pathlib import Path

import pytest

TEMPLATES = Path(str(files("beforehand.templates")))
PAGES = sorted(TEMPLATES.rglob("*.html"))


@pytest.mark.parametrize("path", PAGES, ids=lambda path: path.name)
def test_templates_only_loop_include_and_print(path: Path) -> None:
    text = path.read_text("utf-8")
    for tag in re.findall(r"\{[%{](.*?)[%}]\}", text):
        assert not re.search(r"[<>]|[=!]=|\bis\b|\bnot\b|\band\b|\bor\b", tag), tag
        assert not re.search(r"\|\s*(?!trim\b)\w+", tag), f"a filter that words or counts: {tag}"
        assert not re.search(r"\bset\b|loop\.|[*/+%-]\s*\d", tag), tag
    assert "style=" not in re.sub(r"\{%.*?%\}", "", text)


def test_the_script_remembers_nothing() -> None:
    script = (TEMPLATES / "report.js").read_text("utf-8")
    for word in (
        "localStorage",
        "sessionStorage",
        "cookie",
        "fetch(",
        "XMLHttpRequest",
        "location",
        "history.",
        "eval(",
    ):
        assert word not in script


def test_both_media_have_the_same_parts() -> None:
    sections = TEMPLATES / "sections"
    assert {path.name for path in (sections / "screen").iterdir()} == {
        path.name for path in (sections / "print").iterdir()
    }
