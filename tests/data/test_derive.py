"""Exclusions in their order, derived columns after them, and an account of every row, by hand on a small table."""

from typing import Any

import numpy as np
import pytest

from beforehand.data.sets import Counts, missing_values, overlaps
from beforehand.errors import DataFault

DATA = """
- id: stores
  file: stores.csv
  identified_by: [store]
  allocated: {by: closure, how: randomised}
  columns:
    store: {kind: text}
    closure: {kind: category, levels: [standard, brush, curtain]}
    fitted: {kind: date}
    energy: {kind: number}
    openings: {kind: count}
    deviated: {kind: category, levels: ["yes", "no"]}
  derive:
    per_opening: {is: energy / openings}
    heavy: {is: "pick(per_opening > 4, 'yes', 'no')", levels: ["yes", "no"]}
  exclude:
    - {where: fitted > '2031-01-05', because: fitted late, known_at: before_allocation}
    - {where: openings == 0, because: never opened, known_at: after_allocation}
  analysis_sets:
    - {id: full, where: not is_missing(energy), principle: intention_to_treat}
    - {id: as_planned, where: deviated == 'no', principle: per_protocol}
"""
# Line by line. Late: 4 (brush), and 8 (its group is missing). Fitted unknown, so undecided: 3 and 9. Never opened among
# the rest: 5 (brush), 9 (standard); 4 was opened 0 times too, and is counted once, under the first rule. Openings
# unknown, so undecided: 6. Left: 2, 3, 6, 7, 10.
CSV = """
store,closure,fitted,energy,openings,deviated
J,standard,2031-01-02,100,25,no
I,standard,,90,30,yes
H,brush,2031-01-06,80,0,no
G,brush,2031-01-03,70,0,no
F,brush,2031-01-03,60,,
E,curtain,2031-01-05,,20,no
D,,2031-02-01,50,20,no
C,standard,,40,0,no
B,,2031-01-01,30,10,no
"""
HYPOTHESIS = """
- id: energy
  test: mann_whitney
  outcome: energy
  groups: {column: closure, first: brush, second: standard}
  alternative: two_sided
"""


@pytest.fixture
def table(study: Any) -> Any:
    study.write("stores.csv", CSV)
    return study.read(DATA, HYPOTHESIS)[1].tables["stores"]


def test_every_row_is_accounted_for(table: Any) -> None:
    flow = table.flow
    assert flow.received == Counts(9, {"standard": 3, "brush": 3, "curtain": 1, "(no group)": 2})
    late, unopened = flow.exclusions
    assert (late.where, late.because, late.known_at) == ("fitted > '2031-01-05'", "fitted late", "before_allocation")
    assert late.uses == ("fitted",)
    assert late.counts == Counts(2, {"standard": 0, "brush": 1, "curtain": 0, "(no group)": 1})
    assert late.undecided == (3, 9)
    assert unopened.counts == Counts(2, {"standard": 1, "brush": 1, "curtain": 0, "(no group)": 0})
    assert unopened.undecided == (6,)
    assert flow.analysed == Counts(5, {"standard": 2, "brush": 1, "curtain": 1, "(no group)": 1})
    assert sorted(table.lines.tolist()) == [2, 3, 6, 7, 10]


def test_received_less_excluded_is_analysed_in_every_group(table: Any) -> None:
    flow = table.flow
    for group in ("standard", "brush", "curtain", "(no group)"):
        excluded = sum(rule.counts.by_group[group] for rule in flow.exclusions)
        assert flow.received.by_group[group] - excluded == flow.analysed.by_group[group]


def test_columns_are_derived_on_the_rows_that_are_left(table: Any) -> None:
    # line 9 would divide by zero, and is excluded; where openings or energy is missing so is the quotient
    frame = table.frame.set_index("store")
    assert frame.index.tolist() == ["B", "E", "F", "I", "J"]
    np.testing.assert_array_equal(frame["per_opening"], [3.0, np.nan, np.nan, 3.0, 4.0])
    assert frame["heavy"].fillna("missing").tolist() == ["no", "missing", "missing", "no", "no"]


def test_analysis_sets_hold_the_rows_where_their_condition_is_true(table: Any) -> None:
    full, as_planned = table.sets
    assert table.frame["store"][full.rows].tolist() == ["B", "F", "I", "J"]
    assert full.counts == Counts(4, {"standard": 2, "brush": 1, "curtain": 0, "(no group)": 1})
    assert (full.principle, full.undecided) == ("intention_to_treat", ())
    assert table.frame["store"][as_planned.rows].tolist() == ["B", "E", "J"]
    assert as_planned.undecided == (6,)


def test_the_overlap_of_analysis_sets_by_hand(table: Any) -> None:
    (overlap,) = overlaps(table)
    assert (overlap.first, overlap.second) == ("full", "as_planned")
    assert overlap.both.rows == 2  # B, J
    assert overlap.only_first == Counts(2, {"standard": 1, "brush": 1, "curtain": 0, "(no group)": 0})  # F, I
    assert overlap.only_second == Counts(1, {"standard": 0, "brush": 0, "curtain": 1, "(no group)": 0})  # E


