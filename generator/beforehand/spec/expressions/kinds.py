"""Whether an expression fits the columns it names: checked before any row is read."""

import datetime
import difflib
from collections.abc import Mapping
from dataclasses import dataclass

from beforehand.spec.expressions.tree import (
    Among,
    Arithmetic,
    Comparison,
    ExpressionFault,
    Function,
    IsMissing,
    Joined,
    MeanOf,
    Name,
    Negative,
    Node,
    Not,
    Number,
    Pick,
    Round,
    Text,
)  # fmt: skip
from beforehand.terms import ValueKind

_WORDS: dict[ValueKind, str] = {"number": "a number", "text": "text", "date": "a date", "truth": "a condition"}


@dataclass(frozen=True)
class Known:
    """What is known of a column beforehand: its kind and, for a category, its levels."""

    kind: ValueKind
    levels: tuple[str, ...] | None = None


def kind_of(node: Node, known: Mapping[str, Known]) -> ValueKind:  # noqa: PLR0911, PLR0912 -- one case for each kind of node
    """Give the kind of the value, or raise the fault that names the column that doesn't fit."""
    match node:
        case Number():
            return "number"
        case Text():
            return "text"
        case Name(name):
            return _column(name, known).kind
        case Negative(of) | Round(of, _) | Function(_, of):
            _expect(of, "number", known)
            return "number"
        case Arithmetic(sign, left, right):
            _expect(left, "number", known, f"beside '{sign}'")
            _expect(right, "number", known, f"beside '{sign}'")
            return "number"
        case MeanOf(of, _):
            for part in of:
                _expect(part, "number", known, "in mean_of")
            return "number"
        case Comparison(sign, left, right):
            _compare(sign, left, right, known)
            return "truth"
        case Among(of, listed):
            for value in listed:
                _compare("==", of, value, known)
            return "truth"
        case Not(of):
            _expect(of, "truth", known, "after 'not'")
            return "truth"
        case Joined(word, left, right):
            _expect(left, "truth", known, f"beside '{word}'")
            _expect(right, "truth", known, f"beside '{word}'")
            return "truth"
        case IsMissing(of):
            kind_of(of, known)
            return "truth"
        case Pick(condition, yes, no):
            return _pick(condition, yes, no, known)


def _column(name: str, known: Mapping[str, Known]) -> Known:
    if name in known:
        return known[name]
    near = difflib.get_close_matches(name, known, n=1)
    hint = f"The nearest is '{near[0]}'." if near else f"There are: {', '.join(known)}."
    raise ExpressionFault(f"there is no column '{name}' to use here. {hint}")


def _expect(node: Node, kind: ValueKind, known: Mapping[str, Known], where: str = "") -> None:
    found = kind_of(node, known)
    if found != kind:
        place = f" {where}" if where else ""
        raise ExpressionFault(f"{_named(node)} is {_WORDS[found]}{place}, where {_WORDS[kind]} is needed")


def _named(node: Node) -> str:
    match node:
        case Name(name):
            return f"column '{name}'"
        case Number(value):
            return f"{value:g}"
        case Text(value):
            return f"'{value}'"
        case Function(name, _):
            return f"{name}(…)"
        case _:
            return "a part of it"


def _compare(sign: str, left: Node, right: Node, known: Mapping[str, Known]) -> None:
    kinds = kind_of(left, known), kind_of(right, known)
    if "truth" in kinds:
        raise ExpressionFault(f"conditions are joined by 'and' and 'or'; '{sign}' compares values")
    for column, literal in ((left, right), (right, left)):
        if isinstance(literal, Text):
            _literal(sign, column, literal, known)
            if kind_of(column, known) == "date":
                return
    if kinds[0] != kinds[1]:
        raise ExpressionFault(
            f"{_named(left)} is {_WORDS[kinds[0]]} and {_named(right)} is {_WORDS[kinds[1]]}: they can't be compared."
            + (" Text stands in quotes, numbers don't." if set(kinds) == {"text", "number"} else "")
        )
    if kinds[0] == "text" and sign not in ("==", "!="):
        raise ExpressionFault(f"text has no order that all agree on: '{sign}' compares numbers and dates")


def _literal(sign: str, node: Node, literal: Text, known: Mapping[str, Known]) -> None:
    kind = kind_of(node, known)
    if kind == "date":
        is_date(literal.value)
    levels = known[node.name].levels if isinstance(node, Name) else None
    if levels is not None and literal.value not in levels:
        near = difflib.get_close_matches(literal.value, levels, n=1)
        hint = f"The nearest is '{near[0]}'." if near else f"The levels are: {', '.join(levels)}."
        raise ExpressionFault(f"{_named(node)} has no level '{literal.value}'. {hint}")


def is_date(text: str) -> None:
    """Raise the fault unless the text is a date of the calendar, written as 2031-03-02."""
    try:
        written = datetime.date.fromisoformat(text).isoformat() == text
    except ValueError:
        written = False
    if not written:
        raise ExpressionFault(f"'{text}' stands beside a date and is none. Write a date as 2031-03-02.")


def _pick(condition: Node, yes: Node, no: Node, known: Mapping[str, Known]) -> ValueKind:
    _expect(condition, "truth", known, "as the condition of pick")
    kind = kind_of(yes, known)
    if kind != kind_of(no, known):
        raise ExpressionFault(
            f"pick gives {_WORDS[kind]} or {_WORDS[kind_of(no, known)]}; both values must be of one kind"
        )
    return kind
