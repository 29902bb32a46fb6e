"""Fires where a planned hypothesis has no result, and says what leaving it out would have changed."""

from collections.abc import Callable
from dataclasses import replace

from beforehand.snooping.contract import Evidence, Finding
from beforehand.snooping.entries.planned_test_without_result import given_to, planned_test_without_result

Make = Callable[..., Evidence]

COLUMNS = """
grease: {kind: category, levels: [plain, clay]}
wear: {kind: number, unit: mg}
leaks: {kind: count}
heat: {kind: number}
"""
FAMILIES = """
- id: main
  question: Does clay differ from plain grease?
  procedure: bonferroni
  hypotheses_from:
    test: mann_whitney
    each: outcome
    outcomes: [wear, leaks, heat]
    groups: {column: grease, first: clay, second: plain}
    alternative: two_sided
    claim_direction: above
"""
SECOND = """
- id: later
  question: Is the heat the same in another test?
  procedure: bonferroni
  hypotheses:
    - id: warms
      test: student_t
      outcome: heat
      groups: {column: grease, first: clay, second: plain}
      alternative: two_sided
      claim_direction: above
"""
SERIAL = "{criterion: familywise_error_rate, level: 0.05, across_families: serial, order: [main, later]}"
# four against four in complete order: two-sided p = 2 / C(8, 4) = 1 / 35 = 0.0286, below 0.05 / 1 and above 0.05 / 3
APART = [1, 2, 3, 4, 5, 6, 7, 8]
ALIKE: list[object] = [5, 7, 6, 5, 7, 6, 5, 7, 6, 8, 7, 6]
# six against six: 2 / C(12, 6) = 1 / 462 = 0.0022
FAR_APART = list(range(12))


def bearings(wear: list[int], leaks: list[object], heat: list[object]) -> dict[str, list[object]]:
    half = len(wear) // 2
    return {"grease": ["plain"] * half + ["clay"] * half, "wear": list(wear), "leaks": leaks, "heat": heat}


def test_whole_text(evidence: Make) -> None:
    table = bearings(APART, [0] * 8, [""] * 8)
    study = evidence(table, columns=COLUMNS, families=FAMILIES)
    reasons = [study.words[name].no_result_because for name in ("main/leaks", "main/heat")]
    assert all(reasons)
    assert planned_test_without_result(study) == (
        Finding(
            about="main",
            fact=(
                f"2 of the 3 planned hypotheses of family 'main' have no result: main/leaks ({reasons[0]}) and "
                f"main/heat ({reasons[1]})."
            ),
            number=(
                "m = 3 as planned and 1 as computed; the missing ones are counted with p = 1. Had they been left out, "
                "main/wear would have been rejected."
            ),
            remedy=(
                "Leave the missing ones counted with p = 1, as they are here, and say why they have no result; only an "
                "amendment made before their data were seen takes a hypothesis out."
            ),
            ordinary_explanation=(
                "An outcome that doesn't vary or a group without values gives no test; in small groups and with rare "
                "events this happens by chance."
            ),
            severity=None,
        ),
    )


def test_honest_twin_has_every_result(evidence: Make) -> None:
    table = bearings(APART, [0, 1] * 4, [5, 7, 6, 8] * 2)
    assert planned_test_without_result(evidence(table, columns=COLUMNS, families=FAMILIES)) == ()


def test_says_when_no_decision_would_differ(evidence: Make) -> None:
    table = bearings([5, 2, 3, 4, 1, 6, 7, 8], [0] * 8, [5, 7, 6, 8] * 2)
    finding = planned_test_without_result(evidence(table, columns=COLUMNS, families=FAMILIES))[0]
    assert finding.fact.startswith("1 of the 3 planned hypotheses of family 'main' has no result: main/leaks (")
    assert finding.number == (
        "m = 3 as planned and 2 as computed; the missing ones are counted with p = 1. No decision would differ had "
        "they been left out."
    )


