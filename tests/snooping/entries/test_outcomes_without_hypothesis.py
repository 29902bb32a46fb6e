"""Counts columns that look like outcomes and that the plan does not use; silent where it uses them all."""

from collections.abc import Callable

from beforehand.snooping.contract import Evidence, Finding
from beforehand.snooping.entries.outcomes_without_hypothesis import outcomes_without_hypothesis

Make = Callable[..., Evidence]

COLUMNS = """
grease: {kind: category, levels: [plain, clay]}
wear: {kind: number, unit: mg}
noise: {kind: number, unit: dB}
start_noise: {kind: number, unit: dB}
leaks: {kind: count}
hours: {kind: number}
fitter: {kind: text}
fitted: {kind: date}
site: {kind: category, levels: [mill, quarry]}
load: {kind: number, role: covariate}
kept: {kind: category, levels: ["yes", "no"]}
"""
MORE = """
allocated: {by: grease, how: randomised, strata: [site]}
derive:
  louder: {is: noise - start_noise}
exclude:
  - {where: hours < 100, because: hardly used, known_at: before_allocation}
analysis_sets:
  - {id: regreased, where: "kept == 'yes'"}
"""
FAMILIES = """
- id: main
  question: Does clay differ from plain grease?
  procedure: bonferroni
  hypotheses:
    - id: wears
      test: student_t
      outcome: wear
      groups: {column: grease, first: clay, second: plain}
      alternative: two_sided
      analysis_set: regreased
    - id: sounds
      test: mann_whitney
      outcome: louder
      groups: {column: grease, first: clay, second: plain}
      alternative: two_sided
      where: leaks < 3
"""


def bearings(**extra: list[object]) -> dict[str, list[object]]:
    table: dict[str, list[object]] = {
        "grease": ["plain", "clay"] * 6,
        "wear": [20, 24, 21, 25, 22, 26, 20, 24, 21, 25, 22, 26],
        "noise": [60] * 11 + [61],
        "start_noise": [60] * 12,
        "leaks": [0] * 12,
        "hours": [500] * 12,
        "fitter": ["somebody"] * 12,
        "fitted": ["2031-03-01"] * 12,
        "site": ["mill", "mill", "quarry", "quarry"] * 3,
        "load": [1.5] * 12,
        "kept": ["yes"] * 12,
    }
    return table | extra


def test_whole_text(evidence: Make) -> None:
    table = bearings(heat=[40] * 12, dust=["much"] * 12, colour=["grey"] * 12)
    columns = f"{COLUMNS}heat: {{kind: number, role: outcome}}\n"
    study = evidence(table, columns=columns, more=MORE, families=FAMILIES)
    # t test of 6 against 6, difference 4, both variances 0.8: t = 4 / sqrt(0.8 / 3) = 7.746 at 10 df, two-sided
    # p = 1.560333e-05 (base R 4.2.2, 2 * pt(-7.745967, 10)); Bonferroni keeps the claim up to floor(0.05 / p) = 3204
    assert outcomes_without_hypothesis(study) == (
        Finding(
            about="study",
            fact=(
                "Data set 'bearings' has 3 columns that could hold an outcome and that no hypothesis is about: "
                "'heat'; not declared in the spec: 'dust' and 'colour'."
            ),
            number=(
                "Had each of the 3 columns been one more hypothesis with p = 1, family 'main' would have 5 hypotheses "
                "instead of 2, and 1 of its 1 rejection would stand. Hypotheses with which each stands: wears up to "
                "3\N{NARROW NO-BREAK SPACE}204."
            ),
            remedy=(
                "Give columns that are no outcomes their role in the spec, and say in the scope of the claims which "
                "outcomes were measured and not tested."
            ),
            ordinary_explanation=(
                "Files hold columns that were recorded for another purpose, and specs leave roles out. Nothing in the "
                "record says that any of these columns was tested."
            ),
            severity=None,
        ),
    )


def test_honest_twin_uses_every_column(evidence: Make) -> None:
    assert outcomes_without_hypothesis(evidence(bearings(), columns=COLUMNS, more=MORE, families=FAMILIES)) == ()


def test_each_use_counts(evidence: Make) -> None:
    # without the stratum, the derived column, the exclusion, the analysis set and the condition nothing uses these
    bare = (
        FAMILIES.replace("louder", "wear")
        .replace("      analysis_set: regreased\n", "")
        .replace("      where: leaks < 3\n", "")
    )
    finding = outcomes_without_hypothesis(evidence(bearings(), columns=COLUMNS, families=bare))[0]
    assert "6 columns" in finding.fact
    assert finding.fact.endswith("is about: 'noise', 'start_noise', 'leaks', 'hours', 'site' and 'kept'.")


def test_a_derived_column_that_is_not_used_uses_nothing(evidence: Make) -> None:
    bare = FAMILIES.replace("outcome: louder", "outcome: start_noise")
    finding = outcomes_without_hypothesis(evidence(bearings(), columns=COLUMNS, more=MORE, families=bare))[0]
    assert finding.fact.endswith("1 column that could hold an outcome and that no hypothesis is about: 'noise'.")


def test_without_a_rejection_no_claim_rests_on_it(evidence: Make) -> None:
    table = bearings(wear=[20, 20, 21, 21, 22, 22, 20, 20, 21, 21, 22, 23], dust=["much"] * 12)
    finding = outcomes_without_hypothesis(evidence(table, columns=COLUMNS, more=MORE, families=FAMILIES))[0]
    assert finding.number == "No hypothesis is rejected, so that no claim rests on the count."


def test_says_how_many_would_stand(evidence: Make) -> None:
    # p of wears by the rank test: all 6 of one group above all of the other would be 2 / C(12, 6) = 0.00216; with
    # Bonferroni that stands up to floor(0.05 / 0.00216) = 23 hypotheses
    table = bearings(**{f"gauge_{i}": [i] * 12 for i in range(22)})
    ranks = FAMILIES.replace("student_t", "mann_whitney")
    finding = outcomes_without_hypothesis(evidence(table, columns=COLUMNS, more=MORE, families=ranks))[0]
    assert "22 columns" in finding.fact
    assert "'gauge_9' and 12 more." in finding.fact
    assert "would have 24 hypotheses instead of 2, and 0 of its 1 rejection would stand" in finding.number
    assert finding.number.endswith("wears up to 23.")
