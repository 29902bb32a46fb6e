"""How many hypotheses a family will have, and what they will be called, as far as the spec alone says it."""

from beforehand.spec.expand import escape, levels_of, pairs_of
from beforehand.spec.model import Comparisons, Document, Family, HypothesesFrom


def size_of(document: Document, family: Family) -> int | None:
    """Give the number of hypotheses of a family; None where it can't be told."""
    if isinstance(family.hypotheses_from, HypothesesFrom) and not family.hypotheses_from.outcomes:
        return family.hypotheses_from.planned
    members = members_of(document, family)
    return None if members is None else len(members)


def members_of(document: Document, family: Family) -> tuple[str, ...] | None:
    """Give the ids of the members of a family; None where they come from the rows of the data, or can't be told."""
    if family.hypotheses is not None:
        return tuple(hypothesis.id for hypothesis in family.hypotheses)
    (written,) = family.written
    if isinstance(written, HypothesesFrom):
        return tuple(f"{family.id}/{escape(column)}" for column in written.outcomes) if written.outcomes else None
    known = [data_set.id for data_set in document.data]
    if not isinstance(written, Comparisons) or (written.data or known[0]) not in known:
        return None
    pairs = pairs_of(written, levels_of(document, written))
    return tuple(f"{family.id}/{escape(first)}-{escape(second)}" for first, second in pairs)
