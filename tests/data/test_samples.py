"""What a test gets: rows, groups, pairs by their key, events; what is dropped, and what is refused."""

import random
import textwrap
from typing import Any

import numpy as np
import pytest

from beforehand.data.samples import Samples, take, unlabelled
from beforehand.errors import DataFault, SpecFault

# ---- two groups and one sample

STORES = """
- id: stores
  file: stores.csv
  identified_by: [store]
  columns:
    store: {kind: text}
    closure: {kind: category, levels: [standard, brush, curtain]}
    energy: {kind: number}
    frost: {kind: category, levels: ["yes", "slight", "no"]}
    deviated: {kind: category, levels: ["yes", "no"]}
  analysis_sets:
    - {id: as_planned, where: deviated == 'no', principle: per_protocol}
"""
STORES_CSV = """
store,closure,energy,frost,deviated
A,standard,100,yes,no
B,standard,110,,no
C,standard,,no,no
D,standard,130,no,yes
E,brush,90,no,no
F,brush,95,slight,
G,brush,,yes,no
H,curtain,70,no,no
I,,60,yes,no
"""
TWO_GROUPS = """
- id: energy
  test: mann_whitney
  outcome: energy
  groups: {column: closure, first: brush, second: standard}
  alternative: two_sided
"""
EVENTS = """
- id: frost
  test: fisher_exact
  outcome: {column: frost, values: ["yes"]}
  groups: {column: closure, first: standard, second: brush}
  alternative: two_sided
"""


def taken(study: Any, data: str, csv: str, hypothesis: str) -> Samples:
    study.write(f"{data.split('id: ')[1].splitlines()[0]}.csv", csv)
    spec, dataset = study.read(data, hypothesis)
    return take(dataset, spec.hypotheses[0])


def lists(samples: Samples) -> list[list[Any]]:
    return [array.tolist() for array in samples.arrays]


def fault(study: Any, data: str, csv: str, hypothesis: str) -> str:
    with pytest.raises(DataFault) as refused:
        taken(study, data, csv, hypothesis)
    return str(refused.value)


def test_two_groups_in_the_order_first_second(study: Any) -> None:
    samples = taken(study, STORES, STORES_CSV, TWO_GROUPS)
    assert lists(samples) == [[90.0, 95.0], [100.0, 110.0, 130.0]]
    assert samples.n == (2, 3)
    assert samples.missing == (1, 1)
    assert samples.rows_considered == 7  # neither the other closure nor the row without one


def test_an_event_whose_status_is_missing_is_neither_yes_nor_no(study: Any) -> None:
    samples = taken(study, STORES, STORES_CSV, EVENTS)
    assert lists(samples) == [[True, False, False], [False, False, True]]
    assert all(array.dtype == np.bool_ for array in samples.arrays)
    assert samples.missing == (1, 0)


def test_several_values_may_count_as_the_event(study: Any) -> None:
    samples = taken(study, STORES, STORES_CSV, EVENTS.replace('["yes"]', '["yes", "slight"]'))
    assert lists(samples) == [[True, False, False], [False, True, True]]


def test_one_sample_is_all_rows(study: Any) -> None:
    one = "- {id: energy, test: one_sample_t, outcome: energy, null_hypothesis: {at: 100}, alternative: two_sided}"
    samples = taken(study, STORES, STORES_CSV, one)
    assert lists(samples) == [[100.0, 110.0, 130.0, 90.0, 95.0, 70.0, 60.0]]
    assert (samples.n, samples.missing, samples.rows_considered) == ((7,), (2,), 9)


def test_an_analysis_set_and_a_condition_keep_only_what_is_true(study: Any) -> None:
    in_set = TWO_GROUPS + "  analysis_set: as_planned\n"
    assert lists(taken(study, STORES, STORES_CSV, in_set)) == [
        [90.0],
        [100.0, 110.0],
    ]  # F: whether it deviated is missing
    both = in_set + "  where: frost == 'yes'\n"
    samples = taken(study, STORES, STORES_CSV, both)
    assert lists(samples) == [[], [100.0]]
    assert (samples.n, samples.missing, samples.rows_considered) == ((0, 1), (1, 0), 2)
    assert samples.undecided == 1  # B: whether there was frost is missing


def test_a_row_whose_derived_group_is_missing_belongs_to_neither_group(study: Any) -> None:
    derived = """
      derive:
        level: {is: "pick(energy > 95, 'high', 'low')", levels: [high, low]}
    """
    by_level = EVENTS.replace(
        "column: closure, first: standard, second: brush", "column: level, first: high, second: low"
    )
    samples = taken(study, STORES + textwrap.indent(textwrap.dedent(derived), "  "), STORES_CSV, by_level)
    assert samples.rows_considered == 7  # C and G have no energy, and so no level
    assert lists(samples) == [[True, False], [False, False, False, True]]
    assert samples.missing == (1, 0)


