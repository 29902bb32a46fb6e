"""Whether a family asks the same thing twice: it would count twice in the adjustment."""

from collections.abc import Iterator
from typing import Any

import rfc8785

from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
from beforehand.spec.canonical import plain
from beforehand.spec.model import Document, PairOutcome, WrittenHypothesis
from beforehand.spec.places import Finding

# What words and judges a hypothesis, and does not change what is computed.
_WORDS = (
    "id", "claim", "claim_direction", "estimand", "margin_basis", "purpose", "reason", "intervals", "truth", "weight",
)  # fmt: skip
_MIRRORED = {"above": "below", "below": "above"}


def check_repeats(document: Document, number: int) -> Iterator[Finding]:
    """Check that no two hypotheses of a family mean the same."""
    family = document.families[number]
    seen: dict[bytes, str] = {}
    for place, hypothesis in enumerate(family.hypotheses or ()):
        first = seen.setdefault(meaning(hypothesis), hypothesis.id)
        if first != hypothesis.id:
            yield Finding(
                ("families", number, "hypotheses", place),
                f"hypothesis '{hypothesis.id}' asks what '{first}' asks, and would count twice. Take one of them out.",
            )


def meaning(hypothesis: WrittenHypothesis) -> bytes:
    """Write what a hypothesis computes; first and second swapped with the side mirrored is the same question.

    An association is the same whichever column is named first.
    """
    written = {key: value for key, value in plain(hypothesis).items() if key not in _WORDS}
    if isinstance(hypothesis.outcome, PairOutcome) and _is_association(hypothesis.test):
        written["outcome"] = sorted((hypothesis.outcome.first, hypothesis.outcome.second))
        return rfc8785.dumps(written)
    for key in ("groups", "outcome"):
        pair: Any = written.get(key)
        ordered = isinstance(pair, dict) and "first" in pair
        if ordered and "null_hypothesis" not in written and pair["first"] > pair["second"]:
            written[key] = {**pair, "first": pair["second"], "second": pair["first"]}
            side = str(written.get("alternative"))
            written["alternative"] = _MIRRORED.get(side, side)
    return rfc8785.dumps(written)


def _is_association(test: str) -> bool:
    return test in STATISTICAL_TESTS and STATISTICAL_TESTS[test].design == "association"
