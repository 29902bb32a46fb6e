"""A small study by each procedure that judges statistics: decisions, intervals and the stand-alone checker."""

import csv
import io
import json
import math
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy import stats
from small_study import MIXES, SPEC, rows, write_study

import beforehand
from beforehand.record.canonical import sha256
from beforehand.record.manifest import manifest

FIRST = "      alternative: above\n      claim:"
BOTH = "      alternative: two_sided\n      claim_direction: above\n      claim:"
ONE_SIDED_LEVEL = ("level_is: two_sided", "level_is: one_sided")
Edits = tuple[tuple[str, str], ...]

TUKEY: Edits = (("holm", "tukey"), ("welch_t", "t_contrast"), ("{each_with: plain}", "all"), (FIRST, BOTH))
CASES: dict[str, Edits] = {
    "tukey": TUKEY,
    "scheffe": (("holm", "scheffe"), *TUKEY[1:]),
    "games_howell": (("holm", "games_howell"), *TUKEY[2:]),
    "dunnett": (("holm", "dunnett"), ("welch_t", "t_contrast"), (FIRST, BOTH)),
    "dunnett_one_side_doubled": (("holm", "dunnett"), ("welch_t", "t_contrast")),
    "dunnett_one_side": (("holm", "dunnett"), ("welch_t", "t_contrast"), ONE_SIDED_LEVEL),
    "dunnett_side_of_the_claim": (
        ("holm", "dunnett"), ("welch_t", "t_contrast"), (FIRST, BOTH), ONE_SIDED_LEVEL,
    ),
    "dunnett_below": (
        ("holm", "dunnett"), ("welch_t", "t_contrast"), (FIRST, FIRST.replace("above", "below")),
    ),
}  # fmt: skip


def edited(*edits: tuple[str, str]) -> str:
    text = SPEC
    for there, instead in edits:
        assert there in text, there
        text = text.replace(there, instead, 1)
    return text


def written(folder: Path, spec: str, lines: list[str] | None = None) -> Path:
    path = write_study(folder, spec=spec, lines=lines)
    beforehand.run(path).write(path.with_suffix(".run"), only="html")
    return path.with_suffix(".run")


def table(run: Path) -> list[dict[str, str]]:
    every = csv.DictReader(io.StringIO((run / "tests.csv").read_text("utf-8")))
    return [row for row in every if row["family"] == "strength"]


def recheck(run: Path) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-I", str(run / "recheck.py")]
    return subprocess.run(command, capture_output=True, text=True, check=False)


@pytest.fixture(scope="module", params=list(CASES))
def case(request: pytest.FixtureRequest) -> str:
    return str(request.param)


@pytest.fixture(scope="module")
def run(case: str, tmp_path_factory: pytest.TempPathFactory) -> Path:
    return written(tmp_path_factory.mktemp("simultaneous"), edited(*CASES[case]))


def test_the_checker_agrees(case: str, run: Path) -> None:
    done = recheck(run)
    assert done.stderr == ""
    assert "everything agrees" in done.stdout
    name = next(edit[1] for edit in CASES[case] if edit[0] == "holm")
    assert f"and the planned number of groups: {name}." in done.stdout
    assert done.returncode == 0


def test_an_interval_leaves_out_the_null_value_if_and_only_if_it_is_rejected(run: Path) -> None:
    for row in table(run):
        rejected = row["state"] in ("rejected", "rejected_against_claim")
        lower, upper = float(row["matching_lower"]), float(row["matching_upper"])
        assert (lower > 0 or upper < 0) == rejected
        assert lower < float(row["estimate"]) < upper


def test_one_side_has_a_bound(case: str, run: Path) -> None:
    for row in table(run):
        ends = float(row["matching_lower"]), float(row["matching_upper"])
        if "side" in case:
            assert ends[1] == math.inf
        elif case == "dunnett_below":
            assert ends[0] == -math.inf
        else:
            assert all(map(math.isfinite, ends))
        assert float(row["matching_level"]) == pytest.approx(
            0.975 if case in ("dunnett_one_side_doubled", "dunnett_below") else 0.95, rel=1e-12
        )


def test_the_report_says_so(run: Path) -> None:
    text = (run / "report.html").read_text("utf-8")
    assert "together" in text
    assert "The simultaneous intervals match the decisions" in text
    assert "further groups of the same size" in text


def groups() -> list[np.ndarray]:
    """The values of each mix, by a reading of the tests' own."""
    found: dict[str, list[float]] = {mix: [] for mix, _, _ in MIXES}
    for line in rows()[1:]:
        _, mix, strength, *_ = line.split(",")
        if strength and float(strength) >= 5:  # the slab that broke in transport is left out
            found[mix].append(float(strength))
    return [np.array(values) for values in found.values()]


