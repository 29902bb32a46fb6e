"""Whether the weights of a family fit its procedure, and each other."""

from collections.abc import Iterator
from fractions import Fraction

from beforehand.multiplicity.contract import PROCEDURES
from beforehand.spec.model import Document
from beforehand.spec.places import Finding, Path


def check_weights(document: Document, number: int) -> Iterator[Finding]:
    """Check that weights are there where a procedure uses them, for every member, and that they sum to 1."""
    family = document.families[number]
    if family.procedure not in PROCEDURES:
        return
    path: Path = ("families", number)
    uses = "weights" in PROCEDURES[family.procedure].needs
    weights = [written.weight for written in family.written]
    given = [weight for weight in weights if weight is not None]
    if given and not uses:
        yield Finding(
            (*path, "procedure"),
            f"family '{family.id}' has weights, and '{family.procedure}' uses none. Take them out, or name a weighted "
            "procedure.",
        )
    elif given and family.hypotheses is None:
        yield Finding(
            path, f"family '{family.id}' has one weight for all its members, which says nothing. Take it out."
        )
    elif uses and len(given) < len(weights) and given:
        yield Finding(
            path, f"family '{family.id}' gives a weight to some hypotheses only. Give one to each, or to none."
        )
    elif given and sum((weight.fraction for weight in given), Fraction(0)) != 1:
        total = sum((weight.fraction for weight in given), Fraction(0))
        yield Finding(path, f"the weights of family '{family.id}' sum to {total}. They are shares of its level: to 1.")
