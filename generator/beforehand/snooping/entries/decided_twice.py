"""The same outcome, groups and rows decided in two families."""

import json
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from beforehand.data.wording import listed
from beforehand.record.model import FamilyRecord
from beforehand.snooping.contract import Evidence, Finding, warning_rule
from beforehand.spec.canonical import plain
from beforehand.spec.model import Hypothesis
from beforehand.spelling import percent
from beforehand.terms import STATE_WORDS

SHOWN = 5  # pairs of hypotheses in one sentence


@dataclass(frozen=True)
class Repeated:
    """Two hypotheses of different families about the same outcome, groups and rows."""

    earlier: Hypothesis
    later: Hypothesis


@warning_rule(
    title="The same outcome, groups and rows decided in two families",
    severity="caution",
    scope="family",
    evidence="record",
    why=(
        "Two decisions about one comparison read like two findings, and where they differ either of them could be "
        "quoted as the result."
    ),
    basis="Common practice, no single source: a comparison is decided once, and other analyses of it support it.",
    false_alarm_rate=0.0,
    measured_on=(
        "studies that decide each outcome in each pair of groups and set of rows in one family; it rests on no "
        "chance, and speaks wherever two families hold the same"
    ),
)
def decided_twice(evidence: Evidence) -> Iterator[Finding]:
    """Find hypotheses whose outcome, groups and rows a family before has decided already, by whatever test.

    Supportive analyses decide nothing and are not meant; nor are supplied p-values, of which no outcome is known.

    Parameters
    ----------
    evidence : Evidence
        The plan, the data, and what came of them.

    Yields
    ------
    Finding
        One about each family that repeats what stands in families before it, in the order of the spec.
    """
    seen: dict[str, Hypothesis] = {}
    families = {family.id: family for family in evidence.families}
    for planned in evidence.spec.families:
        members = () if planned.from_data else planned.members
        asked = [_asked(member) for member in members]
        pairs = [Repeated(seen[one], member) for one, member in zip(asked, members, strict=True) if one in seen]
        seen = dict(zip(asked, members, strict=True)) | seen
        if pairs:
            yield Finding(
                about=planned.id,
                fact=_fact(pairs),
                number=_number(evidence, families, pairs),
                remedy=(
                    "Decide the comparison once, where the study rests on it, and declare the other analysis under "
                    "'supportive': it is then printed beside the decision, with its estimate and p, and decides "
                    "nothing."
                ),
                ordinary_explanation=(
                    "Plans that ask for more in steps, such as no worse by a margin first and better after that, hold "
                    "the same comparison in two families on purpose."
                ),
            )


def _asked(hypothesis: Hypothesis) -> str:
    """Write what a hypothesis is about: its rows, its outcome and its groups, whichever comes first."""
    about: dict[str, Any] = {
        name: plain(getattr(hypothesis, name))
        for name in ("data", "analysis_set", "where", "outcome", "time", "groups", "matched_by")
    }
    return json.dumps({name: _unordered(value) for name, value in about.items()}, sort_keys=True)


def _unordered(value: Any) -> Any:
    """Write two columns of a row, or two groups, whichever comes first."""
    if isinstance(value, dict) and "first" in value:
        return [value.get("column"), *sorted((value["first"], value["second"]))]
    return value


def _fact(pairs: list[Repeated]) -> str:
    said = [f"'{one.later.id}' and '{one.earlier.id}' of family '{one.earlier.family}'" for one in pairs]
    return (
        f"In family '{pairs[0].later.family}' a hypothesis has the outcome, the groups and the rows of one in a family "
        f"before it: {listed(said, shown=SHOWN)}."
    )


def _number(evidence: Evidence, families: dict[str, FamilyRecord], pairs: list[Repeated]) -> str:
    said = [f"'{one.earlier.id}' is {_state(evidence, one.earlier)}, '{one.later.id}' {_state(evidence, one.later)}"
            for one in pairs]  # fmt: skip
    both = {name: families[name] for one in pairs for name in (one.earlier.family, one.later.family)}
    return f"{listed(said, shown=SHOWN)}. {_together(list(both.values()))}"


def _state(evidence: Evidence, hypothesis: Hypothesis) -> str:
    return STATE_WORDS[evidence.results.state[evidence.row[hypothesis.id]]]


def _together(families: list[FamilyRecord]) -> str:
    """Say what the families promise of a comparison that stands in each of them."""
    if all(family.under_study_promise for family in families):
        return "One promise covers these families, so that its level holds for all their decisions together."
    if any(family.promise.criterion != "familywise_error_rate" for family in families):
        return "No promise covers these decisions together."
    total = min(1.0, sum(family.level for family in families))
    return f"Each family keeps a promise of its own: the chance of a false rejection in any can reach {percent(total)}."
