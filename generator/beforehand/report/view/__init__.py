"""From the record to words: everything the templates print, with every number already written."""

from beforehand.record.canonical import record_bytes, report_number, sha256
from beforehand.record.model import Record
from beforehand.report.figures.model import Figure
from beforehand.report.view.analysed import analysed
from beforehand.report.view.appendix import appendix
from beforehand.report.view.checklist import checklist
from beforehand.report.view.firm import firmness
from beforehand.report.view.front import front
from beforehand.report.view.headings import HEADINGS
from beforehand.report.view.inputs import inputs
from beforehand.report.view.lines import lines_of, supporting_lines
from beforehand.report.view.methods import methods
from beforehand.report.view.model import View
from beforehand.report.view.promised import promised
from beforehand.report.view.results import results
from beforehand.report.view.second import second
from beforehand.report.view.warned import departures, warning_section

__all__ = ["View", "view"]


def view(record: Record, figures: tuple[Figure, ...]) -> View:
    """Put a record into words."""
    lines = lines_of(record)
    digits = sha256(record_bytes(record))
    number = report_number(record, digits)
    return View(
        title=record.study.title,
        identifier=record.study.identifier,
        number=number,
        short_checksum=digits[:8],
        contents=tuple(HEADINGS.values()),
        front=front(record, lines, digits),
        promised=promised(record, lines, figures),
        inputs=inputs(record),
        analysed=analysed(record),
        results=results(record, lines, figures),
        warnings=warning_section(record),
        departures=departures(),
        firmness=firmness(record, lines),
        second=second(record),
        checklist=checklist(record),
        methods=methods(record, number, digits),
        appendix=appendix(record, lines, supporting_lines(record)),
    )
