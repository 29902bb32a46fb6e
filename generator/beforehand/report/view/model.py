"""What the templates print: strings, numbers already written, nothing left to decide."""

from collections.abc import Mapping
from dataclasses import dataclass

from beforehand.report.figures.model import Figure


@dataclass(frozen=True)
class Cell:
    """One cell of a table; ``style`` holds the classes that the style sheets know."""

    text: str
    style: str = ""
    note: str = ""
    """A second, quieter line."""


@dataclass(frozen=True, kw_only=True)
class Head:
    """One cell of a table's head."""

    text: str
    style: str = ""
    columns: str = "1"
    rows: str = "1"
    scope: str = "col"


@dataclass(frozen=True, kw_only=True)
class Row:
    """One row of a table, with the cell that names it."""

    head: Cell
    cells: tuple[Cell, ...]
    style: str = ""


@dataclass(frozen=True, kw_only=True)
class Table:
    """A table with its caption; the head may have two rows."""

    caption: str
    head: tuple[tuple[Head, ...], ...]
    rows: tuple[Row, ...]
    notes: tuple[str, ...] = ()
    style: str = ""


@dataclass(frozen=True)
class Fact:
    """A short label and what belongs to it."""

    label: str
    text: str
    style: str = ""


@dataclass(frozen=True, kw_only=True)
class Heading:
    """A section of the report."""

    number: str
    title: str
    anchor: str


@dataclass(frozen=True, kw_only=True)
class Finding:
    """One hypothesis as a sentence that a reader without statistics can follow."""

    id: str
    label: str
    style: str
    lead: str
    """The state in a word or two: "Shown", "Not shown", "Not tested"."""
    text: str
    numbers: str
    """The estimate with its interval, and what was compared with the threshold."""


@dataclass(frozen=True, kw_only=True)
class Drawing:
    """A figure with the table of the numbers behind it."""

    key: str
    alternative_text: str
    caption: str
    numbers: Table


@dataclass(frozen=True, kw_only=True)
class Checksum:
    """A checksum, in groups of eight digits, and the file whose SHA-256 it is."""

    name: str
    of_file: str
    digits: str


@dataclass(frozen=True, kw_only=True)
class Command:
    """A command line for the reader, and what it shows."""

    text: str
    shows: str


@dataclass(frozen=True, kw_only=True)
class Front:
    """Page one, for a reader who may stop after it."""

    kind: str
    facts: tuple[Fact, ...]
    verdict: str
    reading: str
    """How a rejection is to be read in a study of this intent."""
    against: tuple[Finding, ...]
    more_against: str
    shown: tuple[Finding, ...]
    more_shown: str
    promises: tuple[str, ...]
    alarms: tuple[str, ...]
    families: Table
    standing: tuple[Fact, ...]
    """The sealed plan and the warnings, in a sentence each."""
    checksums: tuple[Checksum, ...]
    commands: tuple[Command, ...]


@dataclass(frozen=True, kw_only=True)
class PromisedFamily:
    """One family as promised."""

    title: str
    question: str
    alarm: str
    """Said loudly, where nothing is adjusted."""
    facts: tuple[Fact, ...]
    hypotheses: Table


@dataclass(frozen=True, kw_only=True)
class Promised:
    """What was promised."""

    heading: Heading
    sentences: tuple[str, ...]
    chain: tuple[Fact, ...]
    """The families in the order of their gates; empty where no gate stands between them."""
    families: tuple[PromisedFamily, ...]
    uses: Table
    """The rows that each test uses, and what happens to missing values."""
    drawings: tuple[Drawing, ...]


@dataclass(frozen=True, kw_only=True)
class Input:
    """One input file."""

    title: str
    facts: tuple[Fact, ...]


@dataclass(frozen=True, kw_only=True)
class Inputs:
    """The files that were read."""

    heading: Heading
    files: tuple[Input, ...]
    sentences: tuple[str, ...]


@dataclass(frozen=True, kw_only=True)
class AnalysedData:
    """The flow of rows of one data set."""

    title: str
    sentences: tuple[str, ...]
    tables: tuple[Table, ...]
    described: tuple[Table, ...]
    """What the spec asks to describe."""


@dataclass(frozen=True, kw_only=True)
class Analysed:
    """The rows that were analysed."""

    heading: Heading
    data: tuple[AnalysedData, ...]


@dataclass(frozen=True, kw_only=True)
class ResultsOfFamily:
    """The results of one family."""

    title: str
    question: str
    verdict: str
    alarm: str
    shown_part: str
    """Which hypotheses stand here, where there are too many for all; empty otherwise."""
    findings: tuple[Finding, ...]
    estimates: Table
    decisions: Table
    trail: Table
    supportive: Table
    """The analyses that support a hypothesis and decide nothing, each below its hypothesis."""
    groups: tuple[Table, ...]
    remarks: tuple[Fact, ...]
    estimate_drawings: tuple[Drawing, ...]
    decision_drawings: tuple[Drawing, ...]


@dataclass(frozen=True, kw_only=True)
class ResultsByFamily:
    """Results, family by family."""

    heading: Heading
    families: tuple[ResultsOfFamily, ...]


@dataclass(frozen=True, kw_only=True)
class Warned:
    """One warning."""

    severity: str
    style: str
    title: str
    facts: tuple[Fact, ...]


@dataclass(frozen=True, kw_only=True)
class WarningSection:
    """The warnings with their answers."""

    heading: Heading
    lead: str
    warnings: tuple[Warned, ...]
    unneeded: tuple[str, ...]


@dataclass(frozen=True, kw_only=True)
class Plain:
    """A section of sentences and tables."""

    heading: Heading
    sentences: tuple[str, ...]
    tables: tuple[Table, ...] = ()


@dataclass(frozen=True, kw_only=True)
class Methods:
    """Methods and references, how numbers are written, cautions, and the empty block for signatures."""

    heading: Heading
    table: Table
    spelling: tuple[str, ...]
    cautions: tuple[str, ...]
    sign_off: Table


@dataclass(frozen=True, kw_only=True)
class Appendix:
    """Every test in full, for one medium."""

    heading: Heading
    sentences: tuple[str, ...]
    chunks: tuple[Table, ...]
    columns: tuple[Fact, ...]
    """What the columns hold, where a heading alone does not say it."""


@dataclass(frozen=True, kw_only=True)
class View:
    """The whole report in words."""

    title: str
    identifier: str
    number: str
    """The report's number: the study's identifier with the first 8 digits of the results checksum."""
    short_checksum: str
    contents: tuple[Heading, ...]
    front: Front
    promised: Promised
    inputs: Inputs
    analysed: Analysed
    results: ResultsByFamily
    warnings: WarningSection
    departures: Plain
    firmness: Plain
    second: Plain
    checklist: Plain
    methods: Methods
    appendix: Mapping[str, Appendix]
    """By medium: "screen" and "print"."""


def drawing(figure: Figure) -> Drawing:
    """Give a figure the shape that templates print."""
    head, *rows = figure.table
    return Drawing(
        key=figure.key,
        alternative_text=figure.alternative_text,
        caption=figure.caption,
        numbers=Table(
            caption=f"The numbers behind the figure. {figure.caption}",
            head=(tuple(Head(text=text, style="" if at == 0 else "number") for at, text in enumerate(head)),),
            rows=tuple(Row(head=Cell(row[0]), cells=tuple(Cell(text, "number") for text in row[1:])) for row in rows),
        ),
    )
