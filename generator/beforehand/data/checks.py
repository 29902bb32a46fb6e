"""From text to typed columns: a file holds what the spec declares, or each departure is named with its lines."""

import difflib
import json
import math
import re
import unicodedata
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import replace
from datetime import date

import numpy as np
from numpy.typing import NDArray

from beforehand.data.read import FIRST_ROW, TextTable
from beforehand.data.wording import SHOWN_TEXTS, capped, line_list, listed, quoted
from beforehand.errors import DataFault, Fault
from beforehand.spec.expressions import Column
from beforehand.spec.model import ColumnSpec, DataSet

Texts = Sequence[str]
Rows = NDArray[np.bool_]
Key = tuple[str | float, ...]

NUMBER_SIGNS = frozenset("0123456789+-.eE")  # what float() reads of these signs is a decimal number and nothing else
LARGEST_WHOLE = 2**53 - 1  # beyond it neighbouring whole numbers share one float
WHOLE = re.compile(r"[+-]?[0-9]+")
DATE = re.compile(r"[0-9]{4}-[0-9]{2}-[0-9]{2}")
EXPECTED = {
    "number": "numbers",
    "count": "whole numbers from 0 on",
    "date": "dates, written as 2031-01-05",
}


def typed_columns(table: TextTable, declared: DataSet) -> dict[str, Column]:
    """Give every column of a file as its kind; columns that the spec doesn't declare stay text.

    Exactly the declared codes are missing, in every column. Where a value is missing, NaN stands among numbers and ""
    among texts.
    """
    codes = frozenset(declared.missing_codes)
    faults = _absent_columns(table, declared)
    columns: dict[str, Column] = {}
    for name, texts in zip(table.header, table.columns, strict=True):
        missing = np.fromiter(map(codes.__contains__, texts), bool, count=len(texts))
        if name in declared.columns:
            columns[name], found = _typed(name, texts, missing, declared)
            faults += found
        else:
            columns[name] = _text_column(texts, missing)
    if not faults:
        faults = _unidentified(columns, declared)
    if faults:
        raise DataFault(declared.file, capped(faults))
    return columns


def _absent_columns(table: TextTable, declared: DataSet) -> list[Fault]:
    free = [name for name in table.header if name not in declared.columns]
    faults = []
    for name in declared.columns:
        if name in table.header:
            continue
        near = difflib.get_close_matches(name, free, n=1, cutoff=0.5) or [f for f in free if _alike(f, name)]
        names = listed([*map(quoted, table.header)], shown=10)
        hint = f"The nearest name is {quoted(near[0])}." if near else f"It names {names}."
        faults.append(Fault(1, 0, f"the header has no column {quoted(name)}, which the spec declares. {hint}"))
    return faults


def _alike(one: str, other: str) -> bool:
    """Whether two texts look the same but for case, spaces around them and the way in which accents are stored."""
    plain = [unicodedata.normalize("NFKC", text).strip().casefold() for text in (one, other)]
    return plain[0] == plain[1]


def _typed(name: str, texts: Texts, missing: Rows, declared: DataSet) -> tuple[Column, list[Fault]]:
    """Read one declared column as its kind, and name what doesn't fit."""
    rule = declared.columns[name]
    present = np.flatnonzero(~missing).tolist()
    if rule.kind in ("number", "count"):
        values, odd = _numbers(texts, present, whole=rule.kind == "count")
        column = Column(values, missing, "number")
        faults = [_kind_fault(name, texts, odd, declared)] if odd else _outside(name, texts, values, rule)
        return column, faults
    column = replace(_text_column(texts, missing), kind="date" if rule.kind == "date" else "text")
    odd = _odd_texts(texts, present, rule)
    return column, [_kind_fault(name, texts, odd, declared)] if odd else []


def _text_column(texts: Texts, missing: Rows) -> Column:
    values = np.array(texts, dtype=object)
    values[missing] = ""
    return Column(values, missing, "text")


def _numbers(texts: Texts, present: list[int], *, whole: bool) -> tuple[NDArray[np.float64], list[int]]:
    """Read numbers, NaN where missing; and the rows whose text is none."""
    found = np.array([_number(texts[row]) for row in present], dtype=np.float64)
    odd = ~np.isfinite(found)
    if whole:
        odd |= (found < 0) | (found != np.floor(found))
    for place in np.flatnonzero(np.abs(found) > LARGEST_WHOLE).tolist():
        odd[place] |= whole or WHOLE.fullmatch(texts[present[place]]) is not None
    values = np.full(len(texts), np.nan)
    values[present] = found
    return values, [present[place] for place in np.flatnonzero(odd).tolist()]


def _number(text: str) -> float:
    """Read a decimal number; NaN where the text is none."""
    if not NUMBER_SIGNS.issuperset(text):
        return math.nan
    try:
        return float(text)
    except ValueError:
        return math.nan


def _odd_texts(texts: Texts, present: list[int], rule: ColumnSpec) -> list[int]:
    if rule.kind == "text" or (rule.kind == "category" and not rule.levels):
        return []
    fits: Callable[[str], bool] = _is_date if rule.kind == "date" else frozenset(rule.levels or ()).__contains__
    known = {text: fits(text) for text in set(texts)}
    return [row for row in present if not known[texts[row]]]


