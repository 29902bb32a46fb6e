"""Whole studies whose tests take more of a row than its outcome: from the spec to a report that rechecks itself."""

import json
import math
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from filter_study import GROUPS, column, with_missing, write_filters
from scipy import stats
from statsmodels.duration.survfunc import survdiff

import beforehand
from beforehand.data.beside import beside
from beforehand.data.dataset import read_data
from beforehand.data.samples import take, unlabelled
from beforehand.errors import DataFault, SpecFault, TwoComputationsDisagree
from beforehand.planning.checking import check
from beforehand.spec.load import load_spec
from beforehand.study import report

RATE = f"- {{id: leaks, test: rate_ratio, outcome: leaks, exposure: hours, {GROUPS}, alternative: below}}\n"


CLEAN = (
    f"- {{id: flow, test: analysis_of_covariance, outcome: flow, covariates: [water], {GROUPS}, alternative: above}}"
)


def reported(folder: Path, hypotheses: str, **how: Any) -> dict[str, Any]:
    """Run a study to its report, recheck it, and give what it holds."""
    path = write_filters(folder, hypotheses, **how)
    report(path, folder / "out", only=("html",))
    recheck = [sys.executable, "-I", str(folder / "out" / "recheck.py")]
    done = subprocess.run(recheck, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout + done.stderr
    record, page = ((folder / "out" / name).read_text("utf-8") for name in ("record.json", "report.html"))
    return {**json.loads(record), "page": page}


def row(folder: Path, name: str) -> dict[str, float]:
    head, *body = [line.split(",") for line in (folder / "out" / "tests.csv").read_text("utf-8").splitlines()]
    cells = next(dict(zip(head, line, strict=True)) for line in body if line[0] == name)
    return {key: float(cells[key]) for key in ("estimate", "lower", "upper", "p", "n")}


def numbers(name: str, make: str, **how: Any) -> list[float]:
    return [float(value) for value in column(name, make, **how) if value]


def test_a_rate_ratio_from_spec_to_report(tmp_path: Path) -> None:
    record = reported(tmp_path, RATE)
    x, y = (sum(numbers("leaks", make)) for make in ("mesh", "felt"))
    t, u = (sum(numbers("hours", make)) for make in ("mesh", "felt"))
    found = row(tmp_path, "leaks")
    assert found["estimate"] == pytest.approx(x / t / (y / u), rel=1e-12)
    assert found["p"] == pytest.approx(stats.binom(x + y, t / (t + u)).cdf(x), rel=1e-9)
    (words,) = record["hypotheses"]
    assert words["outcome"] == "leaks per hours"
    assert words["beside"] == ["events counted per hours"]
    assert words["null_in_words"] == "the rate ratio of leaks per hours (mesh over felt) is at least 1"
    assert [(one["events"], one["exposure"]) for one in words["summaries"]] == [(x, t), (y, u)]
    for said in ("events counted per hours", "Beside the outcome", "Events and what they were counted in"):
        assert said in record["page"]


def test_the_second_computation_sees_exposures_that_changed_sides(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def swapped(*asked: Any) -> dict[str, Any]:
        return {word: columns[::-1] for word, columns in beside(*asked).items()}

    monkeypatch.setattr("beforehand.data.samples.beside", swapped)
    with pytest.raises(TwoComputationsDisagree) as found:
        beforehand.run(write_filters(tmp_path, RATE))
    assert {one.quantity for one in found.value.disagreements} >= {"estimate", "p"}


def test_the_second_computation_sees_rows_without_an_exposure_that_were_kept(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def complete(table: Any, hypothesis: Any, rows: Any) -> Any:
        return np.zeros(rows.size, dtype=bool)

    monkeypatch.setattr("beforehand.data.samples.without", complete)
    with pytest.raises(TwoComputationsDisagree) as found:
        beforehand.run(write_filters(tmp_path, CLEAN, lines=with_missing((0, "water"))))
    assert {one.quantity for one in found.value.disagreements} >= {"analysed units"}


def test_a_row_without_an_exposure_is_incomplete(tmp_path: Path) -> None:
    lines = with_missing((0, "hours"), (1, "leaks"), (3, "hours"), (3, "leaks"))
    record = reported(tmp_path, RATE, lines=lines)
    (words,) = record["hypotheses"]
    assert [(one["group"], one["n"], one["missing"]) for one in words["summaries"]] == [
        ("mesh", 28, 2),
        ("felt", 29, 1),
    ]
    x, y = sum(numbers("leaks", "mesh", lines=lines)), sum(numbers("leaks", "felt")) - float(column("leaks", "felt")[0])
    assert [one["events"] for one in words["summaries"]] == [x, y]
    assert row(tmp_path, "leaks")["n"] == 57


def test_one_rate_has_a_unit(tmp_path: Path) -> None:
    one = "- {id: leaks, test: rate, outcome: leaks, exposure: hours, null_hypothesis: {at_least: 0.02},"
    record = reported(tmp_path, one + " margin_basis: {text: what the plant allows, source: its rules}}")
    (words,) = record["hypotheses"]
    assert (words["unit"], words["null_in_words"]) == (
        "per hours",
        "the rate of leaks per hours is at least 0.02\N{NO-BREAK SPACE}per hours",
    )


RELATED = """
- {id: linear, test: pearson_correlation, outcome: {first: before, second: flow}, alternative: above}
- id: ranked
  test: spearman_correlation
  outcome: {first: before, second: flow}
  null_hypothesis: {at_most: 0.3}
  margin_basis: {text: what is worth knowing, source: plan}
- id: hours
  test: kendall_correlation
  outcome: {first: hours, second: flow}
  alternative: two_sided
"""


def test_associations_from_spec_to_report(tmp_path: Path) -> None:
    lines = with_missing((0, "before"), (1, "flow"), (2, "flow"), (2, "before"))
    record = reported(tmp_path, RELATED, lines=lines)
    pairs = [
        (float(b), float(f))
        for b, f in ((cells[6], cells[7]) for cells in (line.split(",") for line in lines[1:]))
        if b and f
    ]
    x, y = zip(*pairs, strict=True)
    again = stats.pearsonr(x, y, alternative="greater")
    found = row(tmp_path, "linear")
    assert (found["estimate"], found["p"]) == pytest.approx((again.statistic, again.pvalue), rel=1e-9)
    assert found["n"] == 57
    assert row(tmp_path, "ranked")["estimate"] == pytest.approx(stats.spearmanr(x, y).statistic, rel=1e-12)
    linear, ranked, hours = record["hypotheses"]
    assert [one["label"] for one in (linear, hours)] == ["linear", "hours and flow"]  # two are about the same columns
    assert linear["alternative_in_words"] == "the correlation of before and flow is above 0"
    assert ranked["null_in_words"] == "the rank correlation (Spearman) of before and flow is at most 0.3"
    assert ranked["null"] == "ρ ≤ 0.3"
    assert [(one["group"], one["n"], one["missing"]) for one in linear["summaries"]] == [
        ("before", 57, 3),
        ("flow", 57, 3),
    ]
    assert hours["beside"] == []


ADJUSTED = f"""
- {{id: flow, test: analysis_of_covariance, outcome: flow, covariates: [before, water], {GROUPS}, alternative: above}}
- id: robust
  test: analysis_of_covariance
  outcome: flow
  covariates: [water, line]
  {GROUPS}
  null_hypothesis: {{outside: [-9, 9]}}
  margin_basis: {{text: what nobody notices, source: plan}}
  options: {{errors: hc3}}
"""


def test_an_adjusted_difference_from_spec_to_report(tmp_path: Path) -> None:
    lines = with_missing((0, "before"), (1, "water"), (2, "flow"), (4, "line"))
    record = reported(tmp_path, ADJUSTED, lines=lines)
    kept = [cells for cells in (line.split(",") for line in lines[1:]) if cells[6] and cells[3] and cells[7]]
    y = np.array([float(cells[7]) for cells in kept])
    x = np.array([[1, cells[1] == "mesh", float(cells[6]), cells[3] == "river"] for cells in kept], dtype=float)
    coefficients, squares = np.linalg.lstsq(x, y)[:2]
    error = np.sqrt(squares[0] / (len(kept) - 4) * np.linalg.inv(x.T @ x)[1, 1])
    found = row(tmp_path, "flow")
    assert (found["estimate"], found["n"]) == (pytest.approx(coefficients[1], rel=1e-9), 57)
    assert found["p"] == pytest.approx(stats.t.sf(coefficients[1] / error, len(kept) - 4), rel=1e-9)
    flow, robust = record["hypotheses"]
    assert flow["beside"] == ["adjusted for before and water"]
    assert flow["unit"] == "l/min"
    assert flow[
        "alternative_in_words"
    ] == "the adjusted difference in means of flow (mesh minus felt) is above 0 l/min".replace(
        " l/min", "\N{NO-BREAK SPACE}l/min"
    )
    assert [(one["n"], one["missing"]) for one in flow["summaries"]] == [(29, 1), (28, 2)]
    assert [(one["n"], one["missing"]) for one in robust["summaries"]] == [(29, 1), (28, 2)]
    assert "adjusted for before and water" in record["page"]


SUPPORTED = """
supportive:
  - {id: raw, of: flow, change: {test: welch_t}, because: without covariates, analysis: sensitivity}
  - {id: more, of: flow, change: {covariates: [before, line]}, because: by line too, analysis: sensitivity}
  - {id: odd, of: flow, change: {test: welch_t, covariates: [line]}, because: a slip, analysis: sensitivity}
"""


def test_supportive_analyses_with_other_covariates_or_none(tmp_path: Path) -> None:
    path = write_filters(tmp_path, ADJUSTED)
    path.write_text(path.read_text("utf-8") + SUPPORTED, "utf-8")
    with pytest.raises(SpecFault) as refused:
        beforehand.run(path)
    assert [fault.text for fault in refused.value.faults] == [
        "supportive analysis 'odd' has 'covariates', and the test 'welch_t' uses no 'covariates'. Take it out."
    ]
    sound = "\n".join(line for line in path.read_text("utf-8").splitlines() if "id: odd" not in line)
    path.write_text(sound + "\n", "utf-8")
    report(path, tmp_path / "out", only=("html",))
    recheck = [sys.executable, "-I", str(tmp_path / "out" / "recheck.py")]
    assert subprocess.run(recheck, capture_output=True, check=False).returncode == 0
    raw, more = beforehand.run(path).record.supportive
    x, y = (numbers("flow", make) for make in ("mesh", "felt"))
    expected = stats.ttest_ind(x, y, equal_var=False, alternative="greater").pvalue
    assert row(tmp_path, "raw")["p"] == pytest.approx(expected, rel=1e-9)
    assert raw.changes[1] == "covariates: none instead of before, water"
    assert more.changes == ("covariates: before, line instead of before, water",)


STAINED = f"""
- id: stained
  test: cochran_mantel_haenszel
  outcome: {{column: stained, values: ["yes"]}}
  strata: [line, water]
  {GROUPS}
  alternative: below
"""


def test_a_stratified_comparison_from_spec_to_report(tmp_path: Path) -> None:
    lines = with_missing((0, "stained"), (1, "line"), (2, "water"), (4, "water"))
    record = reported(tmp_path, STAINED, lines=lines)
    kept = [cells for cells in (line.split(",") for line in lines[1:]) if cells[2] and cells[3] and cells[8]]
    strata = [(line, water) for line in ("east", "north", "south") for water in ("river", "spring")]
    tables = [
        np.array([[sum(c[1:4] == [make, *stratum] and c[8] == word for c in kept) for word in ("yes", "no")]
                  for make in ("mesh", "felt")])
        for stratum in strata
    ]  # fmt: skip
    total = np.ones(1)
    for (a, b), (c, d) in (table.tolist() for table in tables):
        total = np.convolve(total, stats.hypergeom(a + b + c + d, a + c, a + b).pmf(np.arange(a + b + 1)))
    observed = int(sum(table[0, 0] for table in tables))
    found = row(tmp_path, "stained")
    assert found["p"] == pytest.approx(total[: observed + 1].sum(), rel=1e-9)
    assert found["n"] == len(kept) == 56
    (words,) = record["hypotheses"]
    assert words["beside"] == ["stratified by line and water"]
    assert words["alternative_in_words"] == "the common odds ratio of stained = yes (mesh over felt) is below 1"
    assert "Breslow-Day test" in record["page"]
    (planned,) = check(load_spec(tmp_path / "filters.yaml")).hypotheses
    # no outcome is read: most extreme is a stratum in which all units of the second group have the event, and no other
    ways = np.prod([math.comb(int(table.sum()), int(table[1].sum())) for table in tables], dtype=float)
    assert planned.smallest_p == pytest.approx(2 / ways, rel=1e-9)


TIMES = f"""
- id: bursts
  test: log_rank
  time: {{column: days, event: {{column: state, values: [burst]}}}}
  strata: [line]
  {GROUPS}
  alternative: below
- id: hazard
  test: cox_hazard_ratio
  time: {{column: days, event: {{column: state, values: [burst]}}, ties: efron}}
  {GROUPS}
  null_hypothesis: {{at_least: 1.25}}
  margin_basis: {{text: what the plant allows, source: its rules}}
"""


def test_times_until_an_event_from_spec_to_report(tmp_path: Path) -> None:
    lines = with_missing((0, "state"), (1, "days"), (2, "line"), (4, "days"))
    record = reported(tmp_path, TIMES, lines=lines)
    kept = [cells for cells in (line.split(",") for line in lines[1:]) if cells[9] and cells[10]]
    stratified = [cells for cells in kept if cells[2]]
    time, event, group, line = zip(
        *((float(c[9]), c[10] == "burst", c[1] == "mesh", c[2]) for c in stratified), strict=True
    )
    _, p = survdiff(np.array(time), np.array(event), np.array(group, dtype=int), strata=np.array(line))
    found = row(tmp_path, "bursts")
    assert found["n"] == len(stratified) == 56
    assert found["estimate"] < 1
    assert found["p"] == pytest.approx(p / 2, rel=1e-9)
    assert row(tmp_path, "hazard")["n"] == len(kept) == 57
    bursts, hazard = record["hypotheses"]
    assert bursts["outcome"] == "days until state = burst"
    assert bursts["beside"] == ["stratified by line"]
    assert bursts["alternative_in_words"] == "the hazard ratio of days until state = burst (mesh over felt) is below 1"
    assert hazard["null"] == "h₁ / h₂ ≥ 1.25"
    watched = {make: [c for c in stratified if c[1] == make] for make in ("mesh", "felt")}
    assert [(one["events"], one["exposure"]) for one in bursts["summaries"]] == [
        (sum(c[10] == "burst" for c in rows), sum(float(c[9]) for c in rows)) for rows in watched.values()
    ]
    assert "they are built differently" in record["page"]
    # both are certain to be judged by the second computation too: it is compared before anything is written
    assert {one["quantity"] for one in record["agreement"]} >= {"p", "estimate", "lower", "upper"}


def fault(tmp_path: Path, hypotheses: str, lines: list[str]) -> str:
    with pytest.raises(DataFault) as refused:
        beforehand.run(write_filters(tmp_path, hypotheses, lines=lines))
    return str(refused.value)


def test_an_exposure_of_nothing_is_refused(tmp_path: Path) -> None:
    lines = with_missing()
    lines[5] = lines[5].replace(f",{column('hours', 'felt')[2]},", ",0,")
    assert fault(tmp_path, RATE, lines) == (
        "filters.csv: 1 fault\n"
        "  line 6: hypothesis 'leaks' takes 'hours' as its exposure, which is above 0; it is not on line 6. Correct "
        "the file, or leave such rows out by 'where' or 'exclude'."
    )


def test_no_missing_value_is_allowed_under_fail(tmp_path: Path) -> None:
    strict = RATE.replace("outcome: leaks,", "outcome: leaks, missing_values: {method: fail},")
    assert fault(tmp_path, strict, with_missing((0, "hours"), (1, "leaks"))) == (
        "filters.csv: 2 faults\n"
        "  line 2: hypothesis 'leaks' allows no missing 'hours' (method: fail); it is missing on line 2.\n"
        "  line 3: hypothesis 'leaks' allows no missing outcome (method: fail); it is missing on line 3."
    )


def test_check_reads_no_count_and_so_names_no_smallest_p(tmp_path: Path) -> None:
    """How many leaks there were in two of several groups would tell the groups apart: any p can be reached."""
    spec = load_spec(write_filters(tmp_path, RATE))
    (planned,) = check(spec).hypotheses
    assert planned.smallest_p == 0.0
    known, taken = unlabelled(read_data(spec), spec.hypotheses[0]), take(read_data(spec), spec.hypotheses[0])
    assert known.sizes == taken.n
    np.testing.assert_array_equal(known.beside["exposure"][0], taken.beside["exposure"][0])
