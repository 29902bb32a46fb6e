"""Counts rows left out for reasons found out late, by group; silent about reasons that were known before."""

from collections.abc import Callable

from beforehand.snooping.contract import Evidence
from beforehand.snooping.entries.post_allocation_exclusion import post_allocation_exclusion

Make = Callable[..., Evidence]

COLUMNS = """
grease: {kind: category, levels: [plain, clay]}
wear: {kind: number, unit: mg}
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
"""
TABLE: dict[str, list[object]] = {
    "grease": ["plain", "clay"] * 8,
    "wear": [20, 24, 21, 25, 22, 26, 20, 24, 21, 25, 22, 26, 23, 95, 22, 97],
}


def more(known_at: str, *, allocated: bool = True, limit: int = 90) -> str:
    allocation = "allocated: {by: grease, how: randomised}\n" if allocated else ""
    rule = f"{{where: wear > {limit}, because: the bearing seized, known_at: {known_at}}}"
    return f"{allocation}exclude:\n  - {rule}\n"


def test_counts_by_group(evidence: Make) -> None:
    made = evidence(TABLE, columns=COLUMNS, families=FAMILIES, more=more("after_allocation"))
    (finding,) = post_allocation_exclusion(made)
    assert finding.about == "bearings"
    assert finding.fact == (
        "2 rows were left out because: the bearing seized. The plan says that this was known only after allocation."
    )
    # by hand: none of 8 plain ones, 2 of 8 clay ones, so 0 % and 25 %
    share = "25\N{NARROW NO-BREAK SPACE}%"
    assert finding.number == f"By group: plain 0 of 8, clay 2 of 8; the shares differ by up to {share}."


def test_without_groups_it_counts_all(evidence: Make) -> None:
    made = evidence(TABLE, columns=COLUMNS, families=FAMILIES, more=more("after_allocation", allocated=False))
    (finding,) = post_allocation_exclusion(made)
    assert finding.number == "2 of 16 rows; the plan names no groups to count them in."


def test_silent_about_the_honest_twins(evidence: Make) -> None:
    before = evidence(TABLE, columns=COLUMNS, families=FAMILIES, more=more("before_allocation"))
    assert post_allocation_exclusion(before) == ()
    nothing_left_out = evidence(TABLE, columns=COLUMNS, families=FAMILIES, more=more("after_allocation", limit=500))
    assert post_allocation_exclusion(nothing_left_out) == ()
