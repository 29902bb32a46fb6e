"""All rules over one study: order, answers beside their warnings, answers that nothing needs."""

from collections.abc import Callable

from beforehand.snooping.contract import Evidence
from beforehand.snooping.warnings import warnings_for

Make = Callable[..., Evidence]

COLUMNS = """
grease: {kind: category, levels: [plain, lithium, calcium, clay]}
wear: {kind: number}
leaks: {kind: count}
heat: {kind: number}
"""
FAMILIES = """
- id: main
  question: Which greases differ?
  procedure: bonferroni
  hypotheses:
    - id: wears
      test: student_t
      outcome: wear
      groups: {column: grease, first: clay, second: plain}
      alternative: two_sided
    - id: leaking
      test: mann_whitney
      outcome: leaks
      groups: {column: grease, first: clay, second: plain}
      alternative: two_sided
"""
ANSWERS = """
answers:
  - {warning: planned_test_without_result, about: main, answer: no bearing leaked in the cold hall}
  - {warning: outcomes_without_hypothesis, answer: the heat was logged for the alarm}
  - {warning: extreme_pair_picked, about: leaking, answer: agreed in March}
  - {warning: not_sealed_before_data, answer: the plan was printed and signed}
  - {warning: planned_test_without_result, about: wears, answer: it has one}
"""


def bearings(*, clay: float) -> dict[str, list[object]]:
    means = {"plain": 20.0, "lithium": 21.0, "calcium": 21.2, "clay": clay}
    scatter = (-0.5, 0.0, 0.5, 1.0)
    return {
        "grease": [grease for grease in means for _ in scatter],
        "wear": [mean + one for mean in means.values() for one in scatter],
        "leaks": [0] * 16,
        "heat": [40] * 16,
    }


def test_gravest_first_each_with_its_answer(evidence: Make) -> None:
    study = evidence(bearings(clay=30.0), columns=COLUMNS, families=FAMILIES, answers=ANSWERS)
    warned = warnings_for(study)
    assert [(one.severity, one.rule, one.about, one.answer) for one in warned.records] == [
        ("caution", "extreme_pair_picked", "wears", ""),
        ("caution", "planned_test_without_result", "main", "no bearing leaked in the cold hall"),
        ("note", "outcomes_without_hypothesis", "study", "the heat was logged for the alarm"),
    ]
    assert [(one.scope, one.evidence) for one in warned.records] == [
        ("hypothesis", "pattern"), ("family", "record"), ("study", "record"),
    ]  # fmt: skip
    assert warned.unneeded_answers == (
        "extreme_pair_picked about leaking",
        "not_sealed_before_data about study",
        "planned_test_without_result about wears",
    )
    for one in warned.records:
        assert all((one.fact, one.number, one.why, one.remedy, one.ordinary_explanation))


def test_a_lower_severity_comes_later(evidence: Make) -> None:
    warned = warnings_for(evidence(bearings(clay=21.3), columns=COLUMNS, families=FAMILIES))
    assert [(one.severity, one.rule) for one in warned.records] == [
        ("caution", "planned_test_without_result"),
        ("note", "extreme_pair_picked"),
        ("note", "outcomes_without_hypothesis"),
    ]
    assert warned.unneeded_answers == ()


def test_an_answer_switches_nothing_off(evidence: Make) -> None:
    with_answers, without = (
        warnings_for(evidence(bearings(clay=30.0), columns=COLUMNS, families=FAMILIES, answers=answers))
        for answers in (ANSWERS, "")
    )
    told = [[(one.rule, one.about, one.fact, one.number) for one in each.records] for each in (with_answers, without)]
    assert told[0] == told[1]
