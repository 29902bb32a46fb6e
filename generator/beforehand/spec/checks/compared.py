"""Whether the hypotheses of a family are what its procedure judges: one test, pairs of groups, a shared control."""

from collections.abc import Iterator
from typing import Any

from beforehand.multiplicity.contract import PROCEDURES, Procedure
from beforehand.spec.checks.blocks import Block, blocks_of, promise_of
from beforehand.spec.model import Comparisons, Document, EachWith, Groups, WrittenHypothesis
from beforehand.spec.places import Finding, Path

SAME = ("data", "where", "analysis_set", "outcome")
"""What all comparisons of such a family share."""


def check_compared(document: Document, number: int) -> Iterator[Finding]:
    """Check that the procedure can judge the statistics that the family gives it."""
    family = document.families[number]
    if family.procedure not in PROCEDURES or PROCEDURES[family.procedure].compares == "anything":
        return
    procedure, blocks = PROCEDURES[family.procedure], list(blocks_of(document, number))
    for block in blocks:
        yield from _judged(block, procedure)
        yield from _sides(block, procedure, document)
        yield from _alike(block, blocks[0], procedure)
    if procedure.compares == "control":
        yield from _control(blocks, procedure, ("families", number))


def _judged(block: Block, procedure: Procedure) -> Iterator[Finding]:
    tests = " or ".join(procedure.tests)
    if block.written.test not in procedure.tests:
        yield Finding(
            (*block.path, "test"),
            f"'{procedure.name}' judges the statistics of the test {tests}; found '{block.written.test}' in "
            f"{block.name}. Take that test, or a procedure that judges p-values.",
        )
    elif not isinstance(block.written, Comparisons | WrittenHypothesis):
        yield Finding(
            block.path,
            f"'{procedure.name}' judges pairs of groups of one outcome. Write them under 'comparisons' or "
            "'hypotheses'.",
        )
    if block.null.form in ("outside", "inside"):
        yield Finding(
            (*block.path, "null_hypothesis"),
            f"'{procedure.name}' judges one statistic for each hypothesis, and {block.name} has one for each of two "
            "margins. Take a procedure that judges p-values.",
        )


def _sides(block: Block, procedure: Procedure, document: Document) -> Iterator[Finding]:
    if procedure.one_sided or block.null.form in ("outside", "inside"):
        return
    if not block.two_sided:
        yield Finding(
            block.path,
            f"'{procedure.name}' judges both sides, and {block.name} asks about one. Write alternative: two_sided, "
            "or take a procedure that judges p-values.",
        )
    elif promise_of(document, block.family).level_is == "one_sided":
        yield Finding(
            ("families", block.path[1], "procedure"),
            f"'{procedure.name}' judges both sides, and the level of family '{block.family.id}' is that of one. "
            "Promise a level that is two_sided, or take a procedure that judges p-values.",
        )


def _alike(block: Block, first: Block, procedure: Procedure) -> Iterator[Finding]:
    """Check that all hypotheses written one by one are about the same rows, outcome, column and number of sides."""
    if block is first or not isinstance(block.written, WrittenHypothesis):
        return
    different = [name for name in _shared(block) if _shared(block)[name] != _shared(first)[name]]
    if different:
        yield Finding(
            block.path,
            f"{block.name} differs from {first.name} in: {', '.join(different)}. '{procedure.name}' judges all "
            "comparisons of a family together, so these must be the same.",
        )


def _shared(block: Block) -> dict[str, Any]:
    groups = block.written.groups
    column = groups.column if isinstance(groups, Groups) else groups
    named = {name: getattr(block.written, name, None) for name in SAME}
    return {**named, "column of the groups": column, "number of sides": 2 if block.two_sided else 1}


def _control(blocks: list[Block], procedure: Procedure, path: Path) -> Iterator[Finding]:
    """Check that one group stands in every pair."""
    written = [block.written for block in blocks]
    pairs = [{one.groups.first, one.groups.second} for one in written if isinstance(one.groups, Groups)]
    if isinstance(written[0], Comparisons):
        if not isinstance(written[0].pairs, EachWith):
            yield Finding(
                (*path, "comparisons", "pairs"),
                f"'{procedure.name}' compares each group with one control. Write pairs: {{each_with: GROUP}}, or take "
                "tukey for all pairs.",
            )
    elif len(pairs) == len(written) and not set.intersection(*pairs):
        yield Finding(
            (*path, "hypotheses"),
            f"'{procedure.name}' compares each group with one control, and no group stands in every pair of family "
            f"'{blocks[0].family.id}'",
        )
