"""Every test in full: all of them on screen, in chunks; as many as the spec allows in print."""

import math
from collections.abc import Iterable
from itertools import islice

from beforehand.record.canonical import results_bytes, sha256
from beforehand.record.model import Record
from beforehand.report.view.headings import HEADINGS
from beforehand.report.view.lines import Line, foremost
from beforehand.report.view.model import Appendix, Cell, Fact, Head, Row, Table
from beforehand.report.view.results import degrees, statistic
from beforehand.report.view.written import p_of, written
from beforehand.spelling import NOTHING, checksum, exact, integer, percent, short
from beforehand.terms import STATE_WORDS

# A browser lays out only the chunks in view; a table of thousands of rows in one piece makes it wait.
CHUNK = 200

COLUMNS = (
    "Hypothesis", "Test", "n", "Estimate", "From", "To", "Level", "SE", "Statistic", "df", "Unadjusted p",
    "Enters with", "Rank", "Factor", "Adjusted p, family", "Adjusted p, study", "Threshold", "Decision", "Stands to",
)  # fmt: skip
NUMBERS = (2, 3, 4, 5, 6, 7, 8, 9, 12, 13, 18)
P_VALUES = (10, 11, 14, 15, 16)
EXPLAINED = (
    Fact("n", "analysed units of the first + the second group, or pairs"),
    Fact("From, To, Level", "the unadjusted interval and its confidence"),
    Fact("SE", "standard error of the estimate"),
    Fact("Enters with", "the p that enters the procedure after the reading of the level"),
    Fact("Rank, Factor", "its rank within the family, and by how much the procedure multiplies it"),
    Fact("Stands to", "the largest number of hypotheses (m) in the family with the rejection still standing"),
)


def appendix(record: Record, lines: tuple[Line, ...]) -> dict[str, Appendix]:
    """Write the section for each medium."""
    printed = foremost(lines, record.appendix_rows)
    return {
        "screen": _appendix(lines, _lead(record, len(lines), len(lines))),
        "print": _appendix(printed, _lead(record, len(printed), len(lines))),
    }


def _lead(record: Record, shown: int, of_all: int) -> tuple[str, ...]:
    file = f"tests.csv, SHA-256 {checksum(sha256(results_bytes(record.results)))}"
    if shown == of_all:
        return (f"All {integer(of_all)} hypotheses. The same rows with full precision: {file}.",)
    return (
        f"{integer(shown)} of {integer(of_all)} hypotheses: rejections first, then the nearest misses. All rows, with "
        f"full precision, are in {file}.",
    )


def _appendix(lines: tuple[Line, ...], lead: tuple[str, ...]) -> Appendix:
    chunks = tuple(_chunk(tuple(part), start, len(lines)) for start, part in _parts(lines))
    return Appendix(heading=HEADINGS["appendix"], sentences=lead, chunks=chunks, columns=EXPLAINED)


def _parts(lines: tuple[Line, ...]) -> Iterable[tuple[int, Iterable[Line]]]:
    for start in range(0, len(lines), CHUNK):
        yield start, islice(lines, start, start + CHUNK)


def _head() -> tuple[tuple[Head, ...], ...]:
    styles = {**dict.fromkeys(NUMBERS, "number"), **dict.fromkeys(P_VALUES, "p")}
    return (tuple(Head(text=text, style=styles.get(at, "")) for at, text in enumerate(COLUMNS)),)


def _chunk(lines: tuple[Line, ...], start: int, of_all: int) -> Table:
    last = start + len(lines)
    part = f", {integer(start + 1)} to {integer(last)} of {integer(of_all)}" if of_all > CHUNK else ""
    return Table(caption=f"Tests{part}", head=_head(), rows=tuple(_row(line) for line in lines), style="tests")


def _row(line: Line) -> Row:
    numbers = written(line)
    texts = (
        line.values["test"].replace("_", " "), _size(line), numbers.estimate, numbers.lower, numbers.upper,
        _percent(line), numbers.standard_error, statistic(line), degrees(line), p_of(line), p_of(line, "p_entered"),
        integer(line.count("rank")), short(line.number("factor"), 5), p_of(line, "p_family"), p_of(line, "p_study"),
        exact(line.threshold), STATE_WORDS[line.state], integer(line.count("survives_up_to") or 0),
    )  # fmt: skip
    styles = {**dict.fromkeys(NUMBERS, "number"), **dict.fromkeys(P_VALUES, "p")}
    cells = [Cell(text, styles.get(at, "")) for at, text in enumerate(texts, 1)]
    cells[-2] = Cell(STATE_WORDS[line.state], f"state {line.state.replace('_', '-')}")
    cells[-1] = Cell(texts[-1] if line.count("survives_up_to") else NOTHING, "number")
    return Row(head=Cell(line.label, note="" if line.label == line.id else line.id), cells=tuple(cells))


def _size(line: Line) -> str:
    if line.count("n_second"):
        return f"{integer(line.count('n_first'))} + {integer(line.count('n_second'))}"
    return integer(line.count("n"))


def _percent(line: Line) -> str:
    level = line.number("interval_level")
    return NOTHING if math.isnan(level) else percent(level)
