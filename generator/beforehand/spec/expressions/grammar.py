"""From the text of an expression to its tree: a closed grammar, bounded in length, depth and size."""

import difflib
from typing import Any, NoReturn, cast

from beforehand.spec.expressions.tokens import INSTEAD, Token, tokens
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

LONGEST = 500  # characters
DEEPEST = 20  # parentheses, functions, minus signs and `not` inside one another
MOST_DECIMALS = 15  # a float holds no more

_COMPARING = ("==", "!=", "<", "<=", ">", ">=")
_NUMERIC = ("abs", "exp", "log", "log2", "log10", "sqrt")
_FUNCTIONS = (*_NUMERIC, "is_missing", "pick", "mean_of", "round", "column")
_WORDS = ("and", "or", "not", "in")


def read(text: str) -> Node:
    """Read the text of an expression, or raise the fault that says what is wrong and what to write."""
    if len(text) > LONGEST:
        raise ExpressionFault(f"it has {len(text)} characters; at most {LONGEST} are allowed")
    if not text.strip():
        raise ExpressionFault("it is empty")
    return _Reader(tokens(text)).whole()


class _Reader:
    """Reads tokens from left to right; one method for each level of the grammar, the loosest first."""

    def __init__(self, tokens: list[Token]) -> None:
        self._tokens = tokens
        self._next = 0
        self._depth = 0

    def whole(self) -> Node:
        node = self._either()
        if self._token.kind != "end":
            self._unexpected("the expression should end, or a sign should stand,")
        return node

    @property
    def _token(self) -> Token:
        return self._tokens[self._next]

    def _take(self) -> Token:
        token = self._token
        self._next += 1
        return token

    def _stands(self, *texts: str) -> bool:
        return self._token.kind in ("sign", "name") and self._token.text in texts

    def _expect(self, sign: str, before: str) -> None:
        if not self._stands(sign):
            self._unexpected(f"{sign!r} is expected {before}".rstrip())
        self._take()

    def _unexpected(self, expected: str) -> NoReturn:
        token = self._token
        hint = INSTEAD.get(token.text, "") if token.kind == "sign" else ""
        if token.kind == "end":
            raise ExpressionFault(f"{expected} where it ends")
        raise ExpressionFault(f"{expected} where {token.text!r} stands, at character {token.at + 1}. {hint}".rstrip())

    def _deeper(self) -> None:
        self._depth += 1
        if self._depth > DEEPEST:
            raise ExpressionFault(f"it is more than {DEEPEST} levels deep; split it into derived columns")

    def _either(self) -> Node:
        node = self._both()
        while self._stands("or"):
            self._take()
            node = Joined("or", node, self._both())
        return node

    def _both(self) -> Node:
        node = self._negated()
        while self._stands("and"):
            self._take()
            node = Joined("and", node, self._negated())
        return node

    def _negated(self) -> Node:
        if not self._stands("not"):
            return self._compared()
        self._take()
        self._deeper()
        node = Not(self._negated())
        self._depth -= 1
        return node

    def _compared(self) -> Node:
        left = self._sum()
        parts: list[Node] = []
        while self._stands(*_COMPARING):
            sign = self._take().text
            right = self._sum()
            parts.append(Comparison(cast(Any, sign), left, right))
            left = right
        if not parts:
            return self._listed(left)
        node = parts[0]
        for part in parts[1:]:  # 18 <= age < 65 is 18 <= age and age < 65
            node = Joined("and", node, part)
        return node

    def _listed(self, left: Node) -> Node:
        negated = self._stands("not")
        if negated:
            self._take()
            if not self._stands("in"):
                self._unexpected("'in' is expected after 'not'")
        if not self._stands("in"):
            return left
        self._take()
        self._expect("[", "after 'in', before the first of the values,")
        listed = [self._literal()]
        while self._stands(","):
            self._take()
            listed.append(self._literal())
        self._expect("]", "after the last of the values")
        return Not(Among(left, tuple(listed))) if negated else Among(left, tuple(listed))

    def _literal(self) -> Number | Text:
        minus = self._stands("-")
        if minus:
            self._take()
        token = self._token
        if token.kind == "number":
            self._take()
            return Number(-_number(token.text) if minus else _number(token.text))
        if token.kind == "text" and not minus:
            self._take()
            return Text(token.text[1:-1])
        self._unexpected("a number, or a text in quotes, is expected")

    def _sum(self) -> Node:
        node = self._product()
        while self._stands("+", "-"):
            sign = self._take().text
            node = Arithmetic(cast(Any, sign), node, self._product())
        return node

    def _product(self) -> Node:
        node = self._signed()
        while self._stands("*", "/"):
            sign = self._take().text
            node = Arithmetic(cast(Any, sign), node, self._signed())
        return node

    def _signed(self) -> Node:
        if not self._stands("-"):
            return self._value()
        self._take()
        self._deeper()
        node = Negative(self._signed())
        self._depth -= 1
        return node

    def _value(self) -> Node:
        token = self._token
        if token.kind in ("number", "text"):
            return self._literal()
        if token.kind == "name" and token.text not in _WORDS:
            self._take()
            return self._call(token.text) if self._stands("(") else Name(token.text)
        if not self._stands("("):
            self._unexpected("a value (a column, a number, a text in quotes) is expected")
        self._take()
        self._deeper()
        node = self._either()
        self._expect(")", "to close the parenthesis")
        self._depth -= 1
        return node

    def _call(self, name: str) -> Node:
        if name not in _FUNCTIONS:
            near = difflib.get_close_matches(name, _FUNCTIONS, n=1)
            hint = f"The nearest is '{near[0]}'." if near else f"There are: {', '.join(_FUNCTIONS)}."
            raise ExpressionFault(f"there is no function '{name}'. {hint}")
        self._take()
        self._deeper()
        if name == "column":
            node: Node = self._column()
        elif name == "mean_of":
            node = self._mean_of()
        else:
            node = self._plain_call(name)
        self._expect(")", f"to close {name}(")
        self._depth -= 1
        return node

    def _column(self) -> Name:
        if self._token.kind != "text":
            self._unexpected("the name of a column in quotes is expected")
        return Name(self._take().text[1:-1])

    def _mean_of(self) -> MeanOf:
        of = [self._sum()]
        at_least: int | None = None
        while self._stands(",") and at_least is None:
            self._take()
            if self._stands("at_least") and self._tokens[self._next + 1].text == "=":
                self._next += 2
                at_least = self._count("at_least of mean_of", len(of))
            else:
                of.append(self._sum())
        return MeanOf(tuple(of), len(of) if at_least is None else at_least)

    def _count(self, what: str, most: int) -> int:
        token = self._token
        if token.kind != "number" or not token.text.isdigit() or not 1 <= int(token.text[:9]) <= most:
            self._unexpected(f"{what} must be a whole number between 1 and {most}; it is wrong")
        return int(self._take().text)

    def _plain_call(self, name: str) -> Node:
        takes = {"pick": 3, "round": 2}.get(name, 1)
        of = [self._either()]
        while self._stands(","):
            self._take()
            of.append(self._either())
        if len(of) != takes:
            written = {"pick": "pick(condition, a, b)", "round": "round(x, decimals)"}.get(name, f"{name}(x)")
            raise ExpressionFault(f"{name} takes {takes}, and {len(of)} are given. Write {written}.")
        if name == "pick":
            return Pick(*of)
        if name == "round":
            return Round(of[0], _decimals(of[1]))
        return IsMissing(of[0]) if name == "is_missing" else Function(cast(Any, name), of[0])


def _decimals(node: Node) -> int:
    if isinstance(node, Number) and node.value.is_integer() and 0 <= node.value <= MOST_DECIMALS:
        return int(node.value)
    raise ExpressionFault(f"the decimals of round must be a whole number between 0 and {MOST_DECIMALS}")


def _number(text: str) -> float:
    value = float(text)
    if value == float("inf"):
        raise ExpressionFault(f"{text} is too large for a number")
    return value
