"""CSV and TSV, read strictly: what two programs might read in two ways is a fault, with its line."""

import csv
import re
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass

from beforehand.data.opening import unpacked
from beforehand.data.wording import also_lines, capped, quoted
from beforehand.errors import DataFault, Fault

FIRST_ROW = 2  # every row is one line and the header is line 1, so row i of a file stands on line i + 2
MAX_ROWS = 10_000_000
MAX_COLUMNS = 5_000
MAX_NAME = 200
MAX_FIELD = 100_000  # below the standard library's own threshold, so that ours is the one that speaks

DELIMITERS = {".csv": ",", ".tsv": "\t"}
# A quoted field holds its quote signs doubled; in a field without quotes there is none (RFC 4180, section 2).
FIELD = {sign: f'(?:"(?:[^"]++|"")*+"|[^"{sign}]*+)' for sign in ",\t"}
SOUND = {sign: re.compile(f"{field}(?:{sign}{field})*+") for sign, field in FIELD.items()}


@dataclass(frozen=True)
class TextTable:
    """A table as written: the names of the header, and every field as text, column by column."""

    header: tuple[str, ...]
    columns: tuple[Sequence[str], ...]

    @property
    def rows(self) -> int:
        """How many rows follow the header."""
        return len(self.columns[0])


def read_table(raw: bytes, *, path: str) -> TextTable:
    """Read the bytes of a .csv, .tsv, .csv.gz or .tsv.gz file; all faults of its form come at once."""
    name = path.lower()
    if name.endswith(".gz"):
        name, raw = name.removesuffix(".gz"), unpacked(raw, source=path)
    delimiter = DELIMITERS.get(name[-4:])
    if delimiter is None:
        raise DataFault(path, "only .csv, .tsv, .csv.gz and .tsv.gz files are read. Save the table as one of these.")
    lines = _lines(_decoded(raw, path), path)
    faults = _line_faults(lines, delimiter)
    if not faults:
        header, *rows = csv.reader(lines, delimiter=delimiter, strict=True)
        faults = _header_faults(header, lines[0], delimiter) or _shape_faults(header, rows)
    if faults:
        raise DataFault(path, capped(faults))
    return TextTable(tuple(header), tuple(zip(*rows, strict=True)))


def _decoded(raw: bytes, path: str) -> str:
    if raw.startswith((b"\xff\xfe", b"\xfe\xff")):
        raise DataFault(path, "the file is written in UTF-16. Save it as UTF-8.")
    try:
        return raw.decode("utf-8-sig")
    except UnicodeDecodeError as broken:
        line = raw.count(b"\n", 0, broken.start) + 1
        likely = raw[broken.start : broken.start + 1].decode("cp1252", "replace")
        text = f"byte {raw[broken.start]:02X} is not UTF-8 text; in Windows-1252 it is {quoted(likely)}."
        raise DataFault(path, [Fault(line, 0, f"{text} Save the file as UTF-8.")]) from None


def _lines(text: str, path: str) -> list[str]:
    """Split at line feeds (with or without a carriage return before them) and at nothing else."""
    if not text:
        raise DataFault(path, "the file is empty. Its first line must hold the column names.")
    if "\n" not in text and "\r" in text:
        raise DataFault(path, "the lines end in bare carriage returns. Save the file with line feeds.")
    lines = text.split("\n")
    if not lines[-1]:
        del lines[-1]
    if len(lines) == 1:
        raise DataFault(path, "the file holds a header and no rows.")
    if len(lines) > MAX_ROWS + 1:
        raise DataFault(path, f"the file has more than {MAX_ROWS:,} rows, the most that is read.")
    return [line.removesuffix("\r") for line in lines] if "\r" in text else lines


