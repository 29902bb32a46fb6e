"""How a fault that the models find reads: where, what was found, what was expected, what to do."""

import difflib
import re
from collections import defaultdict
from typing import Any, cast

from pydantic_core import ErrorDetails

from beforehand.errors import Fault
from beforehand.spec.model import Document
from beforehand.spec.model.walk import fields_of, models_at
from beforehand.spec.naming import found, owner, subject, value_at
from beforehand.spec.places import Path, Places, Reading

_COUNTS = {0: "none", 1: "one", 2: "two", 3: "three"}
_OURS = ("refused", "told", "sentence")


def faults_of(errors: list[ErrorDetails], reading: Reading) -> list[tuple[Path, Fault]]:
    """Word what the models found, one fault for a place, without the places that are faulty already."""
    at: dict[Path, list[ErrorDetails]] = defaultdict(list)
    for error in errors:
        path = place(error["loc"], reading.places)
        # A trapped word keeps its own fault; what is missing or unknown there is only its consequence.
        trapped = any(path[:length] in reading.trapped for length in range(len(path) + 1))
        if not trapped and not _is_echo(error, value_at(path, reading.value)):
            at[path].append(error)
    return [
        (_wrong(path, error), _fault(path, error, reading))
        for path, found_there in at.items()
        for error in _worth_saying(path, found_there, list(at))
    ]


def _wrong(path: Path, error: ErrorDetails) -> Path:
    """Give the path of what is wrong: of a missing key, the path where it would stand."""
    return (*path, error["loc"][-1]) if error["type"] == "missing" else path


def _is_echo(error: ErrorDetails, value: Any) -> bool:
    """Whether a list is called too short only because its entries are faulty, which is said already."""
    return error["type"] == "too_short" and len(value) >= error["ctx"]["min_length"]


def place(loc: tuple[int | str, ...], places: Places) -> Path:
    """Give the path in the file of what a model calls ``loc``: names of alternatives are passed over."""
    path: Path = ()
    for part in loc:
        if (*path, part) in places.values or (*path, part) in places.keys:
            path = (*path, part)
    return path


def _worth_saying(path: Path, errors: list[ErrorDetails], paths: list[Path]) -> list[ErrorDetails]:
    """Drop what only says that another alternative of a key was not meant."""
    missing = [error for error in errors if error["type"] in ("missing", "extra_forbidden")]
    others = [error for error in errors if error not in missing]
    if not others:
        return missing
    inner = any(len(other) > len(path) and other[: len(path)] == path for other in paths)
    if missing or inner:
        # The block itself has the right shape for one alternative, and what is wrong lies in it.
        return [*missing, *[error for error in others if error["type"] in _OURS]]
    spoken = [error for error in others if error["type"] in _OURS]
    return spoken[:1] or [_joined(others)]


def _joined(errors: list[ErrorDetails]) -> ErrorDetails:
    """Make one fault of several alternatives of a key that all failed."""
    if len(errors) == 1:
        return errors[0]
    expected = " or ".join(dict.fromkeys(_expected(error) for error in errors))
    joined = dict(errors[0])
    joined.update(type="refused", ctx={"text": f"must be {expected}"})
    return cast(ErrorDetails, joined)


def _fault(path: Path, error: ErrorDetails, reading: Reading) -> Fault:
    kind, root = error["type"], reading.value
    if kind == "missing":
        return reading.places.fault(path, _missing(path, error, root))
    if kind == "extra_forbidden":
        return reading.places.fault(path, _unknown(path, root), at_key=True)
    if kind == "sentence":
        return reading.places.fault(path, _context(error, "text"))
    value = value_at(path, root)
    named = subject(path, root)
    if error["loc"] and error["loc"][-1] == "[key]":
        return reading.places.fault(path, f"the key '{path[-1]}': {_context(error, 'text')}", at_key=True)
    wanted = _context(error, "text") if kind in _OURS else f"must be {_expected(error)}"
    if kind == "told" or (isinstance(value, (dict, tuple)) and kind == "refused"):
        return reading.places.fault(path, f"{named} {wanted}", at_key=kind == "refused")
    shown = _COUNTS.get(len(value), f"{len(value)}") if kind in ("too_short", "too_long") else found(value)
    return reading.places.fault(path, f"{named} {wanted}; found {shown}.{_hint(error, value)}")