def test_no_missing_outcome_is_allowed_under_fail(study: Any) -> None:
    strict = TWO_GROUPS + "  missing_values: {method: fail}\n"
    assert fault(study, STORES, STORES_CSV, strict) == (
        "stores.csv: 1 fault\n"
        "  line 4: hypothesis 'energy' allows no missing outcome (method: fail); it is missing on lines 4 and 8."
    )
    complete = strict + "  where: not is_missing(energy)\n"
    assert taken(study, STORES, STORES_CSV, complete).n == (2, 3)


def test_the_order_of_rows_in_the_file_changes_no_sample(study: Any) -> None:
    before = taken(study, STORES, STORES_CSV, TWO_GROUPS)
    head, *rows = STORES_CSV.strip().splitlines()
    random.Random(20310302).shuffle(rows)
    after = taken(study, STORES, "\n".join([head, *rows]) + "\n", TWO_GROUPS)
    assert lists(after) == lists(before)


# ---- pairs

MACHINES = """
- id: machines
  file: machines.csv
  identified_by: [machine, coating]
  independent_unit: [machine]
  columns:
    machine: {kind: text}
    coating: {kind: category, levels: [old, new, none]}
    wear: {kind: number}
    site: {kind: text}
"""
MACHINES_CSV = """
machine,coating,wear,site
M3,new,3.1,north
M1,old,1.0,north
M2,new,2.1,south
M1,new,1.1,north
M3,old,3.0,north
M2,old,,south
M4,none,9.9,south
M5,old,5.0,south
M5,new,5.1,south
"""
BY_KEY = """
- id: wear
  test: wilcoxon_signed_rank
  outcome: wear
  matched_by: machine
  groups: {column: coating, first: new, second: old}
  alternative: two_sided
"""


def test_pairs_are_matched_by_key_and_stand_in_its_order(study: Any) -> None:
    samples = taken(study, MACHINES, MACHINES_CSV, BY_KEY)
    assert lists(samples) == [[1.1, 3.1, 5.1], [1.0, 3.0, 5.0]]
    assert samples.n == (3,)
    assert samples.missing == (1,)  # M2 lacks one of its values, and goes as a pair
    assert samples.rows_considered == 8


@pytest.mark.parametrize("seed", range(5))
def test_shuffled_rows_give_the_same_pairs(study: Any, seed: int) -> None:
    head, *rows = MACHINES_CSV.strip().splitlines()
    random.Random(seed).shuffle(rows)
    unsorted = MACHINES.replace("  identified_by: [machine, coating]\n", "")
    samples = taken(study, unsorted, "\n".join([head, *rows]) + "\n", BY_KEY)
    assert lists(samples) == [[1.1, 3.1, 5.1], [1.0, 3.0, 5.0]]


def test_keys_without_a_partner_are_a_fault_that_names_lines_and_no_keys(study: Any) -> None:
    csv = MACHINES_CSV.replace("M1,new,1.1,north\n", "").replace("M5,old,5.0,south\n", "")
    told = fault(study, MACHINES, csv, BY_KEY)
    assert told == (
        "machines.csv: 1 fault\n"
        "  line 3: hypothesis 'wear' matches rows by 'machine', and in the other group there is no partner for lines 3 "
        "and 8. Leave out such rows by 'where' or 'exclude', or correct the file."
    )


def test_a_row_that_the_condition_leaves_out_leaves_its_partner_alone(study: Any) -> None:
    told = fault(study, MACHINES, MACHINES_CSV, BY_KEY + "  where: wear != 3.1\n")
    # line 2 is left out by its value, and line 7 because its value is missing
    assert "in the other group there is no partner for lines 4 and 6." in told


def test_keys_that_stand_twice_on_one_side_are_a_fault(study: Any) -> None:
    unidentified = MACHINES.replace("  identified_by: [machine, coating]\n", "")
    told = fault(study, unidentified, MACHINES_CSV + "M1,new,1.2,north\nM3,old,3.3,north\n", BY_KEY)
    assert told == (
        "machines.csv: 2 faults\n"
        "  line 5: hypothesis 'wear' matches rows by 'machine', and the same key stands twice in one group, on lines 5 "
        "and 11. Keep one of them by 'where', or correct the file.\n"
        "  line 6: hypothesis 'wear' matches rows by 'machine', and the same key stands twice in one group, on lines 6 "
        "and 12. Keep one of them by 'where', or correct the file."
    )


