"""Every test in full: all of them on screen, in chunks; as many as the spec allows in print."""

import math
from collections.abc import Iterator

from beforehand.record.canonical import results_bytes, sha256
from beforehand.record.model import Record
from beforehand.report.view.headings import HEADINGS
from beforehand.report.view.lines import Line, foremost
from beforehand.report.view.model import Appendix, Cell, Fact, Head, Row, Table
from beforehand.report.view.results import degrees, statistic
from beforehand.report.view.written import p_of, size, written
from beforehand.spelling import NOTHING, checksum, exact, integer, percent, short
from beforehand.terms import STATE_WORDS

# A browser lays out only the chunks in view; a table of thousands of rows in one piece makes it wait.
CHUNK = 200

COLUMNS = {
    "Hypothesis": "", "Test": "", "n": "number", "Estimate": "number", "From": "number", "To": "number",
    "Level": "number", "SE": "number", "Statistic": "number", "df": "number", "Unadjusted p": "p", "Enters with": "p",
    "Rank": "number", "Factor": "number", "Adjusted p, family": "p", "Adjusted p, study": "p", "Threshold": "p",
    "Decision": "next", "Stands to": "number",
}  # fmt: skip
STYLES = tuple(COLUMNS.values())
HEAD = (tuple(Head(text=text, style=style) for text, style in COLUMNS.items()),)
EXPLAINED = (
    Fact("n", "analysed units of the first + the second group, or pairs"),
    Fact("From, To, Level", "the unadjusted interval and its confidence"),
    Fact("SE", "standard error of the estimate"),
    Fact("Enters with", "the p that enters the procedure after the reading of the level"),
    Fact("Rank, Factor", "its rank within the family, and by how much the procedure multiplies it"),
    Fact("Stands to", "the largest number of hypotheses (m) in the family with the rejection still standing"),
)


def appendix(record: Record, lines: tuple[Line, ...], supporting: tuple[Line, ...]) -> dict[str, Appendix]:
    """Write the section for each medium: the hypotheses, and after them the analyses that support them."""
    printed = foremost(lines, record.appendix_rows)
    file = f"tests.csv, SHA-256 {checksum(sha256(results_bytes(record.results)))}"
    whole = f"All {integer(len(lines))} hypotheses. The same rows with full precision: {file}."
    part = (
        f"{integer(len(printed))} of {integer(len(lines))} hypotheses: rejections first, then the nearest misses. All "
        f"rows, with full precision, are in {file}."
    )
    first = supporting[: record.appendix_rows]
    return {
        "screen": _appendix(lines, whole, supporting, len(supporting)),
        "print": _appendix(printed, part if len(printed) < len(lines) else whole, first, len(supporting)),
    }


def _appendix(lines: tuple[Line, ...], lead: str, supporting: tuple[Line, ...], of_all: int) -> Appendix:
    shown = "they" if len(supporting) == of_all else f"{integer(len(supporting))} of the {integer(of_all)}"
    beside = f"Supportive analyses decide nothing and are not counted here; {shown} stand in a table of their own."
    return Appendix(
        heading=HEADINGS["appendix"],
        sentences=(lead, beside) if of_all else (lead,),
        chunks=(*_chunks("Tests", lines), *_chunks("Supportive analyses", supporting)),
        columns=EXPLAINED,
    )


def _chunks(name: str, lines: tuple[Line, ...]) -> Iterator[Table]:
    for start in range(0, len(lines), CHUNK):
        yield _chunk(name, lines[start : start + CHUNK], start, len(lines))


def _chunk(name: str, lines: tuple[Line, ...], start: int, of_all: int) -> Table:
    last = start + len(lines)
    part = f", {integer(start + 1)} to {integer(last)} of {integer(of_all)}" if of_all > CHUNK else ""
    return Table(caption=f"{name}{part}", head=HEAD, rows=tuple(_row(line) for line in lines), style="tests")


def _row(line: Line) -> Row:
    numbers = written(line)
    texts = (
        line.values["test"].replace("_", " "), size(line), numbers.estimate, numbers.lower, numbers.upper,
        _percent(line), numbers.standard_error, statistic(line), degrees(line), p_of(line), p_of(line, "p_entered"),
        _count(line, "rank"), short(line.number("factor"), 5), p_of(line, "p_family"), p_of(line, "p_study"),
        exact(line.threshold), STATE_WORDS[line.state],
        _count(line, "survives_up_to"),
    )  # fmt: skip
    state = f"state {line.state.replace('_', '-')}"
    cells = (Cell(text, state if style == "next" else style) for text, style in zip(texts, STYLES[1:], strict=True))
    return Row(head=Cell(line.label, note="" if line.label == line.id else line.id), cells=tuple(cells))


def _count(line: Line, column: str) -> str:
    return integer(line.count(column)) if line.count(column) else NOTHING


def _percent(line: Line) -> str:
    level = line.number("interval_level")
    return NOTHING if math.isnan(level) else percent(level)