def test_a_gate_that_only_the_missing_ones_keep_closed(evidence: Make) -> None:
    table = bearings(FAR_APART, [0] * 12, [*FAR_APART])
    study = evidence(table, columns=COLUMNS, families=FAMILIES + SECOND, promise=SERIAL)
    finding = planned_test_without_result(study)[0]
    assert study.results.state == ("rejected", "no_result", "rejected", "not_tested")
    assert finding.number.endswith("had they been left out. They alone keep the gate to 'later' closed.")


def test_a_gate_that_stays_closed_anyway(evidence: Make) -> None:
    table = bearings(FAR_APART, [0] * 12, ALIKE)
    study = evidence(table, columns=COLUMNS, families=FAMILIES + SECOND, promise=SERIAL)
    finding = planned_test_without_result(study)[0]
    assert finding.number.endswith("No decision would differ had they been left out.")


def test_a_family_behind_a_closed_gate(evidence: Make) -> None:
    table = bearings(FAR_APART, [0] * 12, ALIKE)
    order = SERIAL.replace("[main, later]", "[later, main]")
    study = evidence(table, columns=COLUMNS, families=FAMILIES + SECOND, promise=order)
    finding = planned_test_without_result(study)[0]
    assert finding.about == "main"
    assert finding.number.endswith("The family was not tested, so that no decision rests on m.")


def test_no_member_has_a_result(evidence: Make) -> None:
    families = FAMILIES.replace("[wear, leaks, heat]", "[leaks, heat]")
    columns = COLUMNS.replace("wear: {kind: number, unit: mg}", "wear: {kind: number, role: covariate}")
    finding = planned_test_without_result(
        evidence(bearings(APART, [0] * 8, [""] * 8), columns=columns, families=families)
    )[0]
    assert finding.number.startswith("m = 2 as planned and 0 as computed;")
    assert finding.number.endswith("No decision would differ had they been left out.")


def test_weights_and_order_without_the_missing_ones(evidence: Make) -> None:
    study = evidence(bearings(APART, [0] * 8, [5, 7, 6, 8] * 2), columns=COLUMNS, families=FAMILIES)
    given = {"weights": [0.5, 0.25, 0.25], "positions": [2, 0, 1], "df": 6}
    family = replace(study.families[0], given=given)
    without = given_to(family, ["main/wear", "main/heat"])
    assert without == {"weights": [0.5 / 0.75, 0.25 / 0.75], "positions": [1, 0], "df": 6}


SHARES = "{criterion: familywise_error_rate, level: 0.05, across_families: shares}"
GRAPH = "{criterion: familywise_error_rate, level: 0.05, across_families: graph}"
ARROWS = """
graph:
  nodes_are: hypotheses
  start: {main/wear: 0.5, main/leaks: 0.5}
  pass:
    - {from: main/leaks, to: main/heat, share: 1}
    - {from: main/wear, to: main/heat, share: 1}
"""


def test_decisions_are_those_at_the_level_of_the_family(evidence: Make) -> None:
    # 1 / 35 = 0.0286 meets 0.05, and not the half of it that the family has as its share
    families = FAMILIES.replace("procedure: bonferroni", "procedure: bonferroni\n  share: 0.5") + SECOND.replace(
        "procedure: bonferroni", "procedure: bonferroni\n  share: 0.5"
    )
    study = evidence(bearings(APART, [0] * 8, [""] * 8), columns=COLUMNS, families=families, promise=SHARES)
    (main, _) = planned_test_without_result(study)
    assert "No decision would differ had they been left out." in main.number


def test_a_node_of_a_graph_keeps_its_share(evidence: Make) -> None:
    families = FAMILIES.replace("procedure: bonferroni", "procedure: graph")
    table = bearings(APART, [0] * 8, APART)
    study = evidence(table, columns=COLUMNS, families=families, promise=GRAPH, answers=ARROWS)
    (main,) = planned_test_without_result(study)
    assert main.number == (
        "m = 3 as planned and 2 as computed; the missing ones are counted with p = 1. Each keeps the share of the "
        "level that it holds, and passes none of it on."
    )
