"""Whether a hypothesis gives its test what it takes beside the outcome: exposure, covariates, strata, time."""

from collections.abc import Iterator

from beforehand.hypothesis_tests.beside import BESIDE, Word
from beforehand.spec.availability import TAKEN_LATER
from beforehand.spec.checks.blocks import Block
from beforehand.spec.checks.data_sets import column
from beforehand.spec.expressions import Known
from beforehand.spec.hints import nearest
from beforehand.spec.model import EventOutcome, Groups, HypothesesFrom, PairOutcome
from beforehand.spec.places import Finding, Path

NEEDED: dict[Word, str] = {
    "exposure": "the column that holds for how long, or over how much, the events of a row were counted",
    "covariates": "the columns that the comparison is adjusted for",
    "strata": "the columns of the strata",
    "time": "the time until the event, as {column, event: {column, values}}",
}


def check_beside(block: Block) -> Iterator[Finding]:
    """Check these keys against what the test takes, and their columns against the data set."""
    if block.data_set is None or block.data_set.rows_are == "features" or block.test is None:
        return
    for word in BESIDE:
        written = getattr(block.written, word)
        if written is not None and word in TAKEN_LATER.get(block.test.name, ()):
            told = f"'{word}' for the test '{block.test.name}' is not available yet"
            yield Finding((*block.path, word), told, at_key=True)
        elif written is not None and word not in block.test.takes:
            told = f"{block.name} has '{word}', and the test '{block.test.name}' uses no '{word}'. Take it out."
            yield Finding((*block.path, word), told, at_key=True)
        elif written is None and word in block.test.needs:
            yield Finding(block.path, f"{block.name} needs the key '{word}': {NEEDED[word]}")
        elif written is not None:
            yield from _columns(block, word)


def _columns(block: Block, word: Word) -> Iterator[Finding]:
    path: Path = (*block.path, word)
    if word == "time":
        yield from _time(block)
    elif word == "exposure":
        yield from _fits(block, str(block.written.exposure), ("number",), path)
    else:
        kinds = ("number", "category") if word == "covariates" else ("category",)
        names: tuple[str, ...] = getattr(block.written, word)
        for place, name in enumerate(names):
            yield from _fits(block, name, kinds, (*path, place))


def _time(block: Block) -> Iterator[Finding]:
    time, path = block.written.time, (*block.path, "time")
    assert time is not None
    if isinstance(block.written, HypothesesFrom):
        told = f"{block.name} has one time for all, so each would ask the same. Write them out under 'hypotheses'."
        yield Finding(path, told, at_key=True)
    if getattr(block.written, "outcome", None) is not None:
        told = f"{block.name} has an outcome and a time: its outcome is the time until the event. Take 'outcome' out."
        yield Finding((*block.path, "outcome"), told, at_key=True)
    yield from _fits(block, time.column, ("number",), (*path, "column"))
    at = (*path, "event")
    yield from _fits(block, time.event.column, ("category", "text"), (*at, "column"))
    known = block.columns.get(time.event.column)
    levels = (known.levels if known else None) or ()
    for place, value in enumerate(time.event.values if levels else ()):
        if value not in levels:
            told = f"column '{time.event.column}' has no level '{value}' to count. {nearest(value, levels)}"
            yield Finding((*at, "values", place), told)
    if levels and set(levels) <= set(time.event.values):
        told = f"{block.name} counts every level of column '{time.event.column}', so every time is that of an event"
        yield Finding((*at, "values"), told)


def _fits(block: Block, name: str, kinds: tuple[str, ...], path: Path) -> Iterator[Finding]:
    """Check that a column is there, is of a fitting kind, and has no other part in the hypothesis."""
    if name not in block.columns:
        yield from column(name, block.columns, path, block.name)
        return
    found = _kind(block.columns[name])
    words = {"number": "a number or a count", "category": "a category with its levels", "text": "a text"}
    if found not in kinds:
        needed = " or ".join(words[kind] for kind in kinds)
        yield Finding(path, f"{block.name} needs {needed} where column '{name}' stands, which is a {found}")
    for key, names in _others(block).items():
        if name in names and key not in path:
            yield Finding(path, f"{block.name} has the column '{name}' twice: here and as its '{key}'")


def _kind(known: Known) -> str:
    return "category" if known.kind == "text" and known.levels else known.kind


def _others(block: Block) -> dict[str, tuple[str, ...]]:
    written = block.written
    outcome, groups = getattr(written, "outcome", None), written.groups
    names: tuple[str | None, ...] = (outcome,) if isinstance(outcome, str) else ()
    if isinstance(outcome, EventOutcome):
        names = (outcome.column,)
    elif isinstance(outcome, PairOutcome):
        names = (outcome.first, outcome.second)
    group = groups.column if isinstance(groups, Groups) else groups
    return {
        "outcome": tuple(str(name) for name in (*names, *(getattr(written, "outcomes", None) or ()))),
        "groups": (group,) if group else (),
    }
