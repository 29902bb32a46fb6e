"""Fires on a pair that lies furthest apart among four groups or more, and not on its honest twins."""

import math
from collections.abc import Callable, Sequence

import numpy as np
import pytest

from beforehand.snooping.contract import Evidence, Finding
from beforehand.snooping.entries.extreme_pair_picked import extreme_pair_picked

Make = Callable[..., Evidence]
GREASES = ("plain", "lithium", "calcium", "clay", "polyurea")

PICKED = """
- id: main
  question: Does polyurea wear more than plain grease?
  procedure: holm
  hypotheses:
    - id: picked
      test: student_t
      outcome: wear
      groups: {column: grease, first: polyurea, second: plain}
      alternative: two_sided
"""
COMPARED = """
- id: main
  question: Which greases differ?
  procedure: holm
  comparisons: {{test: student_t, outcome: wear, groups: grease, pairs: {pairs}, alternative: two_sided}}
"""
# the pooled t of the extreme pair has p = 0.01 at 45 df, which among five groups of ten is 0.071 by Tukey-Kramer
# and 0.144 by Scheffé: simulated in test_extremes.py
T = 2.6895850193746433
STEP = T * math.sqrt(2 / 10)


def five_greases(positions: Sequence[float] = (0, 0.4, 0.5, 0.6, 1), groups: int = 5) -> dict[str, list[object]]:
    """Ten bearings a grease, mean 20 mg and more, standard deviation 1 mg."""
    scatter = (np.arange(10) - 4.5) / math.sqrt(55 / 6)
    return {
        "grease": [grease for grease in GREASES[:groups] for _ in range(10)],
        "wear": [20 + STEP * position + one for position in positions[:groups] for one in scatter],
    }


def only(findings: tuple[Finding, ...]) -> Finding:
    assert len(findings) == 1
    return findings[0]


def test_whole_text(evidence: Make) -> None:
    study = evidence(five_greases(), families=PICKED)
    assert only(extreme_pair_picked(study)) == Finding(
        about="picked",
        fact=(
            "Of the 5 observed groups of 'grease', 'polyurea' has the largest mean of 'wear' "
            "(21.20\N{NO-BREAK SPACE}mg) and 'plain' the smallest (20.00\N{NO-BREAK SPACE}mg). This is the pair of "
            "picked; family 'main' tests 1 of the 10 pairs for this outcome."
        ),
        # base R 4.2.2: ptukey(sqrt(2) * qt(.975, 18), 5, 18, lower.tail = FALSE) = 0.2620467 (simulated in
        # test_extremes.py); 2 * pt(-2.6895850193746433, 18) = 0.01497918, ten times that for ten pairs
        number=(
            "An unadjusted two-sided test at 5\N{NARROW NO-BREAK SPACE}% of whichever pair lies furthest apart rejects "
            "in about 26.2\N{NARROW NO-BREAK SPACE}% of studies in which the 5 groups don't differ. Beside a two-sided "
            "level of 5\N{NARROW NO-BREAK SPACE}%, p of this pair is 0.015 by itself; among all 10 pairs 0.071 "
            "(Tukey-Kramer) or 0.150 (Bonferroni); among all contrasts 0.144 (Scheffé)."
        ),
        remedy=(
            "Test all pairs of the column (pairs: all), or name the pair in a plan that is sealed before the data are "
            "seen; until then, read the p-values among all pairs beside the decision."
        ),
        ordinary_explanation=(
            "The pair was planned and happens to lie furthest apart. When 5 groups don't differ, a pair planned "
            "beforehand is the extreme one in 10\N{NARROW NO-BREAK SPACE}% of studies (1 of 10); where the two planned "
            "groups are those that truly differ most, it is so more often."
        ),
        severity=None,
    )


@pytest.mark.parametrize("pairs", ["all", "{each_with: plain}", "{each_with: polyurea}"])
def test_honest_twin_tests_all_pairs_or_all_with_one(evidence: Make, pairs: str) -> None:
    assert extreme_pair_picked(evidence(five_greases(), families=COMPARED.format(pairs=pairs))) == ()


