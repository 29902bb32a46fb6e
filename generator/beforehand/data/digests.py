"""Checksums of input data: of the bytes, of the table they hold, and of each of its columns.

``beforehand-table-1``, the content checksum: each row is the JSON object from column name to value, written by
RFC 8785 and followed by a line feed; the checksum is SHA-256 over these lines. The rows come in the order of the
columns that identify them (in file order where none do), before any row is excluded. Numbers and counts are JSON
numbers; categories, texts, dates and columns that the spec does not declare are JSON text; a missing value is null.
A column's checksum is SHA-256 of the RFC 8785 array of its values in the same order.

So the content checksum is the same for CSV, TSV and packed files, whatever the order of columns, the quoting or the
way in which a number is written, and, where rows are identified, whatever their order.
"""

import hashlib
import json
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

import numpy as np
import rfc8785

from beforehand.spec.expressions import Column

NULL = "null"
# the escapes of RFC 8785 3.2.2.2 are those of the standard library when other letters stay themselves
_text = json.JSONEncoder(ensure_ascii=False).encode


@dataclass(frozen=True)
class TableChecksums:
    """The content checksum of a table, and one checksum for each column, by name."""

    content: str
    columns: dict[str, str]


def of_bytes(raw: bytes) -> str:
    """Give the SHA-256 of a file's bytes, as ``sha256sum`` prints it."""
    return hashlib.sha256(raw).hexdigest()


def of_table(columns: Mapping[str, Column]) -> TableChecksums:
    """Give the checksums of a typed table whose rows are in their final order."""
    names = sorted(columns, key=lambda name: name.encode("utf-16-be"))  # RFC 8785 3.2.3: by UTF-16 code units
    written = [_written(columns[name]) for name in names]
    # a column name may hold a per cent sign, and the row is filled in by the % operator
    fields = ",".join(f"{_text(name).replace('%', '%%')}:%s" for name in names)
    row = f"{{{fields}}}\n"
    content = hashlib.sha256("".join([row % values for values in zip(*written, strict=True)]).encode())
    arrays = (_array(values) for values in written)
    return TableChecksums(content.hexdigest(), dict(sorted(zip(names, arrays, strict=True))))


def _array(values: Iterable[str]) -> str:
    return hashlib.sha256(f"[{','.join(values)}]".encode()).hexdigest()


def _written(column: Column) -> list[str]:
    """Write each value of a column as RFC 8785 does; texts recur, so each is written once."""
    if column.kind == "number":
        written = _numbers(column)
    else:
        values = column.values.tolist()
        known = {value: _text(value) for value in set(values)}
        written = [known[value] for value in values]
    for row in np.flatnonzero(column.missing).tolist():
        written[row] = NULL
    return written


def _numbers(column: Column) -> list[str]:
    numbers = column.values + 0.0  # -0 is written 0
    # from 1e-4 to 1e16 Python and RFC 8785 write the same digits in the same form, but for ".0"
    written = [text.removesuffix(".0") for text in map(repr, numbers.tolist())]
    size = np.abs(numbers)
    same = (size == 0) | (size >= 1e-4) & (size < 1e16) | column.missing
    for row in np.flatnonzero(~same).tolist():
        written[row] = rfc8785.dumps(float(numbers[row])).decode()
    return written
