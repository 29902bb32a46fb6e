"""Characters that the bundled fonts can't draw: shown by their code, never as a box and never left out."""

from collections.abc import Iterator
from dataclasses import fields, is_dataclass
from functools import cache
from typing import Any

from beforehand.report.fonts import drawn_characters


def printable(text: str) -> str:
    """Write a text so that every character of it can be drawn: 'Zürich 😀' becomes 'Zürich U+1F600'."""
    return text if text.isascii() and text.isprintable() else "".join(map(_shown, text))


def printable_within(value: Any) -> Any:
    """Do the same to every text inside lists and mappings; the keys, which are ids and our own words, stay."""
    if isinstance(value, str):
        return printable(value)
    if isinstance(value, dict):
        return {key: printable_within(item) for key, item in value.items()}
    return [printable_within(item) for item in value] if isinstance(value, list | tuple) else value


def replaced_characters(record: Any) -> tuple[str, ...]:
    """Give the codes of the characters of a record that ``printable`` replaces, each once, in order."""
    found = {character for text in _texts(record) for character in text if _shown(character) != character}
    return tuple(_shown(character) for character in sorted(found))


@cache
def _shown(character: str) -> str:
    if character in drawn_characters() or character in "\n\t":
        return character
    return f"U+{ord(character):04X}"


def _texts(value: Any) -> Iterator[str]:
    if isinstance(value, str):
        yield value
    elif is_dataclass(value):
        for column in fields(value):
            yield from _texts(getattr(value, column.name))
    elif isinstance(value, dict):
        for pair in value.items():
            yield from _texts(pair)
    elif isinstance(value, list | tuple):
        for item in value:
            yield from _texts(item)
