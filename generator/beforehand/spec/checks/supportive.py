"""Whether a supportive analysis asks the question of a hypothesis another way, and can be computed."""

from collections.abc import Iterator
from dataclasses import dataclass

from beforehand.spec.checks.beside import check_beside
from beforehand.spec.checks.blocks import Block, block_of, known_columns
from beforehand.spec.checks.designs import check_data, check_design
from beforehand.spec.checks.repeats import meaning
from beforehand.spec.checks.sides import check_level_is, check_null, check_options
from beforehand.spec.expand import written_out
from beforehand.spec.expressions import Known
from beforehand.spec.hints import nearest
from beforehand.spec.model import Document, Groups, NullHypothesis, Supportive, WrittenHypothesis
from beforehand.spec.options import with_defaults
from beforehand.spec.places import Finding, Path
from beforehand.spec.supportive import Changed, changed_by, side_of

_ROWS = ("where", "analysis_set", "data")


@dataclass(frozen=True)
class Compared:
    """A hypothesis and the supportive analysis of it, each with its data and its test."""

    asked: Supportive
    of: str
    """The id of the hypothesis."""
    base: Block
    block: Block


def check_supportive(document: Document, *, promise: bool) -> Iterator[Finding]:
    """Check every supportive analysis; a fault that its hypothesis has already is not said again."""
    known = known_columns(document)
    seen: dict[tuple[str, bytes], str] = {}
    for number, asked in enumerate(document.supportive):
        path: Path = ("supportive", number)
        found = []
        for changed in changed_by(document, asked):
            compared = _compared(document, known, asked, changed, (*path, "change"))
            found += [*_against(compared, document, promise=promise), *_repeated(compared, seen)]
        yield from dict.fromkeys(found)  # the members of a family give the same fault
        if not any(True for _ in changed_by(document, asked)):
            yield from _of_nothing(document, asked, path)


def _compared(
    document: Document, known: dict[str, dict[str, Known]], asked: Supportive, changed: Changed, path: Path
) -> Compared:
    name = f"supportive analysis '{asked.id}'"
    base, block = (
        block_of(document, known, changed.family, one.written, path=path, name=name)
        for one in (changed.base, changed.made)
    )
    return Compared(asked, changed.base.written.id, base, block)


def _of_nothing(document: Document, asked: Supportive, path: Path) -> Iterator[Finding]:
    """Say what a supportive analysis of no known hypothesis could be of."""
    family = next((one for one in document.families if one.id == asked.of.partition("/")[0]), None)
    source = family and family.hypotheses_from
    if family and source and source.outcomes is None:
        yield Finding(
            (*path, "of"),
            f"supportive analysis '{asked.id}' is of family '{family.id}', whose p-values are supplied: nothing in it "
            "can be computed another way",
        )
    elif family is None or any(True for _ in written_out(family, document)):  # else its pairs have a fault already
        ids = [family.id for family in document.families]
        ids += [one.written.id for family in document.families for one in written_out(family, document)]
        yield Finding(
            (*path, "of"),
            f"supportive analysis '{asked.id}' is of '{asked.of}', and no hypothesis or family has this id. "
            + nearest(asked.of, ids),
        )


def _against(compared: Compared, document: Document, *, promise: bool) -> Iterator[Finding]:
    """Check what is computed, without the faults of the hypothesis itself, and then what was changed."""
    already = {finding.text for finding in _sound(compared.base, document)}
    yield from (finding for finding in _sound(compared.block, document) if finding.text not in already)
    for check in (_changes_something, _same_question, _states_its_margin, _changes_rows):
        yield from check(compared)
    if promise and check_level_is(compared.block, document) and not check_level_is(compared.base, document):
        yield Finding(
            compared.block.path,
            f"{compared.block.name} has a side, and the promise does not say whose level it has. Write its key "
            "'level_is': one_sided when the level is that of one side, two_sided when both sides share it.",
        )


