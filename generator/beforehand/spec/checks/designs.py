"""Whether a hypothesis gives its test what the test is about: data, outcome, groups, pairs."""

from collections.abc import Iterator

from beforehand.spec.checks.blocks import Block
from beforehand.spec.checks.data_sets import column, condition
from beforehand.spec.expressions import Known
from beforehand.spec.hints import nearest
from beforehand.spec.model import (
    Comparisons,
    DataSet,
    Description,
    Document,
    EachWith,
    EventOutcome,
    Groups,
    HypothesesFrom,
    PairOutcome,
    PerHypothesis,
)
from beforehand.spec.places import Finding, Path


def check_data(block: Block, document: Document) -> Iterator[Finding]:
    """Check that the data set can be told, and the rows in it."""
    yield from check_rows(block.written, block.data_set, block.columns, document, path=block.path, name=block.name)


def check_rows(
    written: PerHypothesis | Description,
    data_set: DataSet | None,
    columns: dict[str, Known],
    document: Document,
    *,
    path: Path,
    name: str,
) -> Iterator[Finding]:
    """Check the data set, the condition and the analysis set that something is about."""
    if data_set is None:
        if written.data is None:
            yield Finding(path, f"{name} needs the key 'data', because there are several data sets")
        else:
            ids = [one.id for one in document.data]
            yield Finding(
                (*path, "data"), f"{name} is about the data set '{written.data}'. {nearest(written.data, ids)}"
            )
        return
    if written.where:
        yield from condition(written.where, columns, (*path, "where"), name)
    sets = [entry.id for entry in data_set.analysis_sets]
    if written.analysis_set is not None and written.analysis_set not in sets:
        yield Finding(
            (*path, "analysis_set"),
            f"{name} is about the analysis set '{written.analysis_set}', which data set '{data_set.id}' does not have. "
            f"{nearest(written.analysis_set, sets)}",
        )


def check_design(block: Block) -> Iterator[Finding]:
    """Check outcome, groups and pairs against what the test takes."""
    if block.data_set is None or block.data_set.rows_are == "features":
        return
    if block.test is None:
        yield from _groups(block)
    elif block.supplied:
        yield from _supplied(block)
    else:
        yield from _shape(block)
        yield from _outcomes(block)
        yield from _groups(block)
        if block.written.matched_by is not None:
            yield from column(block.written.matched_by, block.columns, (*block.path, "matched_by"), block.name)


def _shape(block: Block) -> Iterator[Finding]:
    written, test = block.written, block.test
    assert test is not None
    wide = isinstance(getattr(written, "outcome", None), PairOutcome)
    takes = f"the test '{test.name}'"
    if isinstance(written, HypothesesFrom):
        yield from _many(block, written)
    elif written.outcome is None and "time" not in test.takes:
        yield Finding(block.path, f"{block.name} needs the key 'outcome': the column that is tested")
    if test.design == "association":
        yield from _association(block, wide=wide)
    elif test.design != "pairs":
        if wide:
            yield Finding(
                (*block.path, "outcome"), f"{block.name} has an outcome of two columns, and {takes} takes one column"
            )
        if written.matched_by is not None:
            yield Finding(
                (*block.path, "matched_by"), f"{block.name} has 'matched_by', and {takes} is not a test of pairs"
            )
    if test.design == "one_sample" and written.groups is not None:
        yield Finding(
            (*block.path, "groups"),
            f"{block.name} has 'groups', and {takes} is about one sample. Choose its rows with 'where'.",
        )
    if test.design in ("two_groups", "contrast") and written.groups is None:
        yield Finding(
            block.path, f"{block.name} needs the key 'groups': {takes} compares two. Write {{column, first, second}}."
        )
    if test.design == "pairs":
        yield from _pairs(block, wide=wide)


def _pairs(block: Block, *, wide: bool) -> Iterator[Finding]:
    written = block.written
    if wide and (written.groups is not None or written.matched_by is not None):
        key = "groups" if written.groups is not None else "matched_by"
        yield Finding(
            (*block.path, key),
            f"{block.name} names its pairs twice: by two columns of a row, and by '{key}'. Keep one of them.",
        )
    if not wide and (written.groups is None or written.matched_by is None):
        yield Finding(
            block.path,
            f"{block.name} does not say what its pairs are. Write outcome: {{first, second}} for two columns of a "
            "row, or 'groups' and 'matched_by' for two rows.",
        )


def _association(block: Block, *, wide: bool) -> Iterator[Finding]:
    if not wide:
        yield Finding(
            block.path,
            f"{block.name} does not say which two columns it relates. Write outcome: {{first, second}} in "
            "'hypotheses'.",
        )
    for key in ("groups", "matched_by"):
        if getattr(block.written, key) is not None:
            told = f"{block.name} has '{key}', and the test '{block.written.test}' relates two columns of one row"
            yield Finding((*block.path, key), told)


def _many(block: Block, written: HypothesesFrom) -> Iterator[Finding]:
    if written.outcomes is None or written.each != "outcome":
        yield Finding(
            (*block.path, "each"),
            f"{block.name} must say each: outcome, and list the columns under 'outcomes': "
            f"the test '{written.test}' computes its p-values from columns.",
        )
    for key in ("p", "estimate", "lower", "upper", "origin"):
        if getattr(written, key) is not None:
            yield Finding((*block.path, key), f"{block.name} has '{key}', which only supplied_p takes")
    if written.planned is not None and written.outcomes and written.planned != len(written.outcomes):
        yield Finding(
            (*block.path, "planned"),
            f"{block.name} plans {written.planned} hypotheses and lists {len(written.outcomes)} outcomes",
        )