def _context(error: ErrorDetails, key: str) -> str:
    return str(error.get("ctx", {}).get(key, ""))


def _missing(path: Path, error: ErrorDetails, root: Any) -> str:
    key = error["loc"][-1]
    if isinstance(key, int):
        pair = path[:-1] if path[-1:] == (key,) else path
        return f"{subject(pair, root)} must hold {_COUNTS.get(key + 1, key + 1)} values"
    doc = next(
        (field.description for model in models_at(Document, path) for k, field in fields_of(model).items() if k == key),
        None,
    )
    meaning = f": {doc[0].lower()}{doc[1:].rstrip('.')}" if doc else ""
    return f"{subject(path, root)} needs the key '{key}'{meaning}"


def _unknown(path: Path, root: Any) -> str:
    keys = [key for model in models_at(Document, path[:-1]) for key in fields_of(model)]
    written = str(path[-1])
    near = difflib.get_close_matches(written, keys, n=1)
    hint = f"The nearest key is '{near[0]}'." if near else f"The keys here are: {', '.join(dict.fromkeys(keys))}."
    inside = path[:-1]
    name = subject(inside, root) if inside else owner(inside, root)
    return f"{name} has no key '{written}'. {hint}"


def _literals(error: ErrorDetails) -> list[str]:
    return re.findall(r"'([^']*)'", _context(error, "expected"))


def _expected(error: ErrorDetails) -> str:
    """Say what a key takes, so that it can stand after 'must be'."""
    kind = error["type"]
    if kind == "literal_error":
        words = _literals(error) or [_context(error, "expected")]
        return words[0] if len(words) == 1 else f"one of {', '.join(words)}"
    if kind in ("tuple_type", "dict_type", "model_type", "model_attributes_type"):
        return _shape(error)
    if kind in ("too_short", "too_long"):
        bound = error["ctx"]["min_length" if kind == "too_short" else "max_length"]
        return f"a list of at {'least' if kind == 'too_short' else 'most'} {_COUNTS.get(bound, bound)}"
    for (name, key), bound_words in _BOUNDS.items():
        if kind == name:
            return f"{bound_words} {error['ctx'][key]:g}"
    return _PLAIN.get(kind) or error["msg"].removeprefix("Input should be ")


_PLAIN = {
    "string_type": "text",
    "float_type": "a number",
    "int_type": "a whole number",
    "int_from_float": "a whole number",
    "bool_type": "true or false",
    "finite_number": "a number",
    "string_too_long": "shorter text",
}
_BOUNDS = {
    ("greater_than", "gt"): "a number above",
    ("greater_than_equal", "ge"): "a number of at least",
    ("less_than", "lt"): "a number below",
    ("less_than_equal", "le"): "a number of at most",
}


def _shape(error: ErrorDetails) -> str:
    if error["type"] == "tuple_type":
        return "a list"
    name = error["loc"][-1]
    models = [model for model in models_at(Document, error["loc"]) if model.__name__ == name] or list(
        models_at(Document, error["loc"])
    )
    keys = ", ".join(fields_of(models[0])) if models and error["type"] != "dict_type" else ""
    return f"a block of keys ({keys})" if keys else "a block of keys"


def _hint(error: ErrorDetails, value: Any) -> str:
    """Say what to write instead, where that is plain from what was found."""
    if isinstance(value, str) and re.fullmatch(r"\d+(\.\d+)? ?%", value):
        return f" Write {float(value.rstrip(' %')) / 100:g}."
    numeric = error["type"] in ("float_type", "int_type") or "number" in _context(error, "text")
    if numeric and isinstance(value, str) and _is_number(value):
        return " Take the quotes away."
    if error["type"] == "string_type" and isinstance(value, (int, float)):
        return f' Put quotes around it: "{found(value)}".'
    if error["type"] == "string_type" and isinstance(value, tuple) and len(value) == 1:
        return f" Write {value[0]}."
    if error["type"] == "tuple_type" and isinstance(value, (str, int, float)):
        return f" Write [{value}]."
    words = _literals(error) if error["type"] == "literal_error" else []
    near = difflib.get_close_matches(value, words, n=1) if isinstance(value, str) else []
    return f" The nearest word is '{near[0]}'." if near else ""


def _is_number(text: str) -> bool:
    return bool(re.fullmatch(r"-?\d+(\.\d+)?", text))
