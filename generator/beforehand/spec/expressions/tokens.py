"""The words and signs of an expression, and what to write instead of those that have no meaning."""

import re
from dataclasses import dataclass
from typing import NoReturn

from beforehand.spec.expressions.tree import ExpressionFault

LARGEST = 200  # words and signs

_TOKEN = re.compile(
    r"""(?P<number>(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][-+]?[0-9]+)?(?![A-Za-z0-9_.]))
      | (?P<text>'[^']*'|"[^"]*")
      | (?P<name>[A-Za-z_][A-Za-z0-9_]*(?!\w))
      | (?P<sign>==|!=|<=|>=|\*\*|&&|\|\||[-+*/<>()\[\],=])""",
    re.VERBOSE,
)
INSTEAD = {
    "=": "Write == to compare.",
    "**": "Powers are not in the grammar; write x * x, or exp and log.",
    "^": "Powers are not in the grammar; write x * x, or exp and log.",
    "&&": "Write 'and'.",
    "&": "Write 'and'.",
    "||": "Write 'or'.",
    "|": "Write 'or'.",
    "!": "Write 'not', or != to compare.",
    "%": "Remainders and per cent are not in the grammar.",
    "~": "Write 'not'.",
    "'": "A quote is opened and never closed.",
    '"': "A quote is opened and never closed.",
    "{": "Lists stand in square brackets.",
    ".": "A column whose name holds a dot is written column('its name').",
}


@dataclass(frozen=True)
class Token:
    """A word or sign, and where it begins."""

    kind: str
    text: str
    at: int


def tokens(text: str) -> list[Token]:
    """Cut the text into words and signs; the last one is the end."""
    found: list[Token] = []
    at = 0
    while at < len(text):
        if text[at] in " \n":
            at += 1
            continue
        match = _TOKEN.match(text, at)
        if match is None:
            _refuse(text, at)
        found.append(Token(str(match.lastgroup), match.group(), at))
        at = match.end()
    if len(found) > LARGEST:
        raise ExpressionFault(f"it has {len(found)} words and signs; at most {LARGEST} are allowed")
    return [*found, Token("end", "", len(text))]


def _refuse(text: str, at: int) -> NoReturn:
    character = text[at]
    if character.isdigit() or (character == "." and text[at + 1 : at + 2].isdigit()):
        word = re.match(r"[\w.]+", text[at:])
        raise ExpressionFault(
            f"'{word.group() if word else character}' is not a number; "
            "a column whose name begins with a digit is written column('its name')"
        )
    if character.isalpha():
        word = re.match(r"\w+", text[at:])
        name = word.group() if word else character
        raise ExpressionFault(f"a name with other letters than a to z is written column('{name}')")
    hint = INSTEAD.get(character, "")
    raise ExpressionFault(f"{character!r} at character {at + 1} has no meaning in an expression. {hint}".rstrip())
