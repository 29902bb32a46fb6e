"""Whether a table without p-values can be made of the columns that it names."""

from collections.abc import Iterator

from beforehand.spec.checks.blocks import data_set_of, known_columns
from beforehand.spec.checks.data_sets import column
from beforehand.spec.checks.designs import check_rows
from beforehand.spec.expressions import Known
from beforehand.spec.model import Description, Document
from beforehand.spec.places import Finding, Path


def check_descriptions(document: Document) -> Iterator[Finding]:
    """Check every description: its rows, the columns that it describes, and the groups beside one another."""
    known = known_columns(document)
    for number, asked in enumerate(document.describe):
        path: Path = ("describe", number)
        name = f"description '{asked.id}'"
        data_set = data_set_of(document, asked.data)
        columns = known[data_set.id] if data_set else {}
        yield from check_rows(asked, data_set, columns, document, path=path, name=name)
        if data_set is not None and data_set.rows_are == "observations":
            yield from _columns(asked, columns, path, name)
            yield from _groups(asked, columns, path, name)


def _columns(asked: Description, columns: dict[str, Known], path: Path, name: str) -> Iterator[Finding]:
    for place, written in enumerate(asked.columns):
        at = (*path, "columns", place)
        yield from column(written, columns, at, name)
        if written in columns and columns[written].kind == "text" and not columns[written].levels:
            yield Finding(
                at,
                f"{name} names the column '{written}', which is text without declared levels: there is nothing to "
                "count. Declare it as {kind: category, levels: [...]}.",
            )
        if written == asked.by:
            yield Finding(at, f"{name} has '{written}' both as a column and as 'by'")


def _groups(asked: Description, columns: dict[str, Known], path: Path, name: str) -> Iterator[Finding]:
    if asked.by is None:
        return
    yield from column(asked.by, columns, (*path, "by"), name)
    if asked.by in columns and not columns[asked.by].levels:
        yield Finding(
            (*path, "by"),
            f"{name} sets groups of column '{asked.by}' beside one another, whose levels are not declared. "
            "Declare it as {kind: category, levels: [...]}.",
        )
