"""Whether what a family calls success can be judged by its procedure."""

from collections.abc import Iterator

from beforehand.spec.checks.blocks import promise_of
from beforehand.spec.checks.sizes import size_of
from beforehand.spec.model import AtLeast, Document
from beforehand.spec.places import Finding


def check_success(document: Document, number: int) -> Iterator[Finding]:
    """Check that the claim of a family and its adjustment are about the same thing."""
    family = document.families[number]
    path, size = ("families", number, "success"), size_of(document, family)
    if family.success == "all" and family.procedure != "all_or_none" and size != 1:
        yield Finding(
            path,
            f"success of family '{family.id}' is that all are rejected, and '{family.procedure}' adjusts for claims "
            "about single ones. Write procedure: all_or_none, or success: any.",
        )
    if not isinstance(family.success, AtLeast):
        return
    if size is not None and family.success.at_least > size:
        yield Finding(
            (*path, "at_least"),
            f"success of family '{family.id}' needs at least {family.success.at_least} hypotheses, and it has {size}",
        )
    if promise_of(document, family).criterion != "familywise_error_rate":
        yield Finding(
            path,
            f"success of family '{family.id}' is a claim about several hypotheses together, which needs a promise of "
            "the family-wise error rate. Write success: any.",
        )
    if family.procedure == "graph":
        yield Finding(
            path,
            f"the hypotheses of family '{family.id}' have levels of their own, and the family has none at which they "
            "could be judged together. Write success: any, or nodes_are: families.",
        )