@pytest.mark.parametrize("case", ["tukey"], indirect=True)
def test_scipy_tukey(run: Path) -> None:
    # scipy's p is one minus a distribution function that is good to about 1e-11
    again = stats.tukey_hsd(*groups()).pvalue
    expected = [again[1, 0], again[2, 0], again[2, 1]]
    assert [float(row["p_family"]) for row in table(run)] == pytest.approx(expected, rel=1e-6, abs=1e-9)


@pytest.mark.parametrize(
    ("case", "scipys", "times"),
    [("dunnett", "two-sided", 1), ("dunnett_one_side", "greater", 1), ("dunnett_one_side_doubled", "greater", 2)],
    indirect=["case"],
)
def test_scipy_dunnett(run: Path, scipys: Any, times: int) -> None:
    # scipy's p moves by about 1e-4 with its seed
    control, *others = groups()
    again = stats.dunnett(*others, control=control, alternative=scipys, rng=np.random.default_rng(3)).pvalue
    assert [float(row["p_family"]) for row in table(run)] == pytest.approx(list(times * again), abs=5e-4)


def without_foam() -> list[str]:
    """The foam slabs were never weighed down to breaking."""
    lines = rows()
    return [",".join([*line.split(",")[:2], "", *line.split(",")[3:]]) if ",foam," in line else line for line in lines]


def test_a_missing_group_is_still_counted(tmp_path: Path) -> None:
    run = written(tmp_path / "dunnett", edited(*CASES["dunnett"]), without_foam())
    fibre, foam = table(run)
    assert foam["state"] == "no_result"
    assert float(foam["p_family"]) == 1
    # one comparison is left, and stands for two: its p is that of its t-test, doubled
    assert float(fibre["p_family"]) == pytest.approx(2 * float(fibre["p"]), rel=1e-9)
    assert "times 2/1, planned over computed" in (run / "report.html").read_text("utf-8")
    assert recheck(run).returncode == 0

    run = written(tmp_path / "tukey", edited(*CASES["tukey"]), without_foam())
    fibre, *others = table(run)
    assert [row["state"] for row in others] == ["no_result"] * 2
    record = json.loads((run / "record.json").read_text("utf-8"))
    assert record["families"][0]["given"]["groups"] == 3
    t, df = float(fibre["statistic"]), float(fibre["df"])
    expected = stats.studentized_range.sf(math.sqrt(2) * abs(t), 3, df)
    assert float(fibre["p_family"]) == pytest.approx(expected, rel=1e-6, abs=1e-10)
    assert recheck(run).returncode == 0


def test_a_control_on_either_side_gives_the_same_decisions(tmp_path: Path) -> None:
    hypotheses = "".join(
        f"      - {{id: {name}, test: t_contrast, outcome: strength, alternative: {side}, "
        f"groups: {{column: mix, first: {first}, second: {second}}}}}\n"
        for name, side, first, second in (("fibre", "above", "fibre", "plain"), ("foam", "below", "plain", "foam"))
    )
    start, end = SPEC.index("    comparisons:"), SPEC.index("  - id: second")
    turned = SPEC[:start] + f"    hypotheses:\n{hypotheses}" + SPEC[end:]
    run = written(tmp_path / "turned", turned.replace("procedure: holm", "procedure: dunnett"))
    straight = written(tmp_path / "straight", edited(*CASES["dunnett_one_side_doubled"]))
    for one, other in zip(table(run), table(straight), strict=True):
        assert float(one["p_family"]) == pytest.approx(float(other["p_family"]), rel=1e-10)
    assert recheck(run).returncode == 0


def test_an_altered_ingredient_is_found(tmp_path: Path) -> None:
    run = written(tmp_path, edited(*CASES["dunnett_one_side"]))
    record = json.loads((run / "record.json").read_text("utf-8"))
    given = record["families"][0]["given"]
    for name, change in (("statistics", -1), ("statistics", 1.01), ("loadings", 0.9)):
        altered = json.loads(json.dumps(record))
        altered["families"][0]["given"][name][1] = given[name][1] * change
        done = recheck(with_record(run, altered))
        assert done.returncode == 1
        assert f"record.json, family 'strength', {name}:" in done.stdout


def with_record(run: Path, record: dict[str, Any]) -> Path:
    """Write another record with the checksums that belong to it."""
    (run / "record.json").write_text(json.dumps(record), "utf-8")
    files = {
        path.name: path.read_bytes() for path in run.iterdir() if path.name not in ("manifest-sha256.txt", "run.json")
    }
    assert sha256(files["tests.csv"]) == record["tests_csv_sha256"]
    (run / "manifest-sha256.txt").write_bytes(manifest(files))
    return run


def test_check_knows_them(tmp_path: Path) -> None:
    for name in ("tukey", "dunnett"):
        path = write_study(tmp_path / name, spec=edited(*CASES[name]))
        command = [sys.executable, "-m", "beforehand", "check", str(path)]
        done = subprocess.run(command, capture_output=True, text=True, check=False)
        assert done.returncode == 0, done.stderr
        assert name in done.stdout
