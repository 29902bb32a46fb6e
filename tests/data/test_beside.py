"""What a test takes beside the outcome: aligned with it, by group, complete rows only."""

from typing import Any

import numpy as np
import pytest

from beforehand.data.samples import take, unlabelled
from beforehand.errors import DataFault

PUMPS = """
- id: pumps
  file: pumps.csv
  identified_by: [pump]
  columns:
    pump: {kind: text}
    seal: {kind: category, levels: [old, new]}
    stops: {kind: count}
    days: {kind: number}
    load: {kind: number}
    site: {kind: category, levels: [dock, yard]}
    oil: {kind: category, levels: [thin, thick]}
    flow: {kind: number}
    state: {kind: category, levels: [failed, running]}
"""
PUMPS_CSV = """
pump,seal,stops,days,load,site,oil,flow,state
A,old,3,10,1.5,dock,thin,7,failed
B,new,1,12,2.5,yard,thin,9,running
C,old,2,,0.5,yard,thick,8,failed
D,new,0,20,,dock,thick,6,failed
E,old,4,15,3.5,,thick,,running
F,new,5,30,4.5,dock,thick,5,
"""
GROUPS = "groups: {column: seal, first: new, second: old}, alternative: above"


def taken(study: Any, hypothesis: str) -> Any:
    study.write("pumps.csv", PUMPS_CSV)
    spec, dataset = study.read(PUMPS, hypothesis)
    return dataset, spec.hypotheses[0], take(dataset, spec.hypotheses[0])


def test_an_exposure_stands_beside_its_counts(study: Any) -> None:
    _, _, samples = taken(study, f"- {{id: stops, test: rate_ratio, outcome: stops, exposure: days, {GROUPS}}}")
    assert [array.tolist() for array in samples.arrays] == [[1, 0, 5], [3, 4]]
    assert [array.tolist() for array in samples.beside["exposure"]] == [[12, 20, 30], [10, 15]]
    assert (samples.n, samples.missing) == ((3, 2), (0, 1))


def test_covariates_by_name_numbers_and_categories(study: Any) -> None:
    asked = f"- {{id: flow, test: analysis_of_covariance, outcome: flow, covariates: [load, oil], {GROUPS}}}"
    _, _, samples = taken(study, asked)
    first, second = samples.beside["covariates"]
    assert {name: values.tolist() for name, values in first.items()} == {"load": [2.5, 4.5], "oil": ["thin", "thick"]}
    assert {name: values.tolist() for name, values in second.items()} == {"load": [1.5, 0.5], "oil": ["thin", "thick"]}
    assert (samples.n, samples.missing) == ((2, 2), (1, 1))


def test_strata_of_two_columns_are_their_combinations(study: Any) -> None:
    asked = (
        "- {id: failed, test: cochran_mantel_haenszel, outcome: {column: state, values: [failed]}, "
        f"strata: [site, oil], {GROUPS}}}"
    )
    dataset, hypothesis, samples = taken(study, asked)
    assert [array.tolist() for array in samples.arrays] == [[False, True], [True, True]]
    yard_thin, dock_thick, dock_thin, yard_thick = np.concatenate(samples.beside["strata"]).tolist()
    assert len({yard_thin, dock_thick, dock_thin, yard_thick}) == 4
    known = unlabelled(dataset, hypothesis)
    assert known.sizes == (2, 2)
    assert [array.tolist() for array in known.beside["strata"]] == [[yard_thin, dock_thick], [dock_thin, yard_thick]]


def test_a_time_belongs_to_the_outcome(study: Any) -> None:
    asked = (
        f"- {{id: fails, test: log_rank, time: {{column: days, event: {{column: state, values: [failed]}}}}, {GROUPS}}}"
    )
    dataset, hypothesis, samples = taken(study, asked)
    assert [array.tolist() for array in samples.arrays] == [[False, True], [True, False]]
    assert [array.tolist() for array in samples.beside["time"]] == [[12, 20], [10, 15]]
    assert samples.missing == (1, 1)  # F has no state, C no time
    assert "time" not in unlabelled(dataset, hypothesis).beside  # `check` joins no outcome with its group


def test_two_columns_of_one_row(study: Any) -> None:
    asked = "- {id: both, test: pearson_correlation, outcome: {first: load, second: flow}, alternative: above}"
    _, _, samples = taken(study, asked)
    assert [array.tolist() for array in samples.arrays] == [[1.5, 2.5, 0.5, 4.5], [7, 9, 8, 5]]
    assert (samples.n, samples.missing, samples.beside) == ((4,), (2,), {})


def test_a_time_below_0_is_refused(study: Any) -> None:
    study.write("pumps.csv", PUMPS_CSV.replace("12,2.5", "-12,2.5"))
    asked = (
        f"- {{id: fails, test: log_rank, time: {{column: days, event: {{column: state, values: [failed]}}}}, {GROUPS}}}"
    )
    spec, dataset = study.read(PUMPS, asked)
    for ask in (take, unlabelled):
        with pytest.raises(
            DataFault, match="'fails' takes 'days' as its time, which is 0 or more; it is not on line 3"
        ):
            ask(dataset, spec.hypotheses[0])
