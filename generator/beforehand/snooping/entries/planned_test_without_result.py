"""Planned hypotheses that have no result."""

import math
from collections.abc import Iterator
from typing import Any

from beforehand.data.wording import listed
from beforehand.multiplicity.contract import PER_MEMBER, PROCEDURES
from beforehand.multiplicity.decision import is_rejected
from beforehand.record.model import FamilyRecord
from beforehand.snooping.contract import Evidence, Finding, warning_rule
from beforehand.spelling import integer

SHOWN = 10  # hypotheses in one sentence


@warning_rule(
    title="Planned hypotheses that have no result",
    severity="caution",
    scope="family",
    evidence="record",
    why=(
        "A hypothesis that drops out makes its family smaller, and every threshold in it easier to meet, unless it is "
        "still counted."
    ),
    basis="Common practice, no single source: m is the number of hypotheses as planned.",
    false_alarm_rate=0.048,
    measured_on=(
        "studies that compare three groups of 20 with a fourth on a rare count (0.1 a unit) by a rank test, which has "
        "no result where neither group has any; with outcomes that vary it speaks in none"
    ),
)
def planned_test_without_result(evidence: Evidence) -> Iterator[Finding]:
    """Find families in which a planned hypothesis has no result.

    The family's own procedure is run once more on the hypotheses that have one, and the decisions that would differ are
    named. A hypothesis behind a closed gate isn't missing.

    Parameters
    ----------
    evidence : Evidence
        The plan, the data, and what came of them.

    Yields
    ------
    Finding
        One about each such family.
    """
    for family in evidence.families:
        missing = [member for member in family.members if _state(evidence, member) == "no_result"]
        if missing:
            yield Finding(
                about=family.id,
                fact=_fact(evidence, family, missing),
                number=f"{_number(evidence, family, missing)} {_gates(evidence, family)}".rstrip(),
                remedy=(
                    "Leave the missing ones counted with p = 1, as they are here, and say why they have no result; "
                    "only an amendment made before their data were seen takes a hypothesis out."
                ),
                ordinary_explanation=(
                    "An outcome that doesn't vary or a group without values gives no test; in small groups and with "
                    "rare events this happens by chance."
                ),
            )


def _state(evidence: Evidence, member: str) -> str:
    return evidence.results.state[evidence.row[member]]


def _fact(evidence: Evidence, family: FamilyRecord, missing: list[str]) -> str:
    reasons = [f"{member} ({evidence.words[member].no_result_because})" for member in missing]
    has = "has" if len(missing) == 1 else "have"
    return (
        f"{integer(len(missing))} of the {integer(family.planned)} planned hypotheses of family '{family.id}' {has} no "
        f"result: {listed(reasons, shown=SHOWN)}."
    )


def _number(evidence: Evidence, family: FamilyRecord, missing: list[str]) -> str:
    counted = f"m = {integer(family.planned)} as planned and {integer(family.computed)} as computed; the missing ones "
    counted += "are counted with p = 1."
    if not family.tested:
        return f"{counted} The family was not tested, so that no decision rests on m."
    if _adjusted_by_scheme(evidence, family):
        return f"{counted} Each keeps the share of the level that it holds, and passes none of it on."
    without = _rejected_without(evidence, family)
    differ = [member for member, rejected in without.items() if rejected != _rejected(evidence, family, member)]
    if not differ:
        return f"{counted} No decision would differ had they been left out."
    return f"{counted} Had they been left out, {listed(differ, shown=SHOWN)} would have been rejected."


def _rejected(evidence: Evidence, family: FamilyRecord, member: str) -> bool:
    return is_rejected(float(evidence.results.p_family[evidence.row[member]]), _level(family))


def _level(family: FamilyRecord) -> float:
    return family.level if family.local_level is None else family.local_level


def _adjusted_by_scheme(evidence: Evidence, family: FamilyRecord) -> bool:
    """Whether the members of a tested family have no adjusted p of the family's own."""
    return all(math.isnan(evidence.results.p_family[evidence.row[member]]) for member in family.members)


def _rejected_without(evidence: Evidence, family: FamilyRecord) -> dict[str, bool]:
    """Decide the hypotheses that have a result as if the family had no others."""
    members = [member for member in family.members if _state(evidence, member) != "no_result"]
    if not members:
        return {}
    p = evidence.results.p_entered[[evidence.row[member] for member in members]]
    adjusted = PROCEDURES[family.procedure](p, **given_to(family, members))
    return dict(zip(members, is_rejected(adjusted, _level(family)).tolist(), strict=True))


def given_to(family: FamilyRecord, members: list[str]) -> dict[str, Any]:
    """Give what the family's procedure asks for beyond p if it had only these members.

    Weights stay in proportion and sum to 1 again; the written order closes up.
    """
    kept = [family.members.index(member) for member in members]
    given = {name: [value[i] for i in kept] if name in PER_MEMBER else value for name, value in family.given.items()}
    if "weights" in given:
        given["weights"] = [weight / sum(given["weights"]) for weight in given["weights"]]
    if "positions" in given:
        given["positions"] = [sorted(given["positions"]).index(position) for position in given["positions"]]
    if "level" in PROCEDURES[family.procedure].needs:
        given["level"] = family.level
    return given


def _gates(evidence: Evidence, family: FamilyRecord) -> str:
    """Say whether the missing results alone keep a gate closed."""
    behind = [f"'{other.id}'" for other in evidence.families if other.closed_by == family.id]
    if not behind:
        return ""
    without = _rejected_without(evidence, family)
    against = any(evidence.results.side_agrees[evidence.row[member]] == "no" for member in without)
    if against or not without or not all(without.values()):
        return ""
    return f"They alone keep the gate to {listed(behind, shown=SHOWN)} closed."
