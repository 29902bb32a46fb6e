"""Whether shares and truncations of the level fit the scheme across families, and each other."""

from collections.abc import Iterator
from fractions import Fraction

from beforehand.multiplicity.across.parallel import SEPARABLE
from beforehand.multiplicity.contract import PROCEDURES
from beforehand.spec.checks.sizes import size_of
from beforehand.spec.model import Document
from beforehand.spec.places import Finding, Path


def check_shares(document: Document) -> Iterator[Finding]:
    """Check that each family has its share where shares are needed, and that they sum to 1."""
    shared = document.promise.across_families == "shares"
    total = Fraction(0)
    for number, family in enumerate(document.families):
        path: Path = ("families", number)
        if family.share is None and shared and family.promise is None:
            yield Finding(path, f"family '{family.id}' needs the key 'share': its share of the level under 'shares'")
        elif family.share is not None and family.promise is not None:
            yield Finding(
                (*path, "share"),
                f"family '{family.id}' has its own promise, and no share of the study's level. Take 'share' out.",
                at_key=True,
            )
        elif family.share is not None and not shared:
            yield Finding(
                (*path, "share"),
                f"family '{family.id}' has a 'share', which needs across_families: shares",
                at_key=True,
            )
        elif family.share is not None:
            total += family.share.fraction
    if shared and total != 1 and not any(one.share is None and one.promise is None for one in document.families):
        yield Finding(
            ("promise", "across_families"),
            f"the shares of the families sum to {total}. They are shares of one level: to 1.",
        )


def check_truncation(document: Document, number: int) -> Iterator[Finding]:
    """Check that a truncated procedure has its truncation, and no other has one."""
    family = document.families[number]
    if family.procedure not in PROCEDURES:
        return
    path: Path = ("families", number)
    truncated = "truncation" in PROCEDURES[family.procedure].options
    if truncated and "truncation" in family.procedure_options:
        yield Finding(
            (*path, "procedure_options", "truncation"),
            f"'truncation' is a key of family '{family.id}', beside 'procedure', and no option",
            at_key=True,
        )
    elif truncated and family.truncation is None:
        yield Finding(
            path,
            f"family '{family.id}' needs the key 'truncation' for '{family.procedure}': from 0, which is Bonferroni's, "
            "to below 1",
        )
    elif family.truncation is not None and not truncated:
        yield Finding(
            (*path, "truncation"),
            f"family '{family.id}' has a 'truncation', and '{family.procedure}' takes none. Name a truncated "
            "procedure, or take it out.",
            at_key=True,
        )


def check_separable(document: Document) -> Iterator[Finding]:
    """Check that under parallel gates it is known of each family but the last what it can pass on."""
    promise = document.promise
    if promise.across_families != "parallel" or not promise.order:
        return
    for number, family in enumerate(document.families):
        first = family.promise is None and family.id in promise.order[:-1]
        if first and family.procedure not in SEPARABLE and size_of(document, family) != 1:
            yield Finding(
                ("families", number, "procedure"),
                f"family '{family.id}' passes a part of its level on under 'parallel', and '{family.procedure}' may "
                f"need all of it until every hypothesis is rejected. Write one of: {', '.join(SEPARABLE)}.",
            )
