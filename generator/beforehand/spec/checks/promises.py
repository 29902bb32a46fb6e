"""Whether promise, families and procedures fit together."""

from collections.abc import Iterator

from beforehand.multiplicity.contract import PROCEDURES, Procedure
from beforehand.spec.checks.blocks import blocks_of, promise_of
from beforehand.spec.checks.sides import check_level_is
from beforehand.spec.checks.sizes import size_of
from beforehand.spec.hints import nearest
from beforehand.spec.model import Document
from beforehand.spec.options import faults_of
from beforehand.spec.places import Finding, Path
from beforehand.terms import CRITERION_WORDS, Criterion


def check_scheme(document: Document) -> Iterator[Finding]:
    """Check how the families share the promise of the study."""
    promise = document.promise
    covered = [family.id for family in document.families if family.promise is None]
    if promise.across_families == "separate":
        for number, family in enumerate(document.families):
            if family.promise is None:
                yield Finding(
                    ("families", number), f"family '{family.id}' needs a 'promise', as each does under 'separate'"
                )
        return
    if not covered:
        yield Finding(
            ("promise",),
            "the promise of the study covers no family: each has its own. Write across_families: separate alone.",
        )
    if len(covered) > 1 and promise.across_families is None:
        yield Finding(
            ("promise",),
            f"the promise needs the key 'across_families', because it covers {len(covered)} families "
            f"({', '.join(covered)}). Write serial or parallel with an order, shares, graph, or separate and a promise "
            "for each.",
        )
    if promise.across_families is not None and promise.criterion != "familywise_error_rate":
        yield Finding(
            ("promise", "across_families"),
            f"'{promise.across_families}' shares a family-wise error rate, and the promise has another criterion. "
            "Write across_families: separate, and a promise for each family.",
        )
    yield from _order(document, covered)
    yield from _own_promises(document)


def _order(document: Document, covered: list[str]) -> Iterator[Finding]:
    promise = document.promise
    if promise.across_families not in ("serial", "parallel"):
        return
    if promise.order is None:
        yield Finding(("promise",), f"'{promise.across_families}' needs the key 'order': the families, first to last")
        return
    apart = [family.id for family in document.families if family.promise is not None]
    for place, name in enumerate(promise.order):
        if name in apart:
            yield Finding(
                ("promise", "order", place), f"family '{name}' has its own promise, so it stands outside the order"
            )
        elif name not in covered:
            yield Finding(("promise", "order", place), f"the order names the family '{name}'. {nearest(name, covered)}")
    left_out = [name for name in covered if name not in promise.order]
    if left_out:
        yield Finding(("promise", "order"), f"the order leaves out: {', '.join(left_out)}")


def _own_promises(document: Document) -> Iterator[Finding]:
    for number, family in enumerate(document.families):
        if family.promise is not None and family.promise.criterion == document.promise.criterion:
            yield Finding(
                ("families", number, "promise"),
                f"family '{family.id}' has a promise of its own with the criterion of the study, which would add to "
                "the study's error. Take it out, or write across_families: separate.",
            )


def check_levels(document: Document) -> Iterator[Finding]:
    """Check that a promise says whose level it is as soon as a test has a side."""
    for number, family in enumerate(document.families):
        sided = [block for block in blocks_of(document, number) if check_level_is(block, document)]
        own = family.promise is not None
        if sided and (own or document.promise.across_families != "separate"):
            path: Path = ("families", number, "promise") if own else ("promise",)
            name = f"the promise of family '{family.id}'" if own else "the promise"
            yield Finding(
                path,
                f"{name} needs the key 'level_is', because {sided[0].name} has a side. Write one_sided when the "
                "level is that of one side, two_sided when both sides share it.",
            )
            if not own:
                return


def check_procedure(document: Document, number: int) -> Iterator[Finding]:
    """Check that the procedure keeps what is promised, and has the options it takes."""
    family = document.families[number]
    if family.procedure not in PROCEDURES:
        return
    path: Path = ("families", number)
    procedure = PROCEDURES[family.procedure]
    criterion = promise_of(document, family).criterion
    # One hypothesis needs no adjustment: its own level is the family's, whichever procedure is named.
    if criterion and not _keeps(procedure, criterion) and size_of(document, family) != 1:
        keeping = [name for name in PROCEDURES if _keeps(PROCEDURES[name], criterion)]
        yield Finding(
            (*path, "procedure"),
            f"family '{family.id}' promises the {CRITERION_WORDS[criterion]}, and '{family.procedure}' controls the "
            f"{CRITERION_WORDS[procedure.controls]}. It is kept by: {', '.join(keeping)}.",
        )
    written = dict(family.procedure_options)
    if "truncation" in procedure.options:
        written.setdefault("truncation", 0.0)  # a key of the family, which has a check of its own
    for name, text in faults_of(written, procedure, "procedure"):
        at = (*path, "procedure_options", name) if name else path
        yield Finding(at, f"family '{family.id}': {text}", at_key=True)


def _keeps(procedure: Procedure, criterion: Criterion) -> bool:
    """Whether a procedure keeps what is promised; a family-wise error rate whichever hypotheses are true."""
    return procedure.keeps(criterion) and (procedure.strong or criterion != "familywise_error_rate")