def _line_faults(lines: list[str], delimiter: str) -> list[Fault]:
    """Find the lines that can't be cut into fields in one way only."""
    sound = SOUND[delimiter].fullmatch
    unsound = [i for i, line in enumerate(lines, 1) if '"' in line and sound(line) is None]
    # an odd number of quote signs: a field goes on over the end of its line
    unclosed = [i for i in unsound if lines[i - 1].count('"') % 2]
    stray = sorted(set(unsound) - set(unclosed))
    return [
        *_one(
            [i for i, line in enumerate(lines, 1) if not line],
            "an empty line stands here; every line holds one row. Remove it (in a table with one column an "
            'empty field is written "").',
        ),
        *_one(
            [i for i, line in enumerate(lines, 1) if "\0" in line],
            "a NUL character stands here, which no text holds. The file is damaged or not a text file.",
        ),
        *_one(
            [i for i, line in enumerate(lines, 1) if "\r" in line],
            "a carriage return stands inside the line; a field holds no line breaks. Remove it.",
        ),
        *_one(
            unclosed,
            "a quoted field is not closed on its line; a field holds no line breaks. Close it, or write a quote sign "
            'that belongs to the text twice, in a quoted field: "12"" pipe".',
        ),
        *_one(
            stray,
            "a quote sign stands inside a field, or text follows a closing one. Write a quote sign that belongs "
            'to the text twice, in a quoted field: "12"" pipe".',
        ),
        *_one(
            [i for i, line in enumerate(lines, 1) if len(line) > MAX_FIELD and _longest(line, delimiter) > MAX_FIELD],
            f"a field is longer than {MAX_FIELD:,} characters, the most that is read.",
        ),
    ]


def _longest(line: str, delimiter: str) -> int:
    return max(len(field.group()) for field in re.finditer(FIELD[delimiter], line))


def _one(lines: list[int], text: str) -> list[Fault]:
    """Make one fault of all the lines that have it."""
    return [Fault(lines[0], 0, text + also_lines(lines[1:]))] if lines else []


def _header_faults(header: list[str], line: str, delimiter: str) -> list[Fault]:
    if len(header) == 1 and any(sign in line for sign in ",;\t|"):
        kind = "tabs" if delimiter == "\t" else "commas"
        return [Fault(1, 0, f"the header has a single field, {quoted(line)}. Separate the fields by {kind}.")]
    if len(header) > MAX_COLUMNS:
        return [Fault(1, 0, f"the header names {len(header):,} columns; at most {MAX_COLUMNS:,} are read.")]
    faults = []
    for name, times in Counter(header).items():
        if not name:
            where = ", ".join(str(i) for i, given in enumerate(header, 1) if not given)
            faults.append(f"the header has no name in field {where}. Every column needs one.")
        elif times > 1:
            faults.append(f"the header names the column {quoted(name)} {_times(times)}. Names must differ.")
        if len(name) > MAX_NAME:
            faults.append(f"the column name {quoted(name)} is longer than {MAX_NAME} characters. Shorten it.")
        if not name.isprintable():
            faults.append(f"the column name {quoted(name)} holds characters that can't be printed. Remove them.")
    return [Fault(1, 0, text) for text in faults]


def _shape_faults(header: list[str], rows: list[list[str]]) -> list[Fault]:
    """Find rows with more or fewer fields than the header: they would shift or lose values."""
    width = len(header)
    lines_by_count: dict[int, list[int]] = {}
    for line, row in enumerate(rows, FIRST_ROW):
        if len(row) != width:
            lines_by_count.setdefault(len(row), []).append(line)
    return [
        Fault(
            lines[0],
            0,
            f"{_count(count)}, where the header names {width} column{'s' if width > 1 else ''}."
            f"{also_lines(lines[1:])} Write every field, empty ones too, and quote a field with a separator in it.",
        )
        for count, lines in lines_by_count.items()
    ]


def _times(count: int) -> str:
    return "twice" if count == 2 else f"{count} times"


def _count(fields: int) -> str:
    return "1 field" if fields == 1 else f"{fields} fields"