def test_missing_values_are_counted_by_group_only_when_asked(table: Any) -> None:
    by_group = {missing.column: missing.counts for missing in missing_values(table, by_group=True)}
    assert by_group["energy"] == Counts(1, {"standard": 0, "brush": 0, "curtain": 1, "(no group)": 0})
    assert by_group["per_opening"].rows == 2
    assert by_group["closure"] == Counts(1, {"standard": 0, "brush": 0, "curtain": 0, "(no group)": 1})
    blind = {missing.column: missing.counts for missing in missing_values(table, by_group=False)}
    assert blind["energy"] == Counts(1, {})


def test_without_an_allocation_nothing_is_counted_by_group(study: Any) -> None:
    study.write("stores.csv", CSV)
    _, dataset = study.read(DATA.replace("  allocated: {by: closure, how: randomised}\n", ""), HYPOTHESIS)
    assert dataset.tables["stores"].flow.received == Counts(9, {})


@pytest.mark.parametrize(
    ("kind", "written", "groups"),
    [
        ("text", ["v2.0", "v10.0", "v2.0"], {"v10.0": 1, "v2.0": 2}),
        ("count", ["10", "9", "9"], {"9": 2, "10": 1}),
        ("number", ["0.5", "10", "0.5"], {"0.5": 2, "10": 1}),
    ],
)
def test_groups_without_declared_levels_are_those_of_the_file(
    study: Any, kind: str, written: list[str], groups: dict[str, int]
) -> None:
    rows = "".join(f"{store},{arm},1\n" for store, arm in zip("ABC", written, strict=True))
    study.write("x.csv", "store,arm,energy\n" + rows)
    data = f"""
    - id: x
      file: x.csv
      allocated: {{by: arm, how: observed}}
      columns: {{store: {{kind: text}}, arm: {{kind: {kind}}}, energy: {{kind: number}}}}
    """
    one = "- {id: energy, test: one_sample_t, outcome: energy, alternative: two_sided}"
    counts = study.read(data, one)[1].tables["x"].flow.received
    assert list(counts.by_group.items()) == list(groups.items())


def test_the_order_of_exclusions_decides_which_of_them_counts_a_row(study: Any) -> None:
    study.write("stores.csv", CSV)
    lines = DATA.splitlines()
    late = next(i for i, line in enumerate(lines) if "fitted late" in line)
    lines[late], lines[late + 1] = lines[late + 1], lines[late]
    _, dataset = study.read("\n".join(lines), HYPOTHESIS)
    flow = dataset.tables["stores"].flow
    assert [rule.counts.rows for rule in flow.exclusions] == [3, 1]  # line 4 is both
    assert flow.analysed.rows == 5


def fault(study: Any, data: str, csv: str = CSV) -> str:
    study.write("stores.csv", csv)
    with pytest.raises(DataFault) as refused:
        study.read(data, HYPOTHESIS)
    return str(refused.value)


def test_a_derivation_without_a_value_names_the_lines_of_the_file(study: Any) -> None:
    unguarded = DATA.replace("    - {where: openings == 0, because: never opened, known_at: after_allocation}\n", "")
    assert fault(study, unguarded) == (
        "stores.csv: 1 fault\n"
        "  line 5: the derived column 'per_opening' (energy / openings) has no value: division by zero in 2 rows, on "
        "lines 5 and 9. Correct the file, exclude these rows, or give them another value with pick(condition, a, b)."
    )


def test_all_derivations_that_fail_come_together_and_what_depends_on_them_is_silent(study: Any) -> None:
    data = DATA.replace("per_opening: {is: energy / openings}", "per_opening: {is: energy / (openings - openings)}")
    told = fault(study, data.replace("  exclude:", "    low: {is: log(energy - 100)}\n  exclude:"))
    assert told.startswith("stores.csv: 2 faults\n")
    assert "'per_opening'" in told
    assert "'low' (log(energy - 100)) has no value: log of zero or a negative number in 4 rows" in told
    assert "'heavy'" not in told


def test_an_exclusion_without_a_value_names_the_lines_it_still_sees(study: Any) -> None:
    data = DATA.replace("where: openings == 0", "where: energy / openings > 3")
    told = fault(study, data)
    assert "line 5: the exclusion (energy / openings > 3) has no value: division by zero in 2 rows" in told
    assert "on lines 5 and 9" in told  # line 4 is gone by then


def test_a_derived_text_outside_its_levels_is_a_fault(study: Any) -> None:
    told = fault(study, DATA.replace("'yes', 'no')", "'yes', 'often')"))
    assert "line 2: the derived column 'heavy' must be 'yes' or 'no'; found 'often' on lines 2, 3 and 10." in told


def test_exclusions_that_leave_no_row_are_a_fault(study: Any) -> None:
    told = fault(study, DATA.replace("openings == 0", "openings >= 0 or is_missing(openings)"))
    assert told == "stores.csv: the exclusions leave no row. Read the conditions under 'exclude' once more."