def _supplied(block: Block) -> Iterator[Finding]:
    written = block.written
    if not isinstance(written, HypothesesFrom):
        yield Finding((*block.path, "test"), f"{block.name} has supplied p-values, which stand in 'hypotheses_from'")
        return
    for key, doc in (("p", "the column of p-values"), ("planned", "their number"), ("origin", "who computed them")):
        if getattr(written, key) is None:
            yield Finding(block.path, f"{block.name} needs the key '{key}': {doc}")
    for key in ("outcomes", "values", "groups", "matched_by", "null_hypothesis"):
        if getattr(written, key) is not None:
            yield Finding((*block.path, key), f"{block.name} has '{key}', which supplied p-values don't take")
    if (written.lower is None) != (written.upper is None):
        yield Finding(block.path, f"{block.name} needs both ends of the interval: 'lower' and 'upper'")
    yield from _of_kind(block, written.each, "text", (*block.path, "each"))
    for key in ("p", "estimate", "lower", "upper"):
        if getattr(written, key) is not None:
            yield from _of_kind(block, getattr(written, key), "number", (*block.path, key))


def _of_kind(block: Block, name: str, kind: str, path: Path) -> Iterator[Finding]:
    if name not in block.columns:
        yield from column(name, block.columns, path, block.name)
    elif block.columns[name].kind != kind:
        needed = "a number or a count" if kind == "number" else "text or a category"
        found = block.columns[name].kind
        yield Finding(path, f"{block.name} needs {needed} where column '{name}' stands, which is a {found}")


def _outcomes(block: Block) -> Iterator[Finding]:
    written, path = block.written, (*block.path, "outcome")
    if block.test is not None and "time" in block.test.takes:
        return  # the event stands under 'time'
    if isinstance(written, HypothesesFrom):
        for place, name in enumerate(written.outcomes or ()):
            yield from _outcome(block, name, written.values, (*block.path, "outcomes", place), "values")
    elif isinstance(written.outcome, EventOutcome):
        yield from _outcome(block, written.outcome.column, written.outcome.values, path, "outcome")
    elif isinstance(written.outcome, PairOutcome):
        if block.test is None or not block.test.aligned:
            return
        for key in ("first", "second"):
            yield from _outcome(block, getattr(written.outcome, key), None, (*path, key), "outcome")
        if written.outcome.first == written.outcome.second:
            does, what = ("relates", "to") if block.test.design == "association" else ("compares", "with")
            yield Finding(path, f"{block.name} {does} column '{written.outcome.first}' {what} itself")
    elif written.outcome is not None:
        yield from _outcome(block, written.outcome, None, path, "outcome")


def _outcome(block: Block, name: str, values: tuple[str, ...] | None, path: Path, key: str) -> Iterator[Finding]:
    test = block.test
    assert test is not None
    if name == _group_column(block):
        yield Finding(path, f"{block.name} has '{name}' both as outcome and as groups")
    elif test.outcome != "event" and values:
        at = path if key == "outcome" else (*block.path, key)
        yield Finding(at, f"{block.name} counts events, and the test '{test.name}' takes numbers. Name a column.")
    elif test.outcome == "event" and not values:
        how = "Write outcome: {column, values}." if key == "outcome" else "Write the key 'values'."
        yield Finding(path, f"{block.name} does not say which values count: the test '{test.name}' takes events. {how}")
    elif test.outcome == "count" and name in block.columns and not _is_count(block, name):
        yield Finding(
            path,
            f"{block.name} needs counts, and column '{name}' is not declared as {{kind: count}}: whole numbers from 0 "
            "on, of a column of the file",
        )
    else:
        yield from _of_kind(block, name, "text" if test.outcome == "event" else "number", path)
        yield from _values(block, name, values or (), path, key)


def _is_count(block: Block, name: str) -> bool:
    declared = block.data_set.columns.get(name) if block.data_set else None
    return declared is not None and declared.kind == "count"


def _values(block: Block, name: str, values: tuple[str, ...], path: Path, key: str) -> Iterator[Finding]:
    levels = block.columns[name].levels if name in block.columns else None
    base = (*path, "values") if key == "outcome" else (*block.path, "values")
    for place, value in enumerate(values if levels else ()):
        if value not in (levels or ()):
            yield Finding(
                (*base, place), f"column '{name}' has no level '{value}' to count. {nearest(value, levels or ())}"
            )
    if levels and set(levels) <= set(values):
        yield Finding(base, f"{block.name} counts every level of column '{name}', so every row is an event")


def _group_column(block: Block) -> str | None:
    groups = block.written.groups
    return groups.column if isinstance(groups, Groups) else groups


def _groups(block: Block) -> Iterator[Finding]:
    name = _group_column(block)
    if name is None:
        return
    path: Path = (*block.path, "groups")
    at = (*path, "column") if isinstance(block.written.groups, Groups) else path
    if name not in block.columns:
        yield from column(name, block.columns, at, block.name)
        return
    levels = block.columns[name].levels
    if not levels:
        yield Finding(
            at,
            f"{block.name} compares groups of column '{name}', whose levels are not declared. "
            "Declare it as {kind: category, levels: [...]}.",
        )
        return
    for key, level in _named_levels(block):
        if level not in levels:
            yield Finding((*block.path, *key), f"column '{name}' has no level '{level}'. {nearest(level, levels)}")
    groups = block.written.groups
    if isinstance(groups, Groups) and groups.first == groups.second:
        yield Finding(path, f"{block.name} compares the level '{groups.first}' with itself")


def _named_levels(block: Block) -> list[tuple[Path, str]]:
    written = block.written
    if isinstance(written.groups, Groups):
        return [(("groups", "first"), written.groups.first), (("groups", "second"), written.groups.second)]
    if isinstance(written, Comparisons) and isinstance(written.pairs, EachWith):
        return [(("pairs", "each_with"), written.pairs.each_with)]
    return []
