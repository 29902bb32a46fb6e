"""What an expression is made of, what it is evaluated on, and the one fault it may raise."""

from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from beforehand.terms import ValueKind


class ExpressionFault(Exception):
    """An expression can't be read, doesn't fit the columns, or has no value in some rows.

    ``rows`` are the positions, counted from 0, of the rows without a value; empty for the other two causes.
    """

    def __init__(self, text: str, rows: tuple[int, ...] = ()) -> None:
        super().__init__(text)
        self.text = text
        self.rows = rows


@dataclass(frozen=True)
class Column:
    """The values of one column; what stands in ``values`` where ``missing`` is true has no meaning."""

    values: NDArray[Any]
    missing: NDArray[np.bool_]
    kind: ValueKind


@dataclass(frozen=True)
class Number:
    """A number as written."""

    value: float


@dataclass(frozen=True)
class Text:
    """A text in quotes; beside a date it is read as a date."""

    value: str


@dataclass(frozen=True)
class Name:
    """A column."""

    name: str


@dataclass(frozen=True)
class Negative:
    """A minus sign before a value."""

    of: "Node"


@dataclass(frozen=True)
class Arithmetic:
    """Two numbers and the sign between them."""

    sign: Literal["+", "-", "*", "/"]
    left: "Node"
    right: "Node"


@dataclass(frozen=True)
class Comparison:
    """Two values of one kind, compared."""

    sign: Literal["==", "!=", "<", "<=", ">", ">="]
    left: "Node"
    right: "Node"


@dataclass(frozen=True)
class Among:
    """Whether a value is one of those listed."""

    of: "Node"
    listed: tuple[Number | Text, ...]


@dataclass(frozen=True)
class Not:
    """The opposite of a condition."""

    of: "Node"


@dataclass(frozen=True)
class Joined:
    """Two conditions joined by ``and`` or ``or``."""

    word: Literal["and", "or"]
    left: "Node"
    right: "Node"


@dataclass(frozen=True)
class IsMissing:
    """Whether a value is missing; never missing itself."""

    of: "Node"


@dataclass(frozen=True)
class Pick:
    """One value where a condition is true, another where it is false."""

    condition: "Node"
    yes: "Node"
    no: "Node"


@dataclass(frozen=True)
class MeanOf:
    """The mean of the values that are not missing, if there are enough of them."""

    of: tuple["Node", ...]
    at_least: int


@dataclass(frozen=True)
class Round:
    """A number rounded to so many decimals, half to even."""

    of: "Node"
    decimals: int


@dataclass(frozen=True)
class Function:
    """One of the functions of one number."""

    name: Literal["abs", "exp", "log", "log2", "log10", "sqrt"]
    of: "Node"


Node = (
    Number | Text | Name | Negative | Arithmetic | Comparison | Among | Not | Joined
    | IsMissing | Pick | MeanOf | Round | Function
)  # fmt: skip
