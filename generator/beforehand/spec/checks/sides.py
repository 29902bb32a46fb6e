"""Whether side, margin, direction and claim of a hypothesis say one thing, and say enough."""

import re
from collections.abc import Iterator

from beforehand.hypothesis_tests.contract import StatisticalTest
from beforehand.spec.checks.blocks import Block, promise_of
from beforehand.spec.model import Comparisons, Document, HypothesesFrom
from beforehand.spec.options import faults_of
from beforehand.spec.places import Finding

_SIDES = ("above", "below")


def check_null(block: Block, document: Document) -> Iterator[Finding]:
    """Check the null hypothesis, its side and its margin."""
    written, form = block.written, block.null.form
    if form == "at" and written.alternative is None and not block.supplied:
        yield Finding(
            block.path, f"{block.name} needs the key 'alternative': above, below or two_sided (of first - second)"
        )
    if form != "at" and written.alternative is not None:
        yield Finding(
            (*block.path, "alternative"),
            f"{block.name} has a side twice: '{form}' says it already. Take 'alternative' out.",
        )
    if block.test and block.test.scale == "ratio" and min(block.null.margins) <= 0:
        yield Finding(
            (*block.path, "null_hypothesis"),
            f"the margins of {block.name} must be above 0: the test '{block.test.name}' is about a ratio",
        )
    elif block.test and (text := _null_out_of_range(block.null.margins, block.test)):
        yield Finding((*block.path, "null_hypothesis"), f"{block.name}: {text}")
    if form != "at" and written.margin_basis is None and document.study.intent == "confirmatory":
        yield Finding(
            block.path,
            f"{block.name} needs the key 'margin_basis': why the margin is so wide, and where that is written",
        )
    if form == "at" and written.margin_basis is not None:
        yield Finding((*block.path, "margin_basis"), f"{block.name} has 'margin_basis' and no margin")


def _null_out_of_range(margins: tuple[float, ...], test: StatisticalTest[...]) -> str | None:
    """Say which null values a test takes, where one is none of them."""
    if test.only_default_null and margins != (test.null_default,):
        return f"the test '{test.name}' takes no other null value than {test.null_default:g}"
    if test.null_between and not all(test.null_between[0] < margin < test.null_between[1] for margin in margins):
        low, high = test.null_between
        return f"the null values of the test '{test.name}' lie between {low:g} and {high:g}"
    return None


def check_direction(block: Block, document: Document) -> Iterator[Finding]:
    """Check that a two-sided test says which side its claim is about, where that decides something."""
    written, path = block.written, (*block.path, "claim_direction")
    direction = written.claim_direction
    if not block.two_sided:
        if direction is not None:
            yield Finding(path, f"{block.name} has 'claim_direction', and its test has one side already. Take it out.")
        return
    if promise_of(document, block.family).level_is == "one_sided" and direction not in _SIDES:
        yield Finding(
            block.path if direction is None else path,
            f"{block.name} is two-sided under a one-sided level. Say claim_direction: above or below, "
            "so that the p of that side is used, or choose another 'alternative'.",
        )
        return
    if isinstance(written, HypothesesFrom) and block.supplied and written.estimate is None and direction in _SIDES:
        yield Finding(
            block.path, f"{block.name} needs the key 'estimate': without its sign a two-sided p has no direction"
        )
    because = _must_have_direction(block, document)
    if direction is None and because:
        yield Finding(
            block.path,
            f"{block.name} is two-sided and {because}: it needs the key 'claim_direction' (above, below or either)",
        )
    if direction == "either" and _opens_a_gate(block, document):
        yield Finding(path, f"{block.name} says claim_direction: either, which can open no gate. Say above or below.")


def _must_have_direction(block: Block, document: Document) -> str | None:
    if document.study.intent == "confirmatory":
        return "the study is confirmatory"
    if "success" in block.family.model_fields_set:
        return "its family has 'success'"
    return _opens_a_gate(block, document)


def _opens_a_gate(block: Block, document: Document) -> str | None:
    """Say how a rejection lets another family or hypothesis have its turn; None where it doesn't."""
    family, order, graph = block.family, document.promise.order or (), document.graph
    if family.promise is not None:
        return None
    if family.id in order[:-1]:
        return "its family comes before another"
    names = (getattr(block.written, "id", ""), family.id)
    senders = {one.from_ for one in graph.pass_} if graph else set()
    passes_on = any(one in names or one.startswith(f"{family.id}/") for one in senders)
    return "it passes its share of the level on" if passes_on else None


def check_level_is(block: Block, document: Document) -> bool:
    """Whether the promise has to say if its level is for one side."""
    one_sided = block.null.form != "at" or block.written.alternative in ("above", "below")
    return one_sided and promise_of(document, block.family).level_is is None


def check_claim(block: Block) -> Iterator[Finding]:
    """Check that every name in braces has a meaning."""
    written = block.written
    meant = {"feature"} if isinstance(written, HypothesesFrom) else set()
    if isinstance(written, Comparisons) or written.groups is not None:
        meant |= {"group", "first", "second"}
    for word in re.findall(r"\{(group|first|second|feature)\}", written.claim or ""):
        if word not in meant:
            yield Finding((*block.path, "claim"), f"the claim of {block.name} has {{{word}}}, which means nothing here")


def check_options(block: Block) -> Iterator[Finding]:
    """Check the options of the test."""
    if block.test is None:
        return
    for name, text in faults_of(block.written.options, block.test, "test"):
        at = (*block.path, "options", name) if name else block.path
        yield Finding(at, f"{block.name}: {text}", at_key=True)
