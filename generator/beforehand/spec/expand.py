"""From the short forms to single hypotheses with every default filled in, from the spec alone."""

import dataclasses
import itertools
import re
from collections import Counter
from collections.abc import Iterator, Mapping

from beforehand.errors import Fault, SpecFault
from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
from beforehand.multiplicity.contract import PROCEDURES
from beforehand.spec.model import (
    Comparisons,
    Document,
    EachWith,
    EventOutcome,
    Family,
    Groups,
    HypothesesFrom,
    Hypothesis,
    NullHypothesis,
    Outcome,
    PerHypothesis,
    Promise,
    StudyPromise,
    WrittenHypothesis,
)
from beforehand.spec.options import with_defaults
from beforehand.spec.planned import PlannedFamily, Spec

MOST_NAMED = 10  # labels; a longer list helps nobody
_RESERVED = "/-%"
_PLACEHOLDER = re.compile(r"\{(group|first|second|feature)\}")


@dataclasses.dataclass(frozen=True)
class WrittenOut:
    """One member of a family as if it had been written by hand, before any default is filled in."""

    written: WrittenHypothesis
    feature: str | None = None
    """The column or the label that a short form made it of."""


def escape(text: str) -> str:
    """Write a text of the data so that it can be part of an id: ``/ - %`` and unprintable characters as %XX."""
    return "".join(
        character
        if character.isprintable() and character not in _RESERVED
        else "".join(f"%{byte:02X}" for byte in character.encode())
        for character in text
    )


def expand(document: Document) -> tuple[PlannedFamily, ...]:
    """Give the families with the members that follow from the spec alone."""
    return tuple(_planned(family, document) for family in document.families)


def with_features(spec: Spec, labels: Mapping[str, tuple[str, ...]]) -> Spec:
    """Give the spec with the members that the rows of the data make, in the order of their labels.

    Raises SpecFault where a family has another number of rows than the spec plans.
    """
    faults = [
        fault for family in spec.families if family.id in labels for fault in _count(spec, family, labels[family.id])
    ]
    if faults:
        raise SpecFault(spec.path.name, faults)
    return dataclasses.replace(
        spec,
        families=tuple(
            _with_rows(spec.document, family, labels[family.id]) if family.id in labels else family
            for family in spec.families
        ),
    )


def _count(spec: Spec, family: PlannedFamily, labels: tuple[str, ...]) -> Iterator[Fault]:
    place = (*spec.place_of(family.id), "hypotheses_from")
    if len(labels) != family.planned:
        yield spec.fault(
            (*place, "planned"),
            f"family '{family.id}' plans {family.planned} hypotheses and the data have {len(labels)}. "
            "Correct the data, or the number and the reason for it.",
        )
    for label in sorted(label for label, rows in Counter(labels).items() if rows > 1)[:MOST_NAMED]:
        yield spec.fault(
            (*place, "each"), f"the label '{label}' stands in several rows; in family '{family.id}' each names one."
        )


def _with_rows(document: Document, family: PlannedFamily, labels: tuple[str, ...]) -> PlannedFamily:
    written = next(entry for entry in document.families if entry.id == family.id)
    if family.from_data is None:
        return family
    members = (_written_out(written, family.from_data, escape(label), feature=label) for label in labels)
    return dataclasses.replace(family, members=tuple(filled(document, written, member) for member in members))


def _planned(family: Family, document: Document) -> PlannedFamily:
    members = tuple(filled(document, family, member) for member in written_out(family, document))
    source = family.hypotheses_from
    from_data = _with_defaults(source, document) if source and source.outcomes is None else None
    return PlannedFamily(
        id=family.id,
        question=family.question,
        purpose=family.purpose,
        procedure=family.procedure,
        procedure_options=with_defaults(family.options, PROCEDURES[family.procedure]),
        promise=family.promise or _of_study(document.promise),
        success=family.success,
        members=members,
        planned=from_data.planned or 0 if from_data else len(members),
        from_data=from_data,
        stands_apart=family.promise is not None,
        sure_share=_sure_share(family, document),
    )