def test_a_row_without_a_key_can_not_be_matched(study: Any) -> None:
    unidentified = MACHINES.replace("  identified_by: [machine, coating]\n", "")
    told = fault(study, unidentified, MACHINES_CSV.replace("M1,old", ",old"), BY_KEY)
    assert told == (
        "machines.csv: 1 fault\n  line 3: hypothesis 'wear' matches rows by 'machine', and it is missing on line 3."
    )


def test_under_fail_an_incomplete_pair_is_a_fault(study: Any) -> None:
    told = fault(study, MACHINES, MACHINES_CSV, BY_KEY + "  missing_values: {method: fail}\n")
    assert "line 7: hypothesis 'wear' allows no missing outcome (method: fail); it is missing on line 7." in told


WIDE = """
- id: wide
  file: wide.csv
  identified_by: [machine]
  columns:
    machine: {kind: text}
    wear_new: {kind: number}
    wear_old: {kind: number}
"""
BY_COLUMNS = """
- id: wear
  test: wilcoxon_signed_rank
  outcome: {first: wear_new, second: wear_old}
  alternative: two_sided
"""


def test_pairs_in_two_columns_of_one_row(study: Any) -> None:
    csv = "machine,wear_new,wear_old\nM3,3.1,3.0\nM1,1.1,1.0\nM2,2.1,\nM4,,\n"
    samples = taken(study, WIDE, csv, BY_COLUMNS)
    assert lists(samples) == [[1.1, 3.1], [1.0, 3.0]]
    assert (samples.n, samples.missing, samples.rows_considered) == ((2,), (2,), 4)


# ---- independent units

REPEATED = STORES.replace("identified_by: [store]", "independent_unit: [store]")


def test_a_unit_in_several_rows_is_refused_where_rows_must_be_independent(study: Any) -> None:
    csv = STORES_CSV + "A,brush,91,no,no\nE,brush,92,no,no\nH,curtain,70,no,no\n"
    assert fault(study, REPEATED, csv, TWO_GROUPS) == (
        "stores.csv: 1 fault\n"
        "  line 2: hypothesis 'energy': the test 'mann_whitney' takes rows as independent, and 2 units stand in "
        "several rows (independent_unit: [store]): lines 2, 6, 11 and 12. Keep one for each unit by 'where', or "
        "summarise each unit before."
    )


def test_a_unit_that_repeats_only_among_other_rows_is_no_fault(study: Any) -> None:
    csv = STORES_CSV + "H,curtain,70,no,no\n"
    assert taken(study, REPEATED, csv, TWO_GROUPS).n == (2, 3)


def test_units_are_numbered_whether_declared_or_not(study: Any) -> None:
    study.write("stores.csv", STORES_CSV)
    for data in (STORES, STORES.replace("  identified_by: [store]\n", "")):
        _, dataset = study.read(data, TWO_GROUPS)
        assert len(set(dataset.tables["stores"].units.tolist())) == 9
    study.write("stores.csv", STORES_CSV + "A,brush,91,no,no\n")
    _, dataset = study.read(REPEATED, TWO_GROUPS)
    units = dataset.tables["stores"].units
    assert units[0] == units[9]
    assert len(set(units.tolist())) == 9


def test_a_unit_that_is_missing_is_a_fault(study: Any) -> None:
    told = fault(study, REPEATED, STORES_CSV.replace("E,brush", ",brush"), TWO_GROUPS)
    assert told == (
        "stores.csv: 1 fault\n  line 6: hypothesis 'energy': independent_unit: [store] must name the unit of every "
        "row, and is missing on line 6."
    )


def test_a_pair_may_share_its_unit_and_two_pairs_may_not(study: Any) -> None:
    assert taken(study, MACHINES, MACHINES_CSV, BY_KEY).n == (3,)
    by_site = MACHINES.replace("independent_unit: [machine]", "independent_unit: [site]")
    told = fault(study, by_site, MACHINES_CSV, BY_KEY)
    assert "the test 'wilcoxon_signed_rank' takes pairs as independent, and 2 units stand in several pairs" in told


def test_pairs_in_columns_repeat_a_unit_when_two_rows_do(study: Any) -> None:
    csv = "machine,wear_new,wear_old\nM1,3.1,3.0\nM1,1.1,1.0\n"
    told = fault(study, WIDE.replace("identified_by", "independent_unit"), csv, BY_COLUMNS)
    assert "1 unit stands in several pairs (independent_unit: [machine]): lines 2 and 3." in told


# ---- supplied numbers

