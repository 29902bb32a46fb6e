"""The record as bytes: sorted keys, one-space indent, LF, shortest floats; and back.

NaN has no place in JSON: in ``record.json`` it never occurs, in ``tests.csv`` it is an empty cell.
"""

import csv
import hashlib
import io
import json
import math
from collections.abc import Sequence
from dataclasses import fields
from typing import Any

import numpy as np
from pydantic import TypeAdapter

from beforehand.errors import FolderFault
from beforehand.record.model import Floats, Integers, Record, Results

FORMAT = 1
_RECORD: TypeAdapter[Any] | None = None


def sha256(content: bytes) -> str:
    """Give the SHA-256 checksum of bytes as 64 hexadecimal digits."""
    return hashlib.sha256(content).hexdigest()


def json_bytes(value: Any) -> bytes:
    """Write JSON the way every file of a run folder holds it."""
    text = json.dumps(value, sort_keys=True, indent=1, ensure_ascii=False, allow_nan=False)
    return (text + "\n").encode()


def _cell(value: Any) -> str:
    if isinstance(value, float | np.floating):
        return "" if math.isnan(value) else repr(float(value))
    return str(value)


def results_bytes(results: Results) -> bytes:
    """Write ``tests.csv``."""
    out = io.StringIO()
    names = [column.name for column in fields(Results)]
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(names)
    columns = [getattr(results, name) for name in names]
    writer.writerows([_cell(value) for value in row] for row in zip(*columns, strict=True))
    return out.getvalue().encode()


def read_results(content: bytes) -> Results:
    """Read ``tests.csv``; FolderFault when its columns are not those of this version."""
    rows = list(csv.reader(io.StringIO(content.decode(), newline="")))
    names = [column.name for column in fields(Results)]
    if not rows or rows[0] != names:
        raise FolderFault("tests.csv", "the columns are not those that this version of beforehand writes")
    cells = dict(zip(names, zip(*rows[1:], strict=True) if len(rows) > 1 else [()] * len(names), strict=True))
    return Results(**{column.name: results_column(column.name, cells[column.name]) for column in fields(Results)})


def results_column(name: str, values: Sequence[Any]) -> Any:
    """Give the values of one column of ``tests.csv`` the column's type; an empty cell is NaN."""
    kind = Results.__annotations__[name]
    if kind is Integers:
        return np.array([int(value) for value in values], dtype=np.int64)
    if kind is Floats:
        return np.array([math.nan if value == "" else float(value) for value in values], dtype=np.float64)
    return tuple(values)


def _adapter() -> TypeAdapter[Any]:
    global _RECORD  # noqa: PLW0603 -- building the adapter takes longer than reading a record
    if _RECORD is None:
        _RECORD = TypeAdapter(Record)
    return _RECORD


def record_bytes(record: Record) -> bytes:
    """Write ``record.json``; it names the checksum of ``tests.csv`` and holds nothing of the environment."""
    content = _adapter().dump_python(record, mode="python", exclude={"results"})
    content |= {"format": FORMAT, "tests_csv_sha256": sha256(results_bytes(record.results))}
    return json_bytes(_plain(content))


def report_number(record: Record, results_sha256: str) -> str:
    """Give the report's number: the study's identifier with the first 8 digits of the results checksum."""
    return f"{record.study.identifier}.{results_sha256[:8]}"


def _plain(value: Any) -> Any:
    if isinstance(value, dict):
        return {str(key): _plain(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(item) for item in value]
    if isinstance(value, np.generic):
        value = value.item()
    return None if isinstance(value, float) and math.isnan(value) else value


def read_record(record_json: bytes, tests_csv: bytes) -> Record:
    """Read a record back from its two files."""
    content = json.loads(record_json)
    if content.pop("format", None) != FORMAT:
        raise FolderFault("record.json", f"this version of beforehand reads records of format {FORMAT}")
    if content.pop("tests_csv_sha256", None) != sha256(tests_csv):
        raise FolderFault("record.json", "the checksum it names is not that of tests.csv")
    content["results"] = read_results(tests_csv)
    record: Record = _adapter().validate_python(content)
    return record
