"""What a run knows of its data; and the way there: opened, checksummed, checked, excluded, derived, in this order."""

from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from beforehand.data import digests
from beforehand.data.checks import row_keys, typed_columns
from beforehand.data.derive import table_of
from beforehand.data.opening import open_input
from beforehand.data.read import FIRST_ROW, read_table
from beforehand.data.supplied import labelled_rows
from beforehand.data.table import Table
from beforehand.spec.expand import with_features
from beforehand.spec.expressions import Column
from beforehand.spec.model import DataSet, HypothesesFrom
from beforehand.spec.planned import Spec

__all__ = ["Dataset", "InputFile", "Table", "read_data", "with_members"]


@dataclass(frozen=True, kw_only=True)
class InputFile:
    """One checksummed input: a table, or the script that made one (which has no rows)."""

    id: str
    """The data set that it belongs to."""
    file: str
    """The path as the spec writes it."""
    bytes: int
    sha256: str
    rows: int = 0
    columns: int = 0
    content_sha256: str = ""
    column_sha256: dict[str, str] = field(default_factory=dict)
    extra_columns: tuple[str, ...] = ()
    """Columns of the file that the spec does not declare: checksummed as text, and not used."""


@dataclass(frozen=True, kw_only=True)
class Dataset:
    """Everything read for one spec."""

    inputs: tuple[InputFile, ...]
    tables: dict[str, Table]
    """By the id of the data set."""
    from_rows: dict[str, HypothesesFrom]
    """By family: the short form by which each row of a table makes one hypothesis."""
    rows_by_label: dict[str, dict[str, int]]
    """By such a family and then by what names its hypotheses: the row of the table, in the order of the rows."""

    @property
    def labels(self) -> dict[str, tuple[str, ...]]:
        """What names the hypotheses of each family that follows from the data."""
        return {family: tuple(rows) for family, rows in self.rows_by_label.items()}


def read_data(spec: Spec, *, data_root: Path | None = None) -> Dataset:
    """Read every data set of a spec; the faults of one file come together.

    ``data_root`` is a second folder in which the paths of the spec may lie; the spec's own folder comes first.
    """
    inputs: list[InputFile] = []
    tables: dict[str, Table] = {}
    for declared in spec.data:
        file, table = _read(declared, spec.folder, data_root)
        inputs.append(file)
        tables[declared.id] = table
        if declared.made_by_script:
            inputs.append(_script(declared.made_by_script, declared, spec.folder, data_root))
    from_rows = {family.id: family.from_data for family in spec.families if family.from_data}
    only = spec.data[0].id
    rows_by_label = {
        family: labelled_rows(tables[form.data or only], form, family) for family, form in from_rows.items()
    }
    return Dataset(inputs=tuple(inputs), tables=tables, from_rows=from_rows, rows_by_label=rows_by_label)


def with_members(spec: Spec, dataset: Dataset) -> Spec:
    """Expand the families whose members follow from the data; another number than planned is a fault."""
    return with_features(spec, dataset.labels) if dataset.labels else spec


def _read(declared: DataSet, folder: Path, data_root: Path | None) -> tuple[InputFile, Table]:
    raw = open_input(declared.file, folder=folder, data_root=data_root)
    text = read_table(raw, path=declared.file)
    typed = typed_columns(text, declared)
    order = _order(typed, declared)
    columns = {name: Column(c.values[order], c.missing[order], c.kind) for name, c in typed.items()}
    checksums = digests.of_table(columns)
    file = InputFile(
        id=declared.id,
        file=declared.file,
        bytes=len(raw),
        sha256=digests.of_bytes(raw),
        rows=text.rows,
        columns=len(text.header),
        content_sha256=checksums.content,
        column_sha256=checksums.columns,
        extra_columns=tuple(name for name in text.header if name not in declared.columns),
    )
    used = {name: columns[name] for name in declared.columns}
    return file, table_of(used, order + FIRST_ROW, declared)


def _order(columns: dict[str, Column], declared: DataSet) -> NDArray[np.intp]:
    """Sort the rows by what identifies them: numbers by size, all else by the code points of its text."""
    rows = next(iter(columns.values())).missing.size
    if not declared.identified_by:
        return np.arange(rows, dtype=np.intp)
    keys = row_keys(columns, declared.identified_by)
    return np.array(sorted(range(rows), key=keys.__getitem__), dtype=np.intp)


def _script(path: str, declared: DataSet, folder: Path, data_root: Path | None) -> InputFile:
    raw = open_input(path, folder=folder, data_root=data_root)
    return InputFile(id=declared.id, file=path, bytes=len(raw), sha256=digests.of_bytes(raw))
