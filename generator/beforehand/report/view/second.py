"""The second computation: how far the two disagree at most."""

from beforehand.record.model import AgreementRecord, Record
from beforehand.report.view import tables
from beforehand.report.view.headings import HEADINGS
from beforehand.report.view.model import Cell, Plain, Row, Table
from beforehand.spelling import NOTHING, integer, scientific


def second(record: Record) -> Plain:
    """Write the section."""
    found = [table for table in (_agreement(record), _routes(record)) if table.rows]
    return Plain(
        heading=HEADINGS["second"],
        sentences=(
            "Every decided statistic and every adjusted p was worked out a second time, from the columns of the data "
            "on, by another formula, algorithm or library. A different decision, or a disagreement above what is "
            "accepted, would have stopped this report.",
            "This guards against slips of computation; it is not independent double programming.",
        ),
        tables=tuple(found),
    )


def _agreement(record: Record) -> Table:
    names = ("Quantity", "Compared", "Largest relative disagreement", "Accepted", "Where it stands")
    body = tuple(
        Row(
            head=Cell(one.quantity),
            cells=(
                Cell(integer(one.compared), "number"), Cell(_size(one)), Cell(_power(one.bound)),
                Cell(one.about or NOTHING),
            ),
        )
        for one in record.agreement
    )  # fmt: skip
    return Table(caption="Agreement of the two computations", head=tables.head(*names, numbers=(1,)), rows=body)


def _size(one: AgreementRecord) -> str:
    return _power(one.largest) if one.largest else "none"


def _power(value: float) -> str:
    return scientific(value, 2).replace("1.0\N{NO-BREAK SPACE}×\N{NO-BREAK SPACE}", "")


def _routes(record: Record) -> Table:
    body = tuple(
        Row(head=Cell(method.title), cells=(Cell(method.second_route),))
        for method in record.methods
        if method.second_route
    )
    return Table(caption="The second way", head=tables.head("Method", "How it was worked out again"), rows=body)
