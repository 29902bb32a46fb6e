"""Sees one comparison decided in two families, whatever the test; silent about honest plans that look like it."""

from collections.abc import Callable

import numpy as np

from beforehand.snooping.contract import Evidence
from beforehand.snooping.entries.decided_twice import decided_twice

Make = Callable[..., Evidence]

COLUMNS = """
grease: {kind: category, levels: [plain, clay, lithium]}
wear: {kind: number, unit: mg}
heat: {kind: number, unit: K}
seized: {kind: category, levels: ["yes", "no"]}
"""
PROMISE = "{criterion: familywise_error_rate, level: 0.05, level_is: two_sided, across_families: serial, order: [a, b]}"
SETS = "analysis_sets:\n  - {id: all_of_them, where: wear > 0}\n  - {id: running, where: \"seized == 'no'\"}\n"


def table() -> dict[str, list[object]]:
    random = np.random.default_rng(20310401)
    grease = ["plain", "clay", "lithium"] * 12
    wear = [round(20 + 6 * (name != "plain") + random.normal(), 2) for name in grease]
    return {
        "grease": list(grease),
        "wear": list(wear),
        "heat": [round(value * 1.5 + random.normal(), 2) for value in wear],
        "seized": ["yes" if number % 9 == 4 else "no" for number in range(36)],
    }


def family(name: str, *hypotheses: str, more: str = "") -> str:
    lines = "".join(f"    - {{id: {name}{at}, {keys}}}\n" for at, keys in enumerate(hypotheses))
    return f"- id: {name}\n  question: q\n  procedure: holm\n{more}  hypotheses:\n{lines}"


WEAR = "test: welch_t, outcome: wear, groups: {column: grease, first: clay, second: plain}, alternative: above"
RANKS = WEAR.replace("welch_t", "mann_whitney")
OTHER_WAY = WEAR.replace("first: clay, second: plain", "first: plain, second: clay").replace("above", "below")
BETTER = WEAR.replace("alternative: above", "null_hypothesis: {at_most: 2}")
HEAT = WEAR.replace("outcome: wear", "outcome: heat")
LITHIUM = WEAR.replace("first: clay", "first: lithium")
RUNNING = f"{WEAR}, analysis_set: running"
SOME = f"{WEAR}, where: heat > 30"


def found(evidence: Make, first: str, second: str, *, promise: str = PROMISE, more: str = SETS) -> Evidence:
    return evidence(table(), columns=COLUMNS, families=f"{first}{second}", promise=promise, more=more)


def test_one_comparison_by_two_tests(evidence: Make) -> None:
    (finding,) = decided_twice(found(evidence, family("a", WEAR), family("b", HEAT, RANKS)))
    assert finding.about == "b"
    assert finding.fact == (
        "In family 'b' a hypothesis has the outcome, the groups and the rows of one in a family before it: 'b1' and "
        "'a0' of family 'a'."
    )
    # a difference of 6 mg with a spread of 1 mg in 12 and 12: every p is far below any threshold
    assert finding.number == (
        "'a0' is rejected, 'b1' rejected. One promise covers these families, so that its level holds for all "
        "their decisions together."
    )


def test_whichever_group_comes_first_and_whatever_the_margin(evidence: Make) -> None:
    for again in (OTHER_WAY, BETTER):
        assert len(decided_twice(found(evidence, family("a", WEAR), family("b", again)))) == 1


def test_two_promises_add_up(evidence: Make) -> None:
    own = "  promise: {{criterion: {}, level: {}, level_is: two_sided}}\n"
    alone = own.format("familywise_error_rate", 0.05)
    separate = "{across_families: separate}"
    made = found(evidence, family("a", WEAR, more=alone), family("b", RANKS, more=alone), promise=separate)
    (finding,) = decided_twice(made)
    assert finding.number.replace("\N{NARROW NO-BREAK SPACE}", " ").endswith(
        "the chance of a false rejection in any can reach 10 %."
    )
    discovery = own.format("false_discovery_rate", 0.1)
    second = family("b", RANKS, more=discovery).replace("holm", "benjamini_hochberg")
    (finding,) = decided_twice(found(evidence, family("a", WEAR, more=alone), second, promise=separate))
    assert finding.number.endswith("No promise covers these decisions together.")


def test_silent_about_the_honest_twins(evidence: Make) -> None:
    for other in (HEAT, LITHIUM, RUNNING, SOME):
        assert decided_twice(found(evidence, family("a", WEAR), family("b", other))) == ()
    # two tests of one comparison within a family share its adjustment
    assert decided_twice(found(evidence, family("a", WEAR, RANKS), family("b", HEAT))) == ()


def test_silent_about_supportive_analyses(evidence: Make) -> None:
    ranks = "{id: by_ranks, of: a0, change: {test: mann_whitney}, because: b, analysis: sensitivity}"
    families = family("a", WEAR) + family("b", HEAT)
    made = evidence(
        table(), columns=COLUMNS, families=families, promise=PROMISE, answers=f"supportive: [{ranks}]", more=SETS
    )
    assert "by_ranks" in made.results.id
    assert decided_twice(made) == ()


def test_silent_about_supplied_p(evidence: Make) -> None:
    supplied = """
- id: {0}
  question: q
  procedure: holm
  promise: {{criterion: familywise_error_rate, level: 0.05}}
  hypotheses_from: {{test: supplied_p, each: bearing, p: p, planned: 3, origin: another laboratory}}
"""
    made = evidence(
        {"p": [0.01, 0.2, 0.6]},
        columns="p: {kind: number}",
        families=supplied.format("a") + supplied.format("b"),
        promise="{across_families: separate}",
    )
    assert decided_twice(made) == ()


def test_many_pairs_are_cut_short(evidence: Make) -> None:
    wheres = [f"{WEAR}, where: heat > {limit}" for limit in range(7)]
    (finding,) = decided_twice(found(evidence, family("a", *wheres), family("b", *wheres)))
    assert finding.fact.endswith("'b4' and 'a4' of family 'a' and 2 more.")