@pytest.mark.parametrize("positions", [(0, 0.4, 0.5, 1, 0.9), (0.1, 0, 0.5, 0.6, 1), (0, 1, 0.5, 0.6, 1)])
def test_honest_twin_tests_another_pair_or_one_of_several_extremes(evidence: Make, positions: list[float]) -> None:
    assert extreme_pair_picked(evidence(five_greases(positions), families=PICKED)) == ()


def test_three_groups_are_too_few(evidence: Make) -> None:
    three = PICKED.replace("polyurea", "calcium")
    assert extreme_pair_picked(evidence(five_greases((0, 0.5, 1), groups=3), families=three)) == ()
    four = PICKED.replace("polyurea", "clay")
    assert extreme_pair_picked(evidence(five_greases((0, 0.5, 0.6, 1), groups=4), families=four))


def test_groups_count_where_they_were_observed_among_the_rows(evidence: Make) -> None:
    within = PICKED + "      where: grease != 'calcium' and grease != 'lithium'\n"
    assert extreme_pair_picked(evidence(five_greases(), families=within)) == ()
    wear = five_greases()
    wear["wear"] = [("" if grease == "calcium" else value) for grease, value in zip(*wear.values(), strict=True)]
    assert "Of the 4 observed groups" in only(extreme_pair_picked(evidence(wear, families=PICKED))).fact


def test_a_pair_without_a_result_is_not_extreme(evidence: Make) -> None:
    table = five_greases()
    table["wear"] = [("" if grease == "plain" else value) for grease, value in zip(*table.values(), strict=True)]
    study = evidence(table, families=PICKED)
    assert study.results.state == ("no_result",)
    assert extreme_pair_picked(study) == ()


def test_without_a_rejection_it_is_a_note(evidence: Make) -> None:
    study = evidence(five_greases((0, 0.2, 0.2, 0.3, 0.5)), families=PICKED)
    assert study.results.state == ("not_rejected",)
    assert only(extreme_pair_picked(study)).severity == "note"


@pytest.mark.parametrize(("side", "fires"), [("above", True), ("below", False)])
def test_one_side(evidence: Make, side: str, fires: bool) -> None:
    one_sided = "{criterion: familywise_error_rate, level: 0.025, level_is: one_sided}"
    families = PICKED.replace("two_sided", side)
    findings = extreme_pair_picked(evidence(five_greases(), families=families, promise=one_sided))
    assert bool(findings) == fires
    if fires:
        # the side was open as well: p is doubled, the base rate halved, the level that of the larger of both sides
        number = findings[0].number.replace("\N{NARROW NO-BREAK SPACE}", " ")
        assert "one-sided test at 2.5 %" in number
        assert "in about 26.2 %" in number
        assert "is 0.015 by itself; among all 10 pairs 0.071 (Tukey-Kramer) or 0.150 (Bonferroni)" in number
        assert "on the side that is tested, in 5\N{NARROW NO-BREAK SPACE}% of studies (1 of 20)" in (
            findings[0].ordinary_explanation
        )


def test_equivalence_is_hardest_for_the_extreme_pair(evidence: Make) -> None:
    families = PICKED.replace("alternative: two_sided", "null_hypothesis: {outside: [-3, 3]}")
    study = evidence(five_greases(), families=families, promise=TWO_SIDED)
    assert study.results.state == ("rejected",)
    assert extreme_pair_picked(study) == ()


def test_a_margin_enters_the_p_among_all_pairs(evidence: Make) -> None:
    families = PICKED.replace("alternative: two_sided", "null_hypothesis: {at_most: -0.5}")
    study = evidence(five_greases(), families=families, promise=TWO_SIDED)
    shifted = evidence(five_greases((0, 0.4, 0.5, 0.6, 1 + 0.5 / STEP)), families=PICKED)
    among_all = [only(extreme_pair_picked(one)).number.partition("; among")[2] for one in (study, shifted)]
    assert among_all[0] == among_all[1]


