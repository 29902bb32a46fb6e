"""What a place of a spec is called in a message: by its id, never by a number in a list."""

from typing import Any

from beforehand.spec.places import Path

_NOUNS = {
    "data": "data set", "columns": "column", "derive": "derived column", "exclude": "exclusion",
    "analysis_sets": "analysis set", "families": "family", "hypotheses": "hypothesis", "looks": "plan of looks",
    "supportive": "supportive analysis", "describe": "description", "assume": "assumption", "answers": "answer",
    "pass": "pass of the graph",
}  # fmt: skip
_ALONE = ("data", "families", "hypotheses", "looks", "supportive", "describe", "assume", "answers", "pass")
_ORDINALS = ("first", "second", "third", "fourth", "fifth", "sixth", "seventh", "eighth", "ninth", "tenth")


def owner(path: Path, root: Any) -> str:
    """Name the thing that a path lies in: ``family 'energy'``, ``column 'frost' of data set 'stores'``."""
    return _owner(path, root)[0]


def subject(path: Path, root: Any) -> str:
    """Name the value at a path: ``the 'level' in 'promise' of family 'energy'``."""
    name, length = _owner(path, root)
    rest = path[length:]
    if not rest:
        return name
    keys = [part for part in rest if isinstance(part, str)]
    inner = " in ".join(f"'{key}'" for key in reversed(keys))
    whole = f"the {inner} of {name}"
    return f"an entry of {whole}" if isinstance(rest[-1], int) else whole


def _owner(path: Path, root: Any) -> tuple[str, int]:
    for length in range(len(path), 1, -1):
        section = path[length - 2]
        if section in _NOUNS and _is_entry(path, length, root):
            name = _entry(path[:length], root)
            if section in _ALONE:
                return name, length
            return f"{name} of {owner(path[: length - 2], root)}", length
    if path and path[0] in ("study", "promise"):
        return f"the {path[0]}", 1
    return "the spec", 0


def _is_entry(path: Path, length: int, root: Any) -> bool:
    """Whether the path to this length leads to an entry of a list or of the named columns."""
    section, last = path[length - 2], path[length - 1]
    named = section in ("columns", "derive")
    return isinstance(last, str) == named and isinstance(_at(path[: length - 1], root), dict if named else tuple)


def _at(path: Path, root: Any) -> Any:
    for part in path:
        try:
            root = root[part]
        except (KeyError, IndexError, TypeError):
            return None
    return root


def _entry(path: Path, root: Any) -> str:
    noun, last = _NOUNS[str(path[-2])], path[-1]
    if isinstance(last, str):
        return f"{noun} '{last}'"
    entry = _at(path, root)
    written = entry.get("id") if isinstance(entry, dict) else None
    if isinstance(written, str):
        return f"{noun} '{written}'"
    number = _ORDINALS[last] if last < len(_ORDINALS) else f"{last + 1}th"
    outer = f" of {owner(path[:-2], root)}" if path[-2] == "hypotheses" else ""
    return f"the {number} {noun}{outer}"


def found(value: Any) -> str:
    """Write a value as a message shows it."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        short = value if len(value) <= 60 else f"{value[:57]}..."
        return f"'{short}'"
    if isinstance(value, dict):
        return "a block of keys"
    if isinstance(value, (tuple, list)):
        return "a list"
    return "nothing" if value is None else f"{value}"


def value_at(path: Path, root: Any) -> Any:
    """Give the plain value at a path; None where there is none."""
    return _at(path, root)
