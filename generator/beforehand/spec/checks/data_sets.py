"""Whether a data set fits itself: its columns, conditions, derived columns, sets."""

from collections.abc import Iterator

from beforehand.spec.availability import SUFFIXES, SUFFIXES_LATER
from beforehand.spec.expressions import ExpressionFault, Known, parse
from beforehand.spec.hints import nearest
from beforehand.spec.model import DataSet, Document
from beforehand.spec.places import Finding, Path
from beforehand.terms import ColumnKind, ValueKind

_KINDS: dict[ColumnKind, ValueKind] = {
    "number": "number",
    "count": "number",
    "category": "text",
    "text": "text",
    "date": "date",
}


def columns_of(data_set: DataSet) -> dict[str, Known]:
    """Give what is known of every column, those of the file first."""
    known = file_columns(data_set)
    for name, derived in data_set.derive.items():
        try:
            kind = parse(derived.is_).kind(known)
        except ExpressionFault:
            kind = "number"  # the fault is reported where the column is derived
        known[name] = Known(kind, derived.levels)
    return known


def file_columns(data_set: DataSet) -> dict[str, Known]:
    """Give what is known of the columns of the file."""
    return {name: Known(_KINDS[column.kind], column.levels) for name, column in data_set.columns.items()}


def condition(text: str, known: dict[str, Known], path: Path, name: str) -> Iterator[Finding]:
    """Check that a condition fits the columns and can be true or false."""
    try:
        kind = parse(text).kind(known)
    except ExpressionFault as fault:
        yield Finding(path, f"the 'where' of {name}: {fault.text}")
    else:
        if kind != "truth":
            yield Finding(path, f"the 'where' of {name} gives a {kind}, not a condition. Write a comparison.")


def column(written: str, known: dict[str, Known], path: Path, name: str) -> Iterator[Finding]:
    """Check that a column is there."""
    if written not in known:
        yield Finding(path, f"{name} names the column '{written}', which is not declared. {nearest(written, known)}")


def check_data_sets(document: Document) -> Iterator[Finding]:
    """Check every data set whose rows are observations."""
    for number, data_set in enumerate(document.data):
        path: Path = ("data", number)
        yield from _file(data_set, path)
        if data_set.rows_are == "observations":
            yield from _named_columns(data_set, path)
            yield from _exclusions(data_set, path)
            yield from _derived(data_set, path)
            known = columns_of(data_set)
            for place, entry in enumerate(data_set.analysis_sets):
                yield from condition(
                    entry.where, known, (*path, "analysis_sets", place, "where"), f"analysis set '{entry.id}'"
                )


def _file(data_set: DataSet, path: Path) -> Iterator[Finding]:
    if not data_set.file.endswith((*SUFFIXES, *SUFFIXES_LATER)):
        yield Finding(
            (*path, "file"),
            f"the 'file' of data set '{data_set.id}' must end in {', '.join(SUFFIXES)}; found '{data_set.file}'.",
        )


def _named_columns(data_set: DataSet, path: Path) -> Iterator[Finding]:
    known = file_columns(data_set)
    for key in ("identified_by", "independent_unit"):
        for place, written in enumerate(getattr(data_set, key) or ()):
            yield from column(written, known, (*path, key, place), f"'{key}' of data set '{data_set.id}'")
    allocated = data_set.allocated
    for key in ("by", "clusters", "pairs") if allocated else ():
        written = getattr(allocated, key)
        if written:
            yield from column(written, known, (*path, "allocated", key), f"'allocated' of data set '{data_set.id}'")
    for place, written in enumerate(allocated.strata or () if allocated else ()):
        name = f"'allocated' of data set '{data_set.id}'"
        yield from column(written, known, (*path, "allocated", "strata", place), name)


def _exclusions(data_set: DataSet, path: Path) -> Iterator[Finding]:
    known = file_columns(data_set)
    for place, exclusion in enumerate(data_set.exclude):
        name = f"the exclusion '{exclusion.because}'"
        at = (*path, "exclude", place, "where")
        derived = [used for used in parse(exclusion.where).names if used in data_set.derive]
        if derived:
            yield Finding(
                at,
                f"{name} uses the derived column '{derived[0]}'. Rows are excluded before columns are derived: "
                "write its expression out.",
            )
        else:
            yield from condition(exclusion.where, known, at, name)


def _derived(data_set: DataSet, path: Path) -> Iterator[Finding]:
    known = file_columns(data_set)
    for name, derived in data_set.derive.items():
        at = (*path, "derive", name)
        if name in data_set.columns:
            yield Finding(at, f"the derived column '{name}' has the name of a column of the file. Choose another.")
            continue
        try:
            kind = parse(derived.is_).kind(known)
        except ExpressionFault as fault:
            later = [used for used in parse(derived.is_).names if used in data_set.derive and used not in known]
            hint = f" Derive '{later[0]}' above it." if later and later[0] != name else ""
            yield Finding((*at, "is"), f"the derived column '{name}': {fault.text}{hint}")
            kind = "number"
        else:
            yield from _derived_kind(name, kind, bool(derived.levels), bool(derived.unit), at)
        known[name] = Known(kind, derived.levels)


def _derived_kind(name: str, kind: ValueKind, levels: bool, unit: bool, at: Path) -> Iterator[Finding]:
    if kind == "truth":
        yield Finding(
            (*at, "is"),
            f"the derived column '{name}' is a condition. Write pick(the condition, 'yes', 'no') and its levels.",
        )
    if levels and kind == "number":
        yield Finding((*at, "levels"), f"the derived column '{name}' is a number, and only text has levels")
    if unit and kind != "number":
        yield Finding((*at, "unit"), f"the derived column '{name}' is {kind}, and only a number has a unit")