def _sound(block: Block, document: Document) -> Iterator[Finding]:
    yield from check_data(block, document)
    yield from check_design(block)
    yield from check_beside(block)
    yield from check_null(block, document)
    yield from check_options(block)


def _repeated(compared: Compared, seen: dict[tuple[str, bytes], str]) -> Iterator[Finding]:
    """Refuse the same analysis twice: it would count twice among those that agree."""
    first = seen.setdefault((compared.of, _computed(compared.block)), compared.asked.id)
    if first != compared.asked.id:
        yield Finding(
            compared.block.path[:-1],
            f"{compared.block.name} does what '{first}' does, and would count twice. Take one of them out.",
        )


def _changes_something(compared: Compared) -> Iterator[Finding]:
    if _computed(compared.base) == _computed(compared.block):
        yield Finding(
            compared.block.path,
            f"{compared.block.name} changes nothing: all that it names is so in its hypothesis already",
        )


def _computed(block: Block) -> bytes:
    """Write what is computed, with what is left out filled in."""
    written, test = block.written, block.test
    assert isinstance(written, WrittenHypothesis)
    usual = NullHypothesis(at=test.null_default) if test else None
    filled = {
        "data": block.data_set.id if block.data_set else written.data,
        "options": with_defaults(written.options, test) if test else written.options,
        "null_hypothesis": None if written.null_hypothesis == usual else written.null_hypothesis,
    }
    return meaning(written.model_copy(update=filled))


def _same_question(compared: Compared) -> Iterator[Finding]:
    """Refuse what turns the question round: the other side, or two margins in place of one value."""
    base, block = compared.base, compared.block
    own = "Write it as a hypothesis of its own."
    if len(base.null.margins) != len(block.null.margins):
        yield Finding(
            (*block.path, "null_hypothesis"),
            f"{block.name} asks about {_values(block)} and its hypothesis about {_values(base)}, which is another "
            f"question. {own}",
        )
        return
    if {_direction(base), _direction(block, turned=_swapped(base, block))} == {"above", "below"}:
        yield Finding(
            block.path,
            f"{block.name} asks for the other side than its hypothesis, which is another question. {own}",
        )


def _swapped(base: Block, block: Block) -> bool:
    before, after = base.written.groups, block.written.groups
    if not isinstance(before, Groups) or not isinstance(after, Groups):
        return False
    return (before.first, before.second) == (after.second, after.first)


def _values(block: Block) -> str:
    return "two margins" if len(block.null.margins) == 2 else "one value"


def _direction(block: Block, *, turned: bool = False) -> str | None:
    """Give the side that the claim is about, in the terms of the hypothesis' own first and second."""
    assert isinstance(block.written, WrittenHypothesis)
    side: str | None = side_of(block.written)
    side = block.written.claim_direction if side == "two_sided" else side
    return {"above": "below", "below": "above"}.get(str(side), side) if turned else side


def _states_its_margin(compared: Compared) -> Iterator[Finding]:
    """Refuse a margin that a change of test would silently give another meaning: 2 kg as a ratio of 2."""
    base, block = compared.base, compared.block
    kept = base.written.null_hypothesis if compared.asked.change.null_hypothesis is None else None
    if kept is None or base.test is None or block.test is None or base.test.parameter == block.test.parameter:
        return
    if "ratio" in (base.test.scale, block.test.scale):
        yield Finding(
            block.path,
            f"{block.name} keeps the null hypothesis of a test about {base.test.estimates} for one about "
            f"{block.test.estimates}. Name its own 'null_hypothesis' in the change.",
        )


def _changes_rows(compared: Compared) -> Iterator[Finding]:
    change = compared.asked.change
    if compared.asked.analysis == "subgroup" and all(getattr(change, key) is None for key in _ROWS):
        yield Finding(
            compared.block.path,
            f"{compared.block.name} is a subgroup, and its change names no rows: write 'where' or 'analysis_set'",
        )
