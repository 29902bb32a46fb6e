"""What a single word of YAML means in a spec, and how a fault of YAML itself reads."""

import re
import unicodedata
from dataclasses import dataclass
from decimal import Decimal

DEEPEST = 32  # levels: the language itself needs 12
LARGEST_WHOLE = 2**53 - 1  # above, JSON readers no longer agree on whole numbers

_WHOLE = re.compile(r"[-+]?(?:0|[1-9]\d*)", re.ASCII)
_NUMBER = re.compile(r"[-+]?(?:(?:0|[1-9]\d*)(?:\.\d*)?|\.\d+)(?:[eE][-+]?\d+)?", re.ASCII)
_NO_VALUE = ("", "~", "null", "Null", "NULL")
_TRUTH_WORDS = re.compile(r"yes|Yes|YES|no|No|NO|on|On|ON|off|Off|OFF|True|TRUE|False|FALSE")
_ODD_NUMBERS = re.compile(
    r"[-+]?(?:0[xXoObB][0-9a-fA-F_]+|0\d[\d_]*(?:\.[\d_]*)?(?:[eE][-+]?\d+)?"
    r"|\d[\d_]*(?::[0-5]?\d)+(?:\.[\d_]*)?"
    r"|(?:\d+_[\d_]*|_\d[\d_]*)(?:\.[\d_]*)?(?:[eE][-+]?\d+)?|\d+\.\d*_[\d_]*|\.(?:inf|Inf|INF))"
    r"|\.(?:nan|NaN|NAN)",
    re.ASCII,
)


@dataclass(frozen=True)
class Scalar:
    """What a word means; where there is a fault, ``value`` is the word as text."""

    value: str | bool | int | float | None
    fault: str | None = None


def is_visible(character: str) -> bool:
    """Whether a character leaves a mark or a space on paper (no control, direction or zero-width character)."""
    return unicodedata.category(character) not in ("Cc", "Cf", "Cs", "Co", "Zl", "Zp")


def resolve(word: str) -> Scalar:  # noqa: PLR0911 -- one case for each kind of word
    """Read a word that stands without quotes."""
    if word in _NO_VALUE:
        return Scalar(None, f"'{word}' is no value. Leave the key out, or put quotes around a text that is meant.")
    if word in ("true", "false"):
        return Scalar(word == "true")
    if _TRUTH_WORDS.fullmatch(word):
        hint = f", or write {word.lower()} for a truth" if word.lower() in ("true", "false") else ""
        return Scalar(word, f'versions of YAML read {word} differently. Put quotes around it: "{word}"{hint}.')
    if _ODD_NUMBERS.fullmatch(word):
        return Scalar(
            word,
            f"versions of YAML read {word} differently. "
            "Put quotes around a text; write a number with plain digits and a point.",
        )
    if _WHOLE.fullmatch(word):
        return _whole(word)
    if _NUMBER.fullmatch(word):
        return _number(word)
    return text(word)


def _whole(word: str) -> Scalar:
    if len(word) > 17 or abs(int(word)) > LARGEST_WHOLE:
        return Scalar(word, f"{word} is too large for a number (at most {LARGEST_WHOLE}). Text stands in quotes.")
    return Scalar(int(word))


def _number(word: str) -> Scalar:
    number = float(word)
    if number in (float("inf"), float("-inf")):
        return Scalar(word, f"{word} is too large for a number")
    if Decimal(repr(number)) != Decimal(word):
        return Scalar(word, f"{word} has more digits than a number keeps; the nearest is {number!r}. Write that.")
    return Scalar(number)


def text(words: str) -> Scalar:
    """Read text, quoted or not: it must look the same to everybody who reads it."""
    for character in words:
        if character != "\n" and not is_visible(character):
            name = unicodedata.name(character, "a control character")
            return Scalar("?", f"the text holds U+{ord(character):04X} ({name}), which is invisible. Take it out.")
    if unicodedata.normalize("NFC", words) != words:
        return Scalar(
            words,
            f"'{words}' holds letters made of several signs, which look like others. Save it in Unicode form NFC.",
        )
    return Scalar(words)


def key(word: str, *, plain: bool) -> str | None:
    """Say what is wrong with a key; None where nothing is."""
    if plain and word == "<<":
        return "merges ('<<') are not part of the spec language. Write the keys themselves."
    scalar = resolve(word) if plain else text(word)
    if scalar.fault:
        return scalar.fault
    if not isinstance(scalar.value, str):
        return f"{word} stands as a key. A key is text: put quotes around it."
    return None


def syntax(  # noqa: PLR0911 -- one sentence for each kind of fault
    context: str, problem: str, source: str, line: int, column: int
) -> str:
    """Say in words of the trade what the YAML parser could not read, and what to do."""
    lines = source.splitlines()
    written = lines[line - 1] if 0 < line <= len(lines) else ""
    character = written[column - 1] if 0 < column <= len(written) else ""
    if character == "\t" or "\t" in written[: len(written) - len(written.lstrip())]:
        return "a tab stands here. YAML wants spaces at the beginning of a line."
    if "nesting depth" in problem:
        return f"this is more than {DEEPEST} levels deep"
    if "flow mapping" in context:
        return (
            "a list of keys in { } is broken here: a comma or } is missing, or a quote is not closed. "
            "An expression with brackets or commas inside { } stands in quotes, or on a line of its own."
        )
    if "flow sequence" in context or "flow node" in context:
        return "a list in [ ] is broken here: a value, a comma or ] is missing, or a quote is not closed"
    if "cannot start any token" in problem:
        return f"text that begins with {character} stands in quotes"
    if "mapping values are not allowed" in problem:
        return "a second colon stands in this line, or it is indented too far. Text with a colon stands in quotes."
    if "end of stream" in problem:
        return "a quote is opened and never closed"
    if "escape" in problem or "hexdecimal" in problem:
        return "this escape has no meaning. Write the letter itself, or use single quotes."
    if "comment or line break" in problem or "sequence entries" in problem:
        return "text with > or - or quotes in it stands in quotes as a whole"
    if "expected key" in problem or "block collection" in context or "expected ':'" in problem:
        return (
            "this line doesn't fit the lines around it: an indentation, a colon or a dash is wrong, "
            "or something follows a text in quotes. An expression with quotes in it stands in quotes as a whole."
        )
    return f"this is not YAML: {problem}"
