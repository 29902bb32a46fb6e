"""The options of tests and procedures: the signature of an entry is their schema."""

import difflib
import inspect
import typing
from collections.abc import Iterator
from typing import Any

from pydantic import ConfigDict, TypeAdapter, ValidationError

from beforehand.hypothesis_tests.contract import StatisticalTest
from beforehand.multiplicity.contract import Procedure
from beforehand.spec.model import Setting
from beforehand.spec.naming import found

Entry = StatisticalTest[Any] | Procedure


def with_defaults(written: dict[str, Setting], entry: Entry) -> dict[str, Setting]:
    """Give every option its value: the one written, else the default."""
    defaults = {name: option.default for name, option in entry.options.items()}
    known = {name: value for name, value in defaults.items() if isinstance(value, (bool, int, float, str))}
    return {**known, **written}


def faults_of(written: dict[str, Setting], entry: Entry, kind: str) -> Iterator[tuple[str | None, str]]:
    """Find the options that don't fit: the option (None for a missing one) and the sentence."""
    options = entry.options
    for name, value in written.items():
        if name not in options:
            yield name, f"the {kind} '{entry.name}' has no option '{name}'. {_instead(name, options)}"
        elif expected := _unfit(value, _types(entry).get(name, Any)):
            yield name, f"the option '{name}' of '{entry.name}' must be {expected}; found {found(value)}."
    for name, option in options.items():
        if option.default is inspect.Parameter.empty and name not in written:
            yield None, f"the {kind} '{entry.name}' needs the option '{name}'."


def _types(entry: Entry) -> dict[str, Any]:
    compute = entry.compute if isinstance(entry, StatisticalTest) else entry.adjust
    return typing.get_type_hints(compute)


def _instead(name: str, options: dict[str, inspect.Parameter]) -> str:
    if not options:
        return "It has none."
    near = difflib.get_close_matches(name, options, n=1)
    return f"The nearest is '{near[0]}'." if near else f"It has: {', '.join(options)}."


def _unfit(value: Setting, annotation: Any) -> str | None:
    """Say what an option must be, where its value isn't."""
    try:
        TypeAdapter(annotation, config=ConfigDict(strict=True, allow_inf_nan=False)).validate_python(value)
    except ValidationError as error:
        words = typing.get_args(annotation) if typing.get_origin(annotation) is typing.Literal else ()
        if words:
            return f"one of {', '.join(str(word) for word in words)}"
        return error.errors()[0]["msg"].removeprefix("Input should be ").removeprefix("a valid ")
    return None
