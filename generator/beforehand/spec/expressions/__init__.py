"""The one expression form of the spec language: read to a tree, checked against the columns, evaluated by rows."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, fields, is_dataclass
from typing import Any

from beforehand.spec.expressions import grammar, kinds, values
from beforehand.spec.expressions.kinds import Known
from beforehand.spec.expressions.tree import Column, ExpressionFault, Name, Node
from beforehand.terms import ValueKind

__all__ = ["Column", "Expression", "ExpressionFault", "Known", "parse"]


@dataclass(frozen=True)
class Expression:
    """An expression that can be read; ``names`` are the columns it uses, in the order of their first use."""

    text: str
    tree: Node
    names: tuple[str, ...]

    def kind(self, known: Mapping[str, Known]) -> ValueKind:
        """Give the kind of its value on such columns, or raise ExpressionFault naming the one that doesn't fit."""
        return kinds.kind_of(self.tree, known)

    def evaluate(self, columns: Mapping[str, Column]) -> Column:
        """Give its value in every row; ExpressionFault counts and lists the rows that have none."""
        used = {name: columns[name] for name in self.names}
        self.kind({name: Known(column.kind) for name, column in used.items()})
        return values.value_of(self.tree, used)


def parse(text: str) -> Expression:
    """Read an expression; ExpressionFault says what is wrong and what to write."""
    tree = grammar.read(text)
    names = tuple(dict.fromkeys(_names(tree)))
    if not names:
        raise ExpressionFault("it names no column, so it says the same of every row")
    return Expression(text, tree, names)


def _names(part: Any) -> Iterator[str]:
    if isinstance(part, Name):
        yield part.name
    elif isinstance(part, tuple):
        for item in part:
            yield from _names(item)
    elif is_dataclass(part):
        for field in fields(part):
            yield from _names(getattr(part, field.name))