def _is_date(text: str) -> bool:
    if not DATE.fullmatch(text):
        return False
    try:
        date.fromisoformat(text)
    except ValueError:
        return False
    return True


def _kind_fault(name: str, texts: Texts, odd: list[int], declared: DataSet) -> Fault:
    found = _found(texts, odd)
    rule = declared.columns[name]
    return Fault(
        odd[0] + FIRST_ROW,
        0,
        f"the column {quoted(name)} must hold {_expected(rule)}; found {_where(found)}. "
        f"{_advice(found, rule, declared.missing_codes)}",
    )


def _found(texts: Texts, rows: Iterable[int]) -> dict[str, list[int]]:
    """Gather the lines on which each odd text stands."""
    found: dict[str, list[int]] = {}
    for row in rows:
        found.setdefault(texts[row], []).append(row + FIRST_ROW)
    return found


def _where(found: dict[str, list[int]]) -> str:
    shown = [f"{quoted(text)} on {line_list(lines)}" for text, lines in list(found.items())[:SHOWN_TEXTS]]
    more = len(found) - len(shown)
    return "; ".join([*shown, *([f"and {more:,} other text{'s' if more > 1 else ''}"] if more else [])])


def _expected(rule: ColumnSpec) -> str:
    return listed([*map(quoted, rule.levels)], shown=10, last="or") if rule.levels else EXPECTED[rule.kind]


def _advice(found: dict[str, list[int]], rule: ColumnSpec, codes: Sequence[str]) -> str:
    """Say how to write the texts; and, for the others, which missing codes would take them."""
    hints = {text: _spelling_hint(text, rule) for text in found}
    others = [text for text, hint in hints.items() if not hint]
    advice = [*dict.fromkeys(filter(None, hints.values()))]
    if 0 < len(others) <= SHOWN_TEXTS:
        written = ", ".join(json.dumps(code, ensure_ascii=False) for code in [*codes, *others])
        which = listed([*map(quoted, others)], shown=SHOWN_TEXTS)
        mean, are = ("means", "is a level") if len(others) == 1 else ("mean", "are levels")
        if rule.levels:
            advice.append(f"If {which} {are}, write {'it' if len(others) == 1 else 'them'} among the levels.")
        advice.append(f"If {which} {mean} that the value is missing, write missing_codes: [{written}].")
    return " ".join(advice) or "Correct the file or the kind of the column."


def _spelling_hint(text: str, rule: ColumnSpec) -> str:
    if rule.levels:
        alike = any(_alike(level, text) for level in rule.levels)
        return (
            "Levels are compared letter by letter: case, spaces and the way accents are stored count." if alike else ""
        )
    if text != text.strip():
        return "Remove the spaces around values."
    looks_right = any(sign.isdigit() for sign in text)
    if rule.kind == "date":
        return "Write a day of the calendar as year-month-day." if looks_right else ""
    value = _number(text)
    if not math.isnan(value):
        return _number_hint(text, value)
    separated = looks_right and set(text) <= NUMBER_SIGNS | set(",_' ")
    return "Write decimals with a point, and nothing between thousands." if separated else ""


def _number_hint(text: str, value: float) -> str:
    if math.isinf(value):
        return f"{quoted(text)} is larger than any number that can be computed with."
    if abs(value) > LARGEST_WHOLE and WHOLE.fullmatch(text):
        return f"Whole numbers beyond {LARGEST_WHOLE} would be rounded: declare the column as text."
    return "If fractions or negative numbers are right, declare kind: number."


def _outside(name: str, texts: Texts, values: NDArray[np.float64], rule: ColumnSpec) -> list[Fault]:
    if rule.between is None:
        return []
    low, high = rule.between
    rows = np.flatnonzero((values < low) | (values > high)).tolist()  # a missing value is neither
    if not rows:
        return []
    told = f"the column {quoted(name)} must lie between {_plain(low)} and {_plain(high)}; found"
    advice = "Correct the file or the range, or name the code that means missing under missing_codes."
    return [Fault(rows[0] + FIRST_ROW, 0, f"{told} {_where(_found(texts, rows))}. {advice}")]


def _plain(number: float) -> str:
    return repr(number).removesuffix(".0")


def _unidentified(columns: dict[str, Column], declared: DataSet) -> list[Fault]:
    """Check that the identifying columns name each row once; no value is printed, for it may be a person's."""
    names = declared.identified_by or ()
    if not names:
        return []
    named = f"identified_by: [{', '.join(names)}]"
    gone = np.any([columns[name].missing for name in names], axis=0)
    missing = [row + FIRST_ROW for row in np.flatnonzero(gone).tolist()]
    if missing:
        return [Fault(missing[0], 0, f"{named} must name every row, and is missing on {line_list(missing)}.")]
    lines: dict[Key, list[int]] = {}
    for line, key in enumerate(row_keys(columns, names), FIRST_ROW):
        lines.setdefault(key, []).append(line)
    return [
        Fault(
            same[0],
            0,
            f"{named} must name each row once, and is the same on {line_list(same)}. Correct the file, or name a "
            "further column that tells these rows apart.",
        )
        for same in lines.values()
        if len(same) > 1
    ]


def row_keys(columns: Mapping[str, Column], names: Iterable[str]) -> list[Key]:
    """Give what identifies each row, as it compares and sorts: numbers as numbers, all else as text."""
    return list(zip(*(columns[name].values.tolist() for name in names), strict=True))
