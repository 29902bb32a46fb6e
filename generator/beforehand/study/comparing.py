"""Two runs compared: words exactly, numbers to the ninth digit."""

import csv
import io
import json
import math
from collections.abc import Iterator
from typing import Any

NUMBERS_AGREE = 1e-9
"""Relative difference of numbers that another environment may cause."""
ROUNDING = ("largest", "about")
"""What the record says of its own rounding errors, under ``agreement``: it follows the environment."""


def record_differences(was: bytes, now: bytes) -> list[str]:
    """Name every place in two record.json where words differ, or numbers by more than another environment explains."""
    one, other = json.loads(was), json.loads(now)
    for record in (one, other):
        record.pop("tests_csv_sha256", None)
        for agreement in record.get("agreement", []):
            for key in ROUNDING:
                agreement.pop(key, None)
    return list(_unlike(one, other, ""))


def table_differences(was: bytes, now: bytes) -> list[str]:
    """Name every cell of two tests.csv that differs likewise, by hypothesis and column."""
    one, other = ([*csv.reader(io.StringIO(body.decode("utf-8", "replace"), newline=""))] for body in (was, now))
    if not one or not other or one[0] != other[0] or [row[:1] for row in one] != [row[:1] for row in other]:
        return ["its rows or columns"]
    return [
        f"{row[0]}, column {column}"
        for row, again in zip(one[1:], other[1:], strict=True)
        for column, x, y in zip(one[0], row, again, strict=False)
        if not _same_cell(x, y)
    ]


def _unlike(one: Any, other: Any, place: str) -> Iterator[str]:
    if isinstance(one, dict) and isinstance(other, dict):
        for key in sorted(one.keys() | other.keys()):
            yield from _unlike(one.get(key), other.get(key), f"{place}.{key}" if place else key)
    elif isinstance(one, list) and isinstance(other, list) and len(one) == len(other):
        for number, (x, y) in enumerate(zip(one, other, strict=True)):
            yield from _unlike(x, y, f"{place}[{x['id'] if isinstance(x, dict) and 'id' in x else number}]")
    elif isinstance(one, float) and isinstance(other, float):
        if not _near(one, other):
            yield place
    elif one != other or type(one) is not type(other):
        yield place


def _same_cell(x: str, y: str) -> bool:
    if x == y:
        return True
    try:
        return _near(float(x), float(y))
    except ValueError:
        return False


def _near(x: float, y: float) -> bool:
    if not (math.isfinite(x) and math.isfinite(y)):
        return x == y
    return abs(x - y) <= NUMBERS_AGREE * max(abs(x), abs(y), 1e-300)