def _sure_share(family: Family, document: Document) -> float | None:
    scheme, order = document.promise.across_families, document.promise.order or ()
    if family.promise is None and family.share is not None:
        return float(family.share)
    depends = scheme == "graph" or (scheme == "parallel" and family.id not in order[:1])
    return None if depends and family.promise is None else 1.0


def _with_defaults(source: HypothesesFrom, document: Document) -> HypothesesFrom:
    """Fill in what every member will have."""
    filled = {
        "data": source.data or document.data[0].id,
        "alternative": source.alternative or "two_sided",
        "options": with_defaults(source.options, STATISTICAL_TESTS[source.test]),
    }
    return source.model_copy(update=filled)


def _of_study(promise: StudyPromise) -> Promise:
    shared = {name: getattr(promise, name) for name in Promise.model_fields}
    return Promise.model_construct(_fields_set={name for name in shared if shared[name] is not None}, **shared)


def written_out(family: Family, document: Document) -> Iterator[WrittenOut]:
    """Undo the short forms: each member that follows from the spec alone as if it had been written by hand."""
    for form in family.written:
        if isinstance(form, WrittenHypothesis):
            yield WrittenOut(form)
        elif isinstance(form, Comparisons):
            for first, second in pairs_of(form, levels_of(document, form)):
                groups = Groups(column=form.groups, first=first, second=second)
                name = f"{escape(first)}-{escape(second)}"
                yield _written_out(family, form, name, outcome=form.outcome, groups=groups)
        else:
            for column in form.outcomes or ():
                outcome = EventOutcome(column=column, values=form.values) if form.values else column
                yield _written_out(family, form, escape(column), outcome=outcome, groups=form.groups, feature=column)


def _written_out(
    family: Family,
    form: PerHypothesis,
    name: str,
    *,
    outcome: Outcome | None = None,
    groups: Groups | None = None,
    feature: str | None = None,
) -> WrittenOut:
    shared = {key: getattr(form, key) for key in PerHypothesis.model_fields}
    shared.update(id=f"{family.id}/{name}", outcome=outcome, groups=groups)
    return WrittenOut(WrittenHypothesis.model_construct(_fields_set=set(shared), **shared), feature)


def levels_of(document: Document, written: Comparisons) -> tuple[str, ...]:
    """Give the declared levels of the column whose pairs are compared."""
    named = written.data or document.data[0].id
    data_set = next((entry for entry in document.data if entry.id == named), None)
    column = data_set and (data_set.columns.get(written.groups) or data_set.derive.get(written.groups))
    return (column.levels if column else None) or ()


def pairs_of(written: Comparisons, levels: tuple[str, ...]) -> list[tuple[str, str]]:
    """Give the pairs in the order in which they are tested: first minus second."""
    if isinstance(written.pairs, EachWith):
        reference = written.pairs.each_with
        return [(level, reference) for level in levels if level != reference]
    return [(later, earlier) for earlier, later in itertools.combinations(levels, 2)]


def filled(document: Document, family: Family, one: WrittenOut) -> Hypothesis:
    """Make one member: what is written, and a value for what is left out."""
    written, test = one.written, STATISTICAL_TESTS[one.written.test]
    shared = {key: getattr(written, key) for key in PerHypothesis.model_fields}
    shared.update(
        id=written.id,
        family=family.id,
        data=written.data or document.data[0].id,
        null_hypothesis=written.null_hypothesis or NullHypothesis(at=test.null_default),
        alternative=written.alternative or ("two_sided" if test.design == "supplied" else None),
        claim=_claim(written.claim, written.groups, one.feature),
        options=with_defaults(written.options, test),
        purpose=written.purpose or family.purpose,
        reason=written.reason or family.reason,
        outcome=written.outcome,
        groups=written.groups,
        feature=one.feature,
    )
    return Hypothesis.model_construct(_fields_set=set(shared), **shared)


def _claim(claim: str | None, groups: Groups | None, feature: str | None) -> str | None:
    """Replace the names in braces by what they stand for; every other brace is text."""
    words = {"feature": feature}
    if groups:
        words.update(group=groups.first, first=groups.first, second=groups.second)
    return claim and _PLACEHOLDER.sub(lambda match: words.get(match[1]) or match[0], claim)


__all__ = ["WrittenOut", "escape", "expand", "filled", "with_features", "written_out"]
