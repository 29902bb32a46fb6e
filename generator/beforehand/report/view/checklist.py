"""What reporting standards ask for, with the section that meets it, or the words NOT STATED."""

from collections.abc import Callable
from dataclasses import dataclass

from beforehand.record.model import Record
from beforehand.report.view import tables
from beforehand.report.view.headings import HEADINGS, section
from beforehand.report.view.model import Cell, Plain, Row, Table

NOT_STATED = "NOT STATED"


@dataclass(frozen=True)
class Item:
    """One item: what must be stated, who asks for it, and where this report states it."""

    what: str
    asked_by: str
    where: Callable[[Record], str]


def _at(*anchors: str) -> Callable[[Record], str]:
    return lambda _: ", ".join(section(anchor) for anchor in anchors)


def _if(stated: Callable[[Record], bool], *anchors: str) -> Callable[[Record], str]:
    return lambda record: _at(*anchors)(record) if stated(record) else NOT_STATED


def _never(why: str = "") -> Callable[[Record], str]:
    return lambda _: f"{NOT_STATED}{f': {why}' if why else ''}"


def _every(stated: Callable[..., object]) -> Callable[[Record], bool]:
    return lambda record: bool(record.hypotheses) and all(bool(stated(one)) for one in record.hypotheses)


def _explained(record: Record) -> bool:
    return all(one.answer for one in record.warnings if one.severity != "note")


ITEMS = (
    Item("Title, and an identifier on every page", "ISO/IEC 17025:2017 7.8.2.1", _at("summary")),
    Item("Who prepared it", "ISO/IEC 17025:2017 7.8.2.1", _if(lambda r: bool(r.study.prepared_by), "summary")),
    Item("Date of the plan", "ICH E3 9.7.1", _if(lambda r: bool(r.study.dated), "summary")),
    Item("Dates of data lock, unblinding and analysis", "ICH E6(R3) 4.2.2", _never("no clock is read")),
    Item("Checksum, size, rows and columns of each input", "ICH E6(R3) 4.2.5", _at("inputs")),
    Item("Software and versions", "SAMPL 14", lambda _: "environment.json"),
    Item("Results concern only the data analysed", "ISO/IEC 17025:2017 7.8.2.1", _at("methods")),
    Item("Place for name, date, meaning of each signature", "21 CFR 11.50", _at("methods")),
    Item("Where the protocol can be read", "CONSORT 2010 24", _if(lambda r: bool(r.study.protocol), "summary")),
    Item("Registration number and date", "CONSORT 2010 23", _never()),
    Item("Who had seen which data when the plan was fixed", "ICH E3 9.7.1", _never("no sealed plan")),
    Item("Purpose of each family: primary, secondary …", "CONSORT 2010 2b",
         _if(lambda r: all(family.purpose for family in r.families), "promised")),
    Item("Allocation of units to groups", "CONSORT 2010 3a; ARRIVE 2.0 1b",
         _if(lambda r: any(rows.allocated_by for rows in r.rows), "analysed")),
    Item("Basis of the sample size", "CONSORT 2010 7a; ARRIVE 2.0 2b", _never()),
    Item("Estimand of each hypothesis", "ICH E9(R1)", _if(_every(lambda one: one.estimand), "promised")),
    Item("Each family: members, m planned and computed", "SAMPL 10", _at("summary", "promised")),
    Item("Error rate, level, side, strong or weak control", "SAMPL 12, 13", _at("promised")),
    Item("Procedure and the dependence it needs", "ICH E9 5.6", _at("promised", "methods")),
    Item("Order and gates between families", "ICH E3 11.4.2.5", _at("promised")),
    Item("Null and alternative of each hypothesis", "ICH E3 11.4.2.7", _at("promised")),
    Item("Analysis set, and units per group in each analysis", "ARRIVE 2.0 3c; CONSORT 2010 16",
         _at("promised", "results")),
    Item("Tests with their assumptions", "SAMPL 8, 9", _at("methods")),
    Item("Summaries per group, estimate and interval", "CONSORT 2010 17a; SAMPL 5", _at("results")),
    Item("Statistic, df, each p, threshold, decision", "CDISC ARS; SAMPL 13", _at("results")),
    Item("Intervals that match the adjustment, or that none does", "NEJM guidance", _at("results")),
    Item("Reason for each analysis", "CDISC ARS", _if(_every(lambda one: one.reason), "promised")),
    Item("Flow of units per group, exclusions with reasons", "CONSORT 2010 13; ARRIVE 2.0 3", _at("analysed")),
    Item("Missing values per variable and group", "STROBE 14b", _at("analysed")),
    Item("Mechanism assumed for missing values", "STROBE 12c; ICH E3 11.4.2.2",
         _if(_every(lambda one: one.missing_mechanism), "promised")),
    Item("Derived variables", "SAMPL 3", _at("analysed")),
    Item("Looks at the data before this one", "ICH E3 11.4.2.3", _never("no history")),
    Item("Departures from the plan", "ICH E6(R3) 3.16.2; ICH E3 9.8", _never("no sealed plan")),
    Item("Answers to objections and cautions", "beforehand", _if(_explained, "warnings")),
    Item("Sensitivity and subgroup analyses", "ICH E3 11.4.2.8; CONSORT 2010 18",
         _if(lambda r: bool(r.supportive), "results")),
    Item("Limits of interpretation", "CONSORT 2010 20", _at("methods")),
)  # fmt: skip


def checklist(record: Record) -> Plain:
    """Write the section."""
    where = [item.where(record) for item in ITEMS]
    missing = sum(text.startswith(NOT_STATED) for text in where)
    body = tuple(
        Row(head=Cell(item.what), cells=(Cell(item.asked_by, "quiet"), Cell(text, _style(text))))
        for item, text in zip(ITEMS, where, strict=True)
    )
    return Plain(
        heading=HEADINGS["checklist"],
        sentences=(
            f"{len(ITEMS)} items that reporting standards ask for, with the section of this report that states each; "
            f"{missing} are not stated. A standard is named for the reader's convenience; that an item is met here "
            "says nothing about the rest of that standard.",
        ),
        tables=(
            Table(
                caption="Items and where they are stated", style="checklist", rows=body,
                head=tables.head("What must be stated", "Asked for by", "Stated in"),
            ),
        ),
    )  # fmt: skip


def _style(where: str) -> str:
    return "absent" if where.startswith(NOT_STATED) else "present"
