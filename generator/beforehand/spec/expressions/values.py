"""The value of an expression in every row; a condition that depends on a missing value is missing itself."""

from collections.abc import Callable, Mapping
from decimal import ROUND_HALF_EVEN, Decimal
from typing import Any

import numpy as np
from numpy.typing import NDArray

from beforehand.spec.expressions.tree import (
    Among,
    Arithmetic,
    Column,
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

Rows = NDArray[np.bool_]

_ARITHMETIC: dict[str, Callable[[Any, Any], Any]] = {
    "+": np.add, "-": np.subtract, "*": np.multiply, "/": np.divide,
}  # fmt: skip
_COMPARING: dict[str, Callable[[Any, Any], Any]] = {
    "==": np.equal, "!=": np.not_equal, "<": np.less, "<=": np.less_equal, ">": np.greater, ">=": np.greater_equal,
}  # fmt: skip
_FUNCTIONS: dict[str, Callable[[Any], Any]] = {
    "abs": np.abs, "exp": np.exp, "log": np.log, "log2": np.log2, "log10": np.log10, "sqrt": np.sqrt,
}  # fmt: skip


def value_of(node: Node, columns: Mapping[str, Column]) -> Column:
    """Evaluate a tree that fits its columns on all their rows."""
    rows = next(iter(columns.values())).missing.size
    with np.errstate(all="ignore"):  # every value without a meaning is looked for below, with its row
        return _value(node, columns, np.ones(rows, dtype=bool))


def _value(node: Node, columns: Mapping[str, Column], asked: Rows) -> Column:  # noqa: PLR0911, PLR0912 -- one case for each kind of node
    """Evaluate; ``asked`` are the rows whose value is used, and only these may raise a fault."""
    match node:
        case Number(number):
            return _constant(np.full(asked.size, number), "number")
        case Text(text):
            return _constant(np.full(asked.size, text, dtype=object), "text")
        case Name(name):
            return columns[name]
        case Negative(of):
            column = _value(of, columns, asked)
            return Column(-column.values, column.missing, "number")
        case Arithmetic(sign, left, right):
            return _arithmetic(sign, _value(left, columns, asked), _value(right, columns, asked), asked)
        case Function(name, of):
            return _function(name, _value(of, columns, asked), asked)
        case Round(of, decimals):
            return _rounded(_value(of, columns, asked), decimals)
        case MeanOf(of, at_least):
            return _mean([_value(part, columns, asked) for part in of], at_least, asked)
        case Comparison(sign, left, right):
            return _comparison(sign, _value(left, columns, asked), _value(right, columns, asked))
        case Among(of, listed):
            return _among(_value(of, columns, asked), [value.value for value in listed])
        case Not(of):
            condition = _value(of, columns, asked)
            return Column(~condition.values, condition.missing, "truth")
        case Joined(word, left, right):
            return _joined(word == "and", left, right, columns, asked)
        case IsMissing(of):
            return _constant(_value(of, columns, asked).missing.copy(), "truth")
        case Pick(condition, yes, no):
            return _pick(_value(condition, columns, asked), yes, no, columns, asked)


def _constant(values: NDArray[Any], kind: ValueKind) -> Column:
    return Column(values, np.zeros(values.size, dtype=bool), kind)


def _raise_where(wrong: Rows, what: str) -> None:
    if wrong.any():
        rows = tuple(int(row) for row in np.flatnonzero(wrong))
        count = "1 row" if len(rows) == 1 else f"{len(rows)} rows"
        raise ExpressionFault(f"{what} in {count}", rows)


def _arithmetic(sign: str, left: Column, right: Column, asked: Rows) -> Column:
    missing = left.missing | right.missing
    used = asked & ~missing
    if sign == "/":
        _raise_where(used & (right.values == 0), "division by zero")
    values = _ARITHMETIC[sign](left.values, right.values)
    _raise_where(used & ~np.isfinite(values), f"the result of '{sign}' is too large for a number")
    return Column(values, missing, "number")


def _function(name: str, column: Column, asked: Rows) -> Column:
    used = asked & ~column.missing
    if name.startswith("log"):
        _raise_where(used & (column.values <= 0), f"{name} of zero or a negative number")
    if name == "sqrt":
        _raise_where(used & (column.values < 0), "sqrt of a negative number")
    values = _FUNCTIONS[name](column.values)
    _raise_where(used & ~np.isfinite(values), f"the result of {name} is too large for a number")
    return Column(values, column.missing, "number")


def _rounded(column: Column, decimals: int) -> Column:
    # The number as a reader sees it is rounded, 2.675 to 2.68; its binary form lies below and would give 2.67.
    step = Decimal(1).scaleb(-decimals)
    present = np.flatnonzero(~column.missing)
    values = np.zeros(column.values.size)
    for row in present:
        number = float(column.values[row])
        # From 2 ** 53 on, every number is whole and the step could need more digits than Decimal keeps.
        kept = abs(number) >= 2.0**53 or not np.isfinite(number)
        values[row] = number if kept else float(Decimal(repr(number)).quantize(step, ROUND_HALF_EVEN))
    return Column(values + 0.0, column.missing, "number")


def _mean(columns: list[Column], at_least: int, asked: Rows) -> Column:
    present = np.array([~column.missing for column in columns])
    values = np.array([np.where(column.missing, 0.0, column.values) for column in columns])
    count = present.sum(axis=0)
    missing = count < at_least
    mean = values.sum(axis=0) / np.maximum(count, 1)
    _raise_where(asked & ~missing & ~np.isfinite(mean), "the result of mean_of is too large for a number")
    return Column(mean, missing, "number")


def _comparison(sign: str, left: Column, right: Column) -> Column:
    missing = left.missing | right.missing
    # What stands under a missing text may be anything, and anything can't be ordered.
    a, b = (np.where(missing, "", side.values) if side.kind != "number" else side.values for side in (left, right))
    return Column(np.asarray(_COMPARING[sign](a, b), dtype=bool), missing, "truth")


def _among(column: Column, listed: list[float | str]) -> Column:
    found = np.zeros(column.missing.size, dtype=bool)
    for value in listed:
        found |= np.asarray(column.values == value, dtype=bool)
    return Column(found, column.missing, "truth")


def _joined(both: bool, left: Node, right: Node, columns: Mapping[str, Column], asked: Rows) -> Column:
    first = _value(left, columns, asked)
    # `and` is settled by one false side, `or` by one true side: the other side is then not asked.
    settled = ~first.missing & (first.values != both)
    second = _value(right, columns, asked & ~settled)
    settled |= ~second.missing & (second.values != both)
    values = np.where(settled, not both, both)
    return Column(values, ~settled & (first.missing | second.missing), "truth")


def _pick(condition: Column, yes: Node, no: Node, columns: Mapping[str, Column], asked: Rows) -> Column:
    chosen = condition.values.astype(bool) & ~condition.missing
    left_out = ~condition.values.astype(bool) & ~condition.missing
    first = _value(yes, columns, asked & chosen)
    second = _value(no, columns, asked & left_out)
    missing = condition.missing | np.where(chosen, first.missing, second.missing)
    return Column(np.where(chosen, first.values, second.values), missing, first.kind)
