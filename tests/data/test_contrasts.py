"""What a test gets that compares two of several groups: the values of all of them."""

from typing import Any

import numpy as np

from beforehand.data.samples import take, unlabelled

STORES = """
- id: stores
  file: stores.csv
  identified_by: [store]
  columns:
    store: {kind: text}
    closure: {kind: category, levels: [standard, brush, curtain, magnetic]}
    energy: {kind: number}
    coast: {kind: category, levels: ["yes", "no"]}
"""
STORES_CSV = """
store,closure,energy,coast
A,standard,100,yes
B,standard,110,no
C,curtain,70,no
D,curtain,,no
E,brush,90,no
F,brush,95,
G,,60,no
H,curtain,72,yes
"""
ENERGY = """
- id: energy
  test: t_contrast
  outcome: energy
  groups: {column: closure, first: brush, second: standard}
  alternative: two_sided
"""


def read(study: Any, hypothesis: str) -> Any:
    study.write("stores.csv", STORES_CSV)
    spec, dataset = study.read(STORES, hypothesis)
    return dataset, spec.hypotheses[0]


def test_the_others_come_last_as_they_are_declared(study: Any) -> None:
    samples = take(*read(study, ENERGY))
    assert [array.tolist() for array in samples.arrays] == [[90, 95], [100, 110], [70, 72], []]
    assert samples.n == (2, 2, 2, 0)
    assert samples.missing == (0, 0, 1, 0)
    assert samples.rows_considered == 7  # the row without a closure belongs to no group


def test_the_condition_of_the_hypothesis_chooses_among_all_groups(study: Any) -> None:
    samples = take(*read(study, ENERGY + "  where: coast == 'no'\n"))
    assert [array.tolist() for array in samples.arrays] == [[90], [110], [70], []]
    assert samples.undecided == 1


def test_no_other_test_gets_them(study: Any) -> None:
    samples = take(*read(study, ENERGY.replace("t_contrast", "student_t")))
    assert samples.n == (2, 2)


def test_check_knows_the_sizes(study: Any) -> None:
    assert unlabelled(*read(study, ENERGY)).sizes == (2, 2, 2, 0)
    assert np.array_equal(take(*read(study, ENERGY)).arrays[2], [70, 72])