RESULTS = """
- id: results
  file: results.csv
  identified_by: [label]
  columns:
    label: {kind: text}
    p_value: {kind: number}
    effect: {kind: number}
    used: {kind: category, levels: ["yes", "no"]}
"""
SUPPLIED = """
- id: screen
  question: Which differ?
  procedure: benjamini_hochberg
  hypotheses_from:
    data: results
    each: label
    test: supplied_p
    p: p_value
    estimate: effect
    origin: another laboratory
    planned: 3
"""
RESULTS_CSV = """
label,p_value,effect,used
c,0.04,1.5,yes
a/x,0.01,-2,yes
b,,0.5,yes
"""


def supplied(study: Any, csv: str = RESULTS_CSV, families: str = SUPPLIED) -> Any:
    study.write("results.csv", csv)
    return study.read(RESULTS, families=families)


def test_supplied_numbers_belong_to_the_row_of_their_label(study: Any) -> None:
    spec, dataset = supplied(study)
    assert dataset.labels == {"screen": ("a/x", "b", "c")}
    assert [hypothesis.feature for hypothesis in spec.hypotheses] == ["a/x", "b", "c"]
    samples = [take(dataset, hypothesis) for hypothesis in spec.hypotheses]
    np.testing.assert_array_equal(samples[0].arrays, [0.01, -2, np.nan, np.nan])
    np.testing.assert_array_equal(samples[2].arrays, [0.04, 1.5, np.nan, np.nan])
    assert np.isnan(samples[1].arrays[0])
    assert [one.missing for one in samples] == [(0,), (1,), (0,)]


def test_a_condition_decides_which_rows_make_hypotheses(study: Any) -> None:
    families = SUPPLIED.replace("planned: 3", "planned: 2\n    where: used == 'yes'")
    spec, dataset = supplied(study, RESULTS_CSV.replace("0.04,1.5,yes", "0.04,1.5,no"), families)
    assert dataset.labels == {"screen": ("a/x", "b")}
    assert len(spec.hypotheses) == 2


def test_another_number_of_rows_than_planned_is_a_fault_of_the_spec(study: Any) -> None:
    with pytest.raises(SpecFault, match="family 'screen' plans 4 hypotheses and the data have 3"):
        supplied(study, families=SUPPLIED.replace("planned: 3", "planned: 4"))


@pytest.mark.parametrize(
    ("csv", "message"),
    [
        (
            RESULTS_CSV.replace("0.04", "1.04").replace("0.01", "-1"),
            "line 2: the column 'p_value' holds the p-values of family 'screen', which must lie between 0 and 1; other "
            "numbers stand on lines 2 and 3.",
        ),
        (
            RESULTS_CSV.replace("b,", "c,"),
            "line 2: the column 'label' names the hypotheses of family 'screen', and is the same on lines 2 and 4. "
            "Write one row for each hypothesis.",
        ),
        (
            RESULTS_CSV.replace("b,", ","),
            "line 4: the column 'label' names the hypotheses of family 'screen', and is missing on line 4.",
        ),
    ],
)
def test_rows_that_make_no_sound_hypothesis_are_faults(study: Any, csv: str, message: str) -> None:
    study.write("results.csv", csv)
    with pytest.raises(DataFault) as refused:
        study.read(RESULTS.replace("  identified_by: [label]\n", ""), families=SUPPLIED)
    assert str(refused.value) == f"results.csv: 1 fault\n  {message}"


def test_under_fail_a_missing_p_is_a_fault(study: Any) -> None:
    spec, dataset = supplied(study, families=SUPPLIED + "    missing_values: {method: fail}\n")
    with pytest.raises(DataFault, match="line 4: hypothesis 'screen/b' allows no missing p-value"):
        take(dataset, spec.hypotheses[1])


# ---- what check may know


def test_what_check_may_know_holds_no_outcome_of_any_group(study: Any) -> None:
    study.write("stores.csv", STORES_CSV)
    spec, dataset = study.read(STORES, TWO_GROUPS)
    known = unlabelled(dataset, spec.hypotheses[0])
    assert known.sizes == (2, 3)
    assert vars(known) == {"sizes": (2, 3), "beside": {}}


def test_of_pairs_check_knows_how_many_are_complete(study: Any) -> None:
    study.write("machines.csv", MACHINES_CSV.replace("M2,old,", "M2,old,2.6"))
    spec, dataset = study.read(MACHINES, BY_KEY)
    known = unlabelled(dataset, spec.hypotheses[0])
    assert vars(known) == {"sizes": (4,), "beside": {}}


def test_of_supplied_numbers_check_knows_nothing(study: Any) -> None:
    spec, dataset = supplied(study)
    assert unlabelled(dataset, spec.hypotheses[0]).sizes == ()
