"""The files that were read, with their checksums."""

from beforehand.record.model import InputRecord, Record
from beforehand.report.view.headings import HEADINGS
from beforehand.report.view.model import Fact, Input, Inputs
from beforehand.spelling import checksum, integer

LISTED = 12


def inputs(record: Record) -> Inputs:
    """Write the section."""
    return Inputs(
        heading=HEADINGS["inputs"],
        files=tuple(_input(file) for file in record.inputs),
        sentences=(
            "The SHA-256 checksum is that of the file as it was read; inputs-sha256.txt lists them all. The content "
            "checksum stays the same when only the file format, or the order of rows or columns, changes. The "
            "content checksum of each column stands in record.json.",
            f"Particulars of the spec that change no number (dates, names, answers to warnings, paths) are in "
            f"particulars.json, SHA-256 {checksum(record.particulars_sha256)}.",
            "The version of beforehand, of Python and of each library that can decide a number or the look of a page "
            "stands in environment.json beside this report, and the spec itself in spec.yaml.",
        ),
    )


def _input(file: InputRecord) -> Input:
    facts = [Fact("Size", f"{integer(file.bytes)} bytes{_shape(file)}")]
    if file.missing_codes:
        facts.append(Fact("Missing codes", ", ".join(code or "(empty)" for code in file.missing_codes)))
    if file.rows:
        facts.append(Fact("Columns not declared", _listed(file.extra_columns) or "none"))
    facts.append(Fact("SHA-256", checksum(file.sha256), "checksum"))
    if file.content_sha256:
        facts.append(Fact("Content checksum", checksum(file.content_sha256), "checksum"))
    return Input(title=f"{file.id}: {file.file}", facts=tuple(facts))


def _shape(file: InputRecord) -> str:
    return f", {integer(file.rows)} rows, {integer(file.columns)} columns" if file.rows else ""


def _listed(names: tuple[str, ...]) -> str:
    if len(names) <= LISTED:
        return ", ".join(names)
    return f"{', '.join(names[:LISTED])} and {integer(len(names) - LISTED)} more"
