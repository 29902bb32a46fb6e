"""A starting spec from the columns of a data file: names, kinds and level names, never a number."""

import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from beforehand.data.opening import open_input
from beforehand.data.read import read_table

MOST_LEVELS = 12
"""A text column with at most this many values is drafted as a category."""
MISSING_WORDS = ("NA", "N/A", "n/a", "NaN", "nan", "null", "NULL", "None", "-", ".", "?")
"""Texts that may stand for a missing value in a column of numbers; drafted as codes for the author to confirm."""


@dataclass(frozen=True)
class DraftedColumn:
    """One column as the draft declares it."""

    name: str
    kind: str
    levels: tuple[str, ...] = ()

    def line(self) -> str:
        """Write the column as a line of the spec."""
        levels = f", levels: [{', '.join(quoted(level) for level in self.levels)}]" if self.levels else ""
        return f"      {quoted(self.name)}: {{kind: {self.kind}{levels}}}"


def draft(data: Path | None, *, folder: Path) -> str:
    """Write a commented starting spec; ``data`` lies below ``folder``, where the spec will stand."""
    if data is None:
        return _text("data/DATA.csv", [DraftedColumn("COLUMN", "number")], ("",))
    path = data.relative_to(folder).as_posix()
    table = read_table(open_input(path, folder=folder), path=path)
    columns, codes = _columns(dict(zip(table.header, table.columns, strict=True)))
    return _text(path, columns, codes)


def _columns(texts: dict[str, Sequence[str]]) -> tuple[list[DraftedColumn], tuple[str, ...]]:
    codes = {""}
    drafted = []
    for name, values in texts.items():
        present = [value for value in values if value not in codes]
        words = {value for value in present if value in MISSING_WORDS}
        rest = [value for value in present if value not in words]
        if words and rest and all(_is_number(value) for value in rest):
            codes |= words
            present = rest
        drafted.append(_column(name, present))
    return drafted, tuple(sorted(codes))


def _column(name: str, present: list[str]) -> DraftedColumn:
    if not present:
        return DraftedColumn(name, "text")
    if all(re.fullmatch(r"\d+", value) for value in present):
        return DraftedColumn(name, "count")
    if all(_is_number(value) for value in present):
        return DraftedColumn(name, "number")
    if all(re.fullmatch(r"\d{4}-\d{2}-\d{2}", value) for value in present):
        return DraftedColumn(name, "date")
    values = dict.fromkeys(present)
    if len(values) <= MOST_LEVELS and len(values) < len(present):
        return DraftedColumn(name, "category", tuple(values))
    return DraftedColumn(name, "text")


def _is_number(text: str) -> bool:
    return re.fullmatch(r"[+-]?(\d+(\.\d*)?|\.\d+)([eE][+-]?\d+)?", text) is not None


def quoted(text: str) -> str:
    """Write a name or a level so that no version of YAML reads it as something else."""
    plain = re.fullmatch(r"[A-Za-z_][A-Za-z0-9_ ]*[A-Za-z0-9_]|[A-Za-z_]", text)
    tricky = text.lower() in ("y", "n", "yes", "no", "on", "off", "true", "false", "null")
    if plain and not tricky:
        return text
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'


def _text(path: str, columns: list[DraftedColumn], codes: tuple[str, ...]) -> str:
    number = next((c.name for c in columns if c.kind in ("number", "count")), "OUTCOME")
    group = next((c for c in columns if c.kind == "category" and len(c.levels) > 1), None)
    key = next((c.name for c in columns if c.kind in ("text", "count")), "COLUMN")
    levels = group.levels if group else ("FIRST", "SECOND")
    return TEMPLATE.format(
        path=path,
        key=quoted(key),
        codes=", ".join(f'"{code}"' for code in codes),
        columns="\n".join(column.line() for column in columns),
        outcome=quoted(number),
        group=quoted(group.name) if group else "GROUP",
        first=quoted(levels[1]),
        second=quoted(levels[0]),
    )


TEMPLATE = """\
# yaml-language-server: $schema=./beforehand.schema.json
# A starting point, made from the names in the file and nothing else. What is empty is yours to write, what is there
# is yours to change, and what begins with # can go. `beforehand check` names what is left to write, line by line.
beforehand: 1

study:
  title:
  identifier:                      # stands on every page of the report
  intent: confirmatory             # or: exploratory
  # dated: 2031-03-02              # printed as it stands; no clock is read
  # protocol: the document that this spec carries out

data:
  - id: main
    file: {path}
    one_row_is:
    identified_by: [{key}]         # must be unique; rows are sorted by it
    missing_codes: [{codes}]       # exactly these texts mean "missing", nothing else does
    columns:                       # a number may have unit: kg and between: [0, 100]
{columns}
    # exclude:
    #   - {{where: "COLUMN > 100", because: the reason, known_at: before_allocation}}
    # derive:
    #   log_value: {{is: log(COLUMN)}}

promise:
  criterion: familywise_error_rate # or: false_discovery_rate
  level: 0.05
  level_is: two_sided              # a one-sided test then counts with twice its p

families:
  - id: main_question
    question:
    procedure: holm                # `beforehand methods` lists the procedures and tests
    hypotheses:
      - id: first_hypothesis
        claim:
        test: welch_t
        outcome: {outcome}
        groups: {{column: {group}, first: {first}, second: {second}}}   # everything is about first - second
        alternative: two_sided     # or: above, below
        claim_direction: either    # or: above, below
"""