TWO_SIDED = "{criterion: familywise_error_rate, level: 0.05, level_is: two_sided}"
RANKS = PICKED.replace("student_t", "mann_whitney")


def test_medians_for_ranks(evidence: Make) -> None:
    # the mean of plain grease is the largest, its median the smallest
    table = five_greases()
    table["wear"] = [20, 20, 20, 20, 20, 20, 20, 20, 20, 90, *table["wear"][10:]]
    text = only(extreme_pair_picked(evidence(table, families=RANKS)))
    assert "'polyurea' has the largest median of 'wear'" in text.fact
    assert "'plain' the smallest (20.00" in text.fact
    assert "in up to about 28.6" in text.number  # large samples: simulated in test_extremes.py
    assert "Bonferroni" in text.number
    assert "Tukey" not in text.number
    assert extreme_pair_picked(evidence(table, families=PICKED)) == ()


def test_shares_for_events(evidence: Make) -> None:
    events = {"plain": 1, "lithium": 5, "calcium": 4, "clay": 6, "polyurea": 9}
    table = five_greases()
    table["seized"] = [("yes" if i < events[grease] else "no") for grease in GREASES for i in range(10)]
    families = PICKED.replace("student_t", "fisher_exact").replace("wear\n", "{column: seized, values: ['yes']}\n")
    columns = (
        "grease: {kind: category, levels: [plain, lithium, calcium, clay, polyurea]}\nwear: {kind: number}\n"
        "seized: {kind: category, levels: ['yes', 'no']}"
    )
    finding = only(extreme_pair_picked(evidence(table, families=families, columns=columns)))
    assert (
        "'polyurea' has the largest share of events of 'seized = yes' (90 %) and 'plain' the smallest (10 %)"
        in finding.fact.replace("\N{NARROW NO-BREAK SPACE}", " ")
    )
    # of C(20, 10) = 184756 ways to place ten events 100 give 9 against 1, and one 10 against 0: two-sided
    # p = 2 x 101 / 184756 = 0.00109, and ten times that for ten pairs
    assert "is 0.001 by itself and, among all 10 pairs, 0.011 (Bonferroni)." in finding.number


def test_one_warning_for_one_choice(evidence: Make) -> None:
    twice = PICKED + RANKS.partition("hypotheses:\n")[2].replace("picked", "picked_by_ranks")
    finding = only(extreme_pair_picked(evidence(five_greases(), families=twice)))
    assert finding.about == "picked"
    assert "This is the pair of picked and picked_by_ranks;" in finding.fact
    assert "such choices" not in finding.ordinary_explanation


def test_each_outcome_is_a_choice_of_its_own(evidence: Make) -> None:
    table = five_greases()
    table["noise"] = table["wear"][::-1]
    columns = (
        "grease: {kind: category, levels: [plain, lithium, calcium, clay, polyurea]}\nwear: {kind: number}\n"
        "noise: {kind: number}"
    )
    both = PICKED + PICKED.partition("hypotheses:\n")[2].replace("picked", "louder").replace("wear", "noise")
    findings = extreme_pair_picked(evidence(table, families=both, columns=columns))
    assert [finding.about for finding in findings] == ["picked", "louder"]
    for finding in findings:
        assert finding.ordinary_explanation.endswith(
            "The family rests on 2 such choices; that at least one of them is extreme happens in up to "
            "20\N{NARROW NO-BREAK SPACE}%."
        )


def test_a_group_whose_units_repeat_is_not_set_beside_the_others(evidence: Make) -> None:
    table = five_greases((0.5, 0, 0.6, 1.2, 1))
    table["pump"] = [("same" if grease == "clay" else f"p{i}") for i, grease in enumerate(table["grease"])]
    columns = (
        "grease: {kind: category, levels: [plain, lithium, calcium, clay, polyurea]}\nwear: {kind: number}\n"
        "pump: {kind: text}"
    )
    families = PICKED.replace("second: plain", "second: lithium")
    findings = extreme_pair_picked(evidence(table, families=families, columns=columns, more="independent_unit: [pump]"))
    assert "Of the 4 observed groups" in only(findings).fact
