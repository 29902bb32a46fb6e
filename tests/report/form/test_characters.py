"""Characters without a glyph are shown by their code."""

from dataclasses import dataclass

import pytest
from hypothesis import given
from hypothesis import strategies as st

from beforehand.report.characters import printable, printable_within, replaced_characters
from beforehand.report.fonts import drawn_characters


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("brush − standard, μ₁ ≥ 0\n\tžluťoučký", "brush − standard, μ₁ ≥ 0\n\tžluťoučký"),
        ("cold 😀 store", "cold U+1F600 store"),
        ("冷蔵庫", "U+51B7U+8535U+5EAB"),
        ("a\u202eb\u200bc\u00add\x07e", "aU+202EbU+200BcU+00ADdU+0007e"),
        ("", ""),
    ],
)
def test_text_is_shown_whole(text, shown):
    assert printable(text) == shown


@given(st.text())
def test_every_text_can_be_drawn_and_only_once_changed(text):
    shown = printable(text)
    assert set(shown) <= drawn_characters() | {"\n", "\t"}
    assert printable(shown) == shown


@dataclass
class Part:
    name: str
    levels: dict


def test_replaced_characters_are_found_wherever_they_stand():
    part = Part("ok 😀", {"冷": (1.0, "x"), "y": ["冷", None]})
    assert replaced_characters((part, 3)) == ("U+51B7", "U+1F600")
    assert replaced_characters(Part("plain", {})) == ()


def test_texts_inside_numbers_are_found():
    drawn = {"speed": [{"label": "冷 kettle", "p": 0.01, "unit": None}, ("s", 3)]}
    assert printable_within(drawn) == {"speed": [{"label": "U+51B7 kettle", "p": 0.01, "unit": None}, ["s", 3]]}
