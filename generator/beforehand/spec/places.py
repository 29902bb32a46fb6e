"""From the bytes of a YAML file to plain values, each with its place; every trap of YAML is a fault here."""

import itertools
import unicodedata
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

import yaml

from beforehand.errors import Fault
from beforehand.spec import scalars

Path = tuple[str | int, ...]

LARGEST_FILE = 8_000_000  # bytes
MOST_VALUES = 400_000

_BLANK = "\n\r\t"
_AGAIN = "\0"  # begins a key that stands a second time: what is under it is read for its faults, then dropped


@dataclass(frozen=True)
class Places:
    """Where each key and each value stands: lines and columns count from 1."""

    values: dict[Path, tuple[int, int]]
    keys: dict[Path, tuple[int, int]]

    def fault(self, path: Path, text: str, *, at_key: bool = False) -> Fault:
        """Make a fault at a value (or its key), or at the nearest thing around it that has a place."""
        known = path
        while known not in self.values and known:
            known = known[:-1]
        chosen = self.keys if at_key and known in self.keys else self.values
        line, column = chosen.get(known, (1, 1))
        return Fault(line, column, text)


@dataclass(frozen=True)
class Finding:
    """Something that is wrong at a path, before its place in the file is looked up."""

    path: Path
    text: str
    at_key: bool = False


@dataclass(frozen=True)
class Reading:
    """A file as plain values (lists are tuples); ``trapped`` are the paths that a fault is already known of."""

    value: Any
    places: Places
    faults: tuple[Fault, ...]
    trapped: frozenset[Path]


class NotYaml(Exception):
    """The file can't be read to its end; ``faults`` are those found up to there."""

    def __init__(self, faults: list[Fault]) -> None:
        super().__init__(faults)
        self.faults = faults


def read(source: bytes) -> Reading:
    """Read the bytes of a spec; NotYaml where they can't be read to the end."""
    text = _text(source)
    builder = _Builder()
    try:
        for event in yaml.parse(text, Loader=yaml.CSafeLoader):
            builder.take(event)
    except yaml.MarkedYAMLError as error:
        mark = error.problem_mark or error.context_mark
        line, column = (mark.line + 1, mark.column + 1) if mark else (0, 0)
        problem = scalars.syntax(str(error.context or ""), str(error.problem), text, line, column)
        raise NotYaml([*builder.faults, Fault(line, column, problem)]) from None
    except yaml.YAMLError as error:
        raise NotYaml([*builder.faults, Fault(0, 0, f"this is not YAML: {error}")]) from None
    return builder.reading()


def _text(source: bytes) -> str:
    if len(source) > LARGEST_FILE:
        raise NotYaml([Fault(0, 0, f"the file has {len(source)} bytes; a spec has at most {LARGEST_FILE}")])
    try:
        text = source.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = source.count(b"\n", 0, error.start) + 1
        raise NotYaml([Fault(line, 0, "this is not UTF-8 text. Save the file as UTF-8.")]) from None
    faults = list(_invisible(text))
    if faults:
        raise NotYaml(faults)
    return text


def _invisible(text: str) -> Iterator[Fault]:
    for character in sorted(set(text)):
        if scalars.is_visible(character) or character in _BLANK:
            continue
        at = text.index(character)
        line = text.count("\n", 0, at) + 1
        name = unicodedata.name(character, "a control character")
        yield Fault(
            line, at - text.rfind("\n", 0, at), f"U+{ord(character):04X} ({name}) is invisible in print. Take it out."
        )


@dataclass
class _Open:
    """A mapping or list that is being read."""

    path: Path
    value: dict[str, Any] | list[Any]
    braces: bool
    key: str | None = None
    empty: list[str] = field(default_factory=list)


