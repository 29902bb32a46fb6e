"""What must fit together across the keys of a spec."""

from collections.abc import Iterator

from beforehand.spec.checks.beside import check_beside
from beforehand.spec.checks.blocks import blocks_of
from beforehand.spec.checks.compared import check_compared
from beforehand.spec.checks.data_sets import check_data_sets
from beforehand.spec.checks.descriptions import check_descriptions
from beforehand.spec.checks.designs import check_data, check_design
from beforehand.spec.checks.graphs import check_graph
from beforehand.spec.checks.identifiers import check_answers, check_assumptions, check_ids
from beforehand.spec.checks.promises import check_levels, check_procedure, check_scheme
from beforehand.spec.checks.repeats import check_repeats
from beforehand.spec.checks.sharing import check_separable, check_shares, check_truncation
from beforehand.spec.checks.sides import check_claim, check_direction, check_null, check_options
from beforehand.spec.checks.success import check_success
from beforehand.spec.checks.supportive import check_supportive
from beforehand.spec.checks.weights import check_weights
from beforehand.spec.model import Document
from beforehand.spec.places import Finding


def findings(document: Document, *, families: bool, promise: bool) -> Iterator[Finding]:
    """Find what doesn't fit; the flags say whether all families, and the promise, are there as they are written."""
    yield from check_ids(document)
    yield from check_data_sets(document)
    yield from check_descriptions(document)
    for number in range(len(document.families)):
        yield from _within(document, number)
        if promise:
            yield from _under_promise(document, number)
    if promise:
        yield from check_levels(document)
    if families and promise:
        yield from check_scheme(document)
        yield from check_shares(document)
        yield from check_separable(document)
        yield from check_graph(document)
    if families:
        yield from check_supportive(document, promise=promise)
        yield from check_answers(document)
        yield from check_assumptions(document)


def _within(document: Document, number: int) -> Iterator[Finding]:
    for block in blocks_of(document, number):
        yield from check_data(block, document)
        yield from check_design(block)
        yield from check_beside(block)
        yield from check_null(block, document)
        yield from check_claim(block)
        yield from check_options(block)
    yield from check_repeats(document, number)
    yield from check_weights(document, number)
    yield from check_truncation(document, number)


def _under_promise(document: Document, number: int) -> Iterator[Finding]:
    for block in blocks_of(document, number):
        yield from check_direction(block, document)
    yield from check_procedure(document, number)
    yield from check_compared(document, number)
    yield from check_success(document, number)
