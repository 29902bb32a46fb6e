"""Supportive analyses: the hypothesis whose question they ask, with the named change made and all else as it was."""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from beforehand.hypothesis_tests.beside import BESIDE
from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
from beforehand.spec.expand import WrittenOut, filled, written_out
from beforehand.spec.model import Change, Document, Family, NullHypothesis, Supportive, WrittenHypothesis
from beforehand.spec.planned import PlannedSupportive
from beforehand.terms import Alternative

_SIDES: dict[str, Alternative] = {"at_most": "above", "at_least": "below"}


@dataclass(frozen=True)
class Changed:
    """A hypothesis, and what a supportive analysis makes of it; both as if they had been written by hand."""

    family: Family
    base: WrittenOut
    made: WrittenOut


def supportive_analyses(document: Document) -> tuple[PlannedSupportive, ...]:
    """Expand every supportive analysis; one that is of a family becomes one of each of its members."""
    return tuple(
        PlannedSupportive(
            id=one.made.written.id,
            asked=asked.id,
            of=one.base.written.id,
            analysis=asked.analysis,
            because=asked.because,
            hypothesis=filled(document, one.family, one.made),
        )
        for asked in document.supportive
        for one in changed_by(document, asked)
    )


def changed_by(document: Document, asked: Supportive) -> Iterator[Changed]:
    """Find the hypotheses that a supportive analysis is of: the one it names, or every member of that family."""
    for family in document.families:
        for base in written_out(family, document):
            if asked.of in (family.id, base.written.id):
                member = base.written.id.removeprefix(f"{family.id}/")
                id = f"{asked.id}/{member}" if asked.of == family.id else asked.id
                yield Changed(family, base, WrittenOut(_made(base.written, asked.change, id), base.feature))


def side_of(written: WrittenHypothesis) -> Alternative | None:
    """Give the side on which a hypothesis is rejected; None where its null hypothesis has two margins."""
    null = written.null_hypothesis or NullHypothesis(at=0.0)
    return _SIDES.get(null.form, written.alternative if null.form == "at" else None)


def _made(base: WrittenHypothesis, change: Change, id: str) -> WrittenHypothesis:
    """Make the change, and bring along what follows from it: the options of another test, the side of another null.

    What another test doesn't take beside the outcome is left behind: a comparison without covariates is another test.
    """
    update: dict[str, Any] = {key: getattr(change, key) for key in change.model_fields_set}
    if update.get("test", base.test) != base.test:
        update.setdefault("options", {})
        for word in BESIDE if update["test"] in STATISTICAL_TESTS else ():
            if word not in STATISTICAL_TESTS[update["test"]].takes:
                update.setdefault(word, None)
    if change.null_hypothesis:
        sided = change.null_hypothesis.form != "at"
        update.setdefault("alternative", None if sided else side_of(base))
        if not sided:
            update.setdefault("margin_basis", None)
    made = base.model_copy(update={**update, "id": id})
    if made.claim_direction is None and side_of(made) == "two_sided" and side_of(base) in ("above", "below"):
        return made.model_copy(update={"claim_direction": side_of(base)})
    if side_of(made) in ("above", "below"):
        return made.model_copy(update={"claim_direction": None})
    return made