class _Builder:
    """Takes the events of the YAML parser one by one; needs no recursion, so depth is only a number."""

    def __init__(self) -> None:
        self.faults: list[Fault] = []
        self._values: dict[Path, tuple[int, int]] = {}
        self._keys: dict[Path, tuple[int, int]] = {}
        self._trapped: set[Path] = set()
        self._open: list[_Open] = []
        self._documents = 0
        self._root: Any = None

    def reading(self) -> Reading:
        return Reading(self._root, Places(self._values, self._keys), tuple(self.faults), frozenset(self._trapped))

    def take(self, event: Any) -> None:
        mark = (event.start_mark.line + 1, event.start_mark.column + 1)
        if isinstance(event, yaml.DocumentStartEvent):
            self._document(event, mark)
        elif isinstance(event, yaml.AliasEvent):
            self._alias(event, mark)
        elif isinstance(event, (yaml.ScalarEvent, yaml.MappingStartEvent, yaml.SequenceStartEvent)):
            self._refuse_marks(event, mark)
            if isinstance(event, yaml.ScalarEvent):
                self._scalar(event, mark, tagged=event.tag is not None)
            else:
                self._begin(event, mark)
        elif isinstance(event, (yaml.MappingEndEvent, yaml.SequenceEndEvent)):
            self._end()

    def _fault(self, mark: tuple[int, int], text: str) -> None:
        self.faults.append(Fault(*mark, text))

    def _stop(self, mark: tuple[int, int], text: str) -> None:
        self._fault(mark, text)
        raise NotYaml(self.faults)

    def _document(self, event: Any, mark: tuple[int, int]) -> None:
        self._documents += 1
        if self._documents > 1:
            self._stop(mark, "a second document begins here. A spec is one document: take the line '---' out.")
        if event.version or event.tags:
            self._fault(mark, "lines that begin with '%' are not part of the spec language. Take them out.")

    def _refuse_marks(self, event: Any, mark: tuple[int, int]) -> None:
        if event.anchor:
            self._fault(mark, f"anchors are not part of the spec language. Take '&{event.anchor}' out.")
        if event.tag:
            self._fault(mark, "tags are not part of the spec language. Text stands in quotes, a number doesn't.")

    def _alias(self, event: Any, mark: tuple[int, int]) -> None:
        text = f"references are not part of the spec language. Write again what '*{event.anchor}' stands for."
        if self._wants_key():
            self._stop(mark, text)
        self._fault(mark, text)
        self._place(None, mark, trapped=True)

    def _wants_key(self) -> bool:
        return bool(self._open) and isinstance(self._open[-1].value, dict) and self._open[-1].key is None

    def _next_path(self) -> Path:
        if not self._open:
            return ()
        top = self._open[-1]
        return (*top.path, len(top.value) if isinstance(top.value, list) else str(top.key))

    def _place(self, value: Any, mark: tuple[int, int], *, trapped: bool = False) -> Path:
        """Put a value where it belongs; what is under a repeated key is dropped."""
        path = self._next_path()
        self._values[path] = mark
        if len(self._values) > MOST_VALUES:
            self._stop(mark, f"this spec has more than {MOST_VALUES} values")
        if trapped:
            self._trapped.add(path)
        if not self._open:
            self._root = value
        elif isinstance(parent := self._open[-1].value, list):
            parent.append(value)
        elif not str(self._open[-1].key).startswith(_AGAIN):
            parent[str(self._open[-1].key)] = value
        if self._open:
            self._open[-1].key = None
        return path

    def _begin(self, event: Any, mark: tuple[int, int]) -> None:
        if self._wants_key():
            self._stop(mark, "a key is a word or text in quotes, never a list or a block of keys")
        if len(self._open) >= scalars.DEEPEST:
            self._stop(mark, f"this is more than {scalars.DEEPEST} levels deep")
        value: dict[str, Any] | list[Any] = {} if isinstance(event, yaml.MappingStartEvent) else []
        path = self._place(value, mark)
        self._open.append(_Open(path, value, bool(event.flow_style)))

    def _end(self) -> None:
        closed = self._open.pop()
        if closed.empty:
            self._explain_empty(closed)
        if isinstance(closed.value, list):
            self._freeze(closed)

    def _freeze(self, closed: _Open) -> None:
        """Turn a list that is complete into a tuple, in the place where it stands."""
        items = tuple(closed.value)
        if not self._open:
            self._root = items
            return
        parent, last = self._open[-1].value, closed.path[-1]
        if isinstance(parent, list):
            parent[int(last)] = items
        elif not str(last).startswith(_AGAIN):
            parent[str(last)] = items

    def _scalar(self, event: Any, mark: tuple[int, int], *, tagged: bool) -> None:
        plain = not event.style
        if self._wants_key():
            self._key(event.value, mark, plain=plain)
            return
        if plain and event.value == "" and self._open and isinstance(self._open[-1].value, dict):
            self._open[-1].empty.append(str(self._open[-1].key))
            self._place(None, mark, trapped=True)
            return
        scalar = scalars.resolve(event.value) if plain else scalars.text(event.value)
        if scalar.fault:
            self._fault(mark, scalar.fault)
        self._place(scalar.value, mark, trapped=tagged or bool(scalar.fault))

    def _key(self, text: str, mark: tuple[int, int], *, plain: bool) -> None:
        top = self._open[-1]
        fault = scalars.key(text, plain=plain)
        if fault:
            self._fault(mark, fault)
        path = (*top.path, text)
        if path in self._keys:
            line = self._keys[path][0]
            self._fault(mark, f"the key '{text}' stands here a second time (first in line {line}). Keep one of them.")
            text = f"{_AGAIN}{len(self.faults)}"
            path = (*top.path, text)
        self._keys[path] = mark
        if fault:
            self._trapped.add(path)
        top.key = text

    def _explain_empty(self, closed: _Open) -> None:
        """Say once what is wrong when keys of a mapping have no value."""
        keys = list(closed.value) if isinstance(closed.value, dict) else []
        broken = _cut_expression(closed.value, keys, closed.empty) if closed.braces else None
        if broken:
            self._fault(
                self._values[(*closed.path, broken)],
                "a comma ends this expression, because it stands inside { }. "
                "Put the whole expression in quotes, or on a line of its own.",
            )
            self._trapped.add((*closed.path, broken))
            return
        for key in closed.empty:
            if not key.startswith(_AGAIN):  # a key that stands twice has its fault already
                hint = _for_empty(key, braces=closed.braces)
                self._fault(self._keys[(*closed.path, key)], f"the key '{key}' has no value. {hint}")


def _for_empty(name: str, *, braces: bool) -> str:
    if braces and ":" in name:
        return "Write a space after the colon."
    return "A text with a comma inside { } stands in quotes." if braces else "Write one, or leave the key out."


def _cut_expression(value: Any, keys: list[str], empty: list[str]) -> str | None:
    """Find the key whose expression was cut at its first comma, ``{where: pick(a, b, c)}``; drop what was cut off."""
    for before, key in itertools.pairwise(keys):
        written = value[before]
        if key in empty and isinstance(written, str) and written.count("(") > written.count(")"):
            for cut in keys[keys.index(key) :]:
                if cut in empty:
                    del value[cut]
            return before
    return None
