"""Methods and references actually used, how numbers are written, cautions, and the empty block for signatures."""

from beforehand.record.model import MethodRecord, Record
from beforehand.report.characters import replaced_characters
from beforehand.report.view import tables
from beforehand.report.view.headings import HEADINGS
from beforehand.report.view.model import Cell, Methods, Row, Table
from beforehand.spelling import INTERVAL_RULE, P_RULE, checksum

CAUTIONS = (
    "This report replaces neither a qualified statistician nor the rules of the authority it is addressed to.",
    "Clinical and safety decisions defer to licensed practice and to local regulation.",
    "The results concern only the data analysed. The report should be passed on only as a whole, with its folder.",
    "What beforehand cannot know: data seen or analyses run on another machine, files that were deleted, and whether "
    "the rows are what the spec says they are.",
)
SIGNING = ("Author", "Reviewer", "Approver")


def methods(record: Record, number: str, results_sha256: str) -> Methods:
    """Write the section."""
    return Methods(
        heading=HEADINGS["methods"],
        table=Table(
            caption="Methods used in this run, with their references",
            head=tables.head("Method", "Assumes, or needs", "p-value", "Reference"),
            rows=tuple(_method(method) for method in record.methods),
            style="methods",
        ),
        spelling=(
            P_RULE,
            INTERVAL_RULE,
            "Full precision is kept in tests.csv and record.json.",
            *_replaced(record),
        ),
        cautions=CAUTIONS,
        sign_off=Table(
            caption=f"Sign-off of report {number}",
            head=tables.head("Meaning", "Printed name", "Date and time (UTC)", "Signature"),
            rows=tuple(Row(head=Cell(who), cells=(Cell(""), Cell(""), Cell(""))) for who in SIGNING),
            notes=(
                "Left empty by beforehand. A signature is for the results with this checksum (SHA-256 of record.json): "
                f"{checksum(results_sha256)}.",
            ),
            style="sign-off",
        ),
    )


def _replaced(record: Record) -> tuple[str, ...]:
    codes = replaced_characters(record)
    if not codes:
        return ()
    return (
        f"The fonts of this report lack {len(codes)} of the characters in the study's texts; they are shown by their "
        f"codes: {', '.join(codes)}.",
    )


def _method(method: MethodRecord) -> Row:
    return Row(
        head=Cell(method.title, note=method.kind),
        cells=(Cell("; ".join(method.assumes)), Cell(method.p_is or "adjusts p-values"), Cell(method.reference)),
    )
