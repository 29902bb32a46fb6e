"""Supportive analyses of a whole small study: numbers by scipy, nothing decided, what agrees with the hypothesis."""

import json
import math
from collections import Counter
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from scipy import stats
from small_study import SPEC, rows
from supportive_study import values, write

import beforehand
from beforehand.analysis.computed import compute
from beforehand.analysis.supportive import _signs
from beforehand.cli import exit_code
from beforehand.data import samples
from beforehand.data.dataset import read_data
from beforehand.errors import TwoComputationsDisagree
from beforehand.hypothesis_tests.contract import Outcome
from beforehand.record.model import Record, SupportiveRecord
from beforehand.spec.load import load_spec


def exact_rank_p(first: list[float], second: list[float]) -> float:
    """Count the choices of as many values whose ranks sum to no less (scipy has no exact p where values are equal)."""
    ranks = (2 * stats.rankdata([*first, *second])).astype(int)  # doubled, so that mean ranks are whole
    ways = Counter({(0, 0): 1})
    for rank in ranks.tolist():
        ways.update({(size + 1, total + rank): count for (size, total), count in list(ways.items())})
    observed = int(ranks[: len(first)].sum())
    chosen = {total: count for (size, total), count in ways.items() if size == len(first)}
    return sum(count for total, count in chosen.items() if total >= observed) / sum(chosen.values())


@pytest.fixture(scope="module")
def record(tmp_path_factory: pytest.TempPathFactory) -> Record:
    return beforehand.run(write(tmp_path_factory.mktemp("screed"))).record


def row(record: Record, name: str) -> dict[str, float]:
    return record.results.row(record.results.id.index(name))


def supportive(record: Record, name: str) -> SupportiveRecord:
    return next(one for one in record.supportive if one.hypothesis.id == name)


def one_change(tmp_path: Path, of: str, change: str, **study: object) -> SupportiveRecord:
    """Run the study with a single supportive analysis."""
    section = f"supportive:\n  - {{id: other_way, of: {of}, change: {change}, because: b, analysis: supplementary}}\n"
    (one,) = beforehand.run(write(tmp_path, sections=section, **study)).record.supportive  # type: ignore[arg-type]
    return one


def test_each_follows_its_family_in_the_table_and_has_its_kind_and_reason(record: Record) -> None:
    assert record.results.id[4:] == ("uncracked/fibre-plain", "uncracked/foam-plain", "by_ranks", "shrinks_less")
    assert record.results.family[4:] == ("strength", "strength", "strength", "second")
    assert [(one.of, one.analysis, one.because) for one in record.supportive] == [
        ("strength/fibre-plain", "subgroup", "a crack weakens a slab by itself"),
        ("strength/foam-plain", "subgroup", "a crack weakens a slab by itself"),
        ("strength/fibre-plain", "sensitivity", "two slabs stand far from the others"),
        ("shrinkage_fibre", "supplementary", "nobody expects more shrinkage"),
    ]


@pytest.mark.parametrize("mix", ["fibre", "foam"])
def test_another_subset_is_that_of_scipy(record: Record, mix: str) -> None:
    first, second = (values("strength", name, uncracked=True) for name in (mix, "plain"))
    expected = stats.ttest_ind(first, second, equal_var=False, alternative="greater")
    interval = stats.ttest_ind(first, second, equal_var=False).confidence_interval(0.95)
    found = row(record, f"uncracked/{mix}-plain")
    assert (found["n_first"], found["n_second"]) == (len(first), len(second))
    assert found["p"] == pytest.approx(expected.pvalue, rel=1e-10)
    assert found["estimate"] == pytest.approx(np.mean(first) - np.mean(second), rel=1e-12)
    assert (found["lower"], found["upper"]) == pytest.approx((interval.low, interval.high), rel=1e-10)
    # a one-sided p against a level that both sides share
    one = supportive(record, f"uncracked/{mix}-plain")
    assert (one.p_read, one.read_as) == (pytest.approx(2 * expected.pvalue, rel=1e-10), "doubled")


def test_another_test_and_another_side_are_those_of_scipy(record: Record) -> None:
    fibre, plain = values("strength", "fibre"), values("strength", "plain")
    assert row(record, "by_ranks")["statistic"] == stats.mannwhitneyu(fibre, plain).statistic
    assert row(record, "by_ranks")["p"] == pytest.approx(exact_rank_p(fibre, plain), rel=1e-12)
    below = stats.ttest_ind(values("shrinkage", "fibre"), values("shrinkage", "plain"), alternative="less")
    assert row(record, "shrinks_less")["p"] == pytest.approx(below.pvalue, rel=1e-10)
    assert supportive(record, "shrinks_less").p_read == pytest.approx(2 * below.pvalue, rel=1e-10)


def test_nothing_is_decided_or_counted(record: Record, tmp_path: Path) -> None:
    for one in record.supportive:
        found = row(record, one.hypothesis.id)
        assert found["state"] == "described"
        assert (found["decides"], found["entered_as"], found["side_agrees"]) == ("", "", "")
        for column in ("p_family", "p_study", "threshold", "p_entered", "factor", "product", "matching_lower"):
            assert math.isnan(found[column]), column
        assert (found["rank"], found["from_rank"], found["survives_up_to"]) == (0, 0, 0)
    without = beforehand.run(write(tmp_path, sections="")).record
    assert [family.planned for family in record.families] == [2, 2]
    assert record.families == without.families
    assert record.hypotheses == without.hypotheses
    for name in without.results.id:
        assert str(row(record, name)) == str(row(without, name))
    assert record.drawn == without.drawn


def test_each_is_computed_twice(record: Record) -> None:
    compared = {one.quantity: one.compared for one in record.agreement}
    assert compared["estimate"] == compared["p"] == 8  # 4 hypotheses and 4 supportive analyses
    assert compared["adjusted p within the family"] == 4


def test_a_slip_in_a_supportive_analysis_stops_the_run(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    right = samples.take

    def swapped(dataset: object, hypothesis: object) -> samples.Samples:
        taken = right(dataset, hypothesis)  # type: ignore[arg-type]
        if getattr(hypothesis, "id", "") != "by_ranks":
            return taken
        return replace(taken, arrays=taken.arrays[::-1], n=taken.n[::-1])

    monkeypatch.setattr("beforehand.analysis.computed.take", swapped)
    with pytest.raises(TwoComputationsDisagree, match="by_ranks"):
        beforehand.run(write(tmp_path))


def test_the_change_is_said_in_words(record: Record) -> None:
    said = {one.hypothesis.id: one.changes for one in record.supportive}
    assert said == {
        "uncracked/fibre-plain": ("rows: cracked == 'no' instead of all",),
        "uncracked/foam-plain": ("rows: cracked == 'no' instead of all",),
        "by_ranks": ("test: Mann-Whitney test instead of Welch's t-test",),
        "shrinks_less": ("side: below instead of two-sided",),
    }


@pytest.mark.parametrize(
    ("of", "change", "words"),
    [
        ("shrinkage_fibre", "{outcome: strength, alternative: below}",
         ("outcome: strength instead of shrinkage", "side: below instead of two-sided")),
        ("shrinkage_fibre", "{groups: {column: mix, first: foam, second: plain}}",
         ("groups: foam and plain of mix instead of fibre and plain of mix",)),
        ("cracks_fibre", "{options: {two_sided_by: smaller_probability}}",
         ("options: two sided by smaller probability instead of two sided by smaller tail",)),
        ("strength/foam-plain",
         "{null_hypothesis: {at_most: 1}, margin_basis: {text: t, source: s}, missing_values: {method: complete_cases, "
         "mechanism: lost notes}}",
         ("null hypothesis: at most 1 instead of at 0",
          "missing values: complete cases (lost notes) instead of complete cases")),
    ],
)  # fmt: skip
def test_every_kind_of_change_is_said(tmp_path: Path, of: str, change: str, words: tuple[str, ...]) -> None:
    assert one_change(tmp_path, of, change).changes == words


def test_all_agree_here(record: Record) -> None:
    assert all(one.same_direction and one.same_side for one in record.supportive)


def weaker_without_cracks() -> list[str]:
    """Give the rows with the cracked foam slabs at 60 MPa and the others about 25, where plain ones lie about 31."""
    head, *body = [row.split(",") for row in rows()]
    for number, cells in enumerate(body):
        if cells[1] == "foam":
            cells[2] = "60.0" if cells[4] == "yes" else f"{25 + number % 5 / 10:.1f}"
    return [",".join(cells) for cells in [head, *body]]


def test_another_direction_is_seen(tmp_path: Path) -> None:
    change = "{where: \"cracked == 'no'\"}"
    one = one_change(tmp_path, "strength/foam-plain", change, lines=weaker_without_cracks())
    # with the cracked slabs foam is 2.7 MPa stronger, p far above 5 %; without them it is weaker
    assert (one.same_direction, one.same_side) == (False, True)


def test_the_other_side_of_the_threshold_is_seen(tmp_path: Path) -> None:
    # two slabs of each mix: foam is stronger in them too, and so few can't give a small p
    one = one_change(tmp_path, "strength/foam-plain", "{where: \"slab in ['S00', 'S02', 'S03', 'S05']\"}")
    assert (one.same_direction, one.same_side) == (True, False)


def test_a_margin_of_its_own_is_what_the_direction_is_about(tmp_path: Path) -> None:
    # foam is 3.4 MPa stronger than plain: above 0, and below a margin of 5
    change = "{null_hypothesis: {at_most: 5}, margin_basis: {text: t, source: s}}"
    assert one_change(tmp_path, "strength/foam-plain", change).same_direction is False


def test_groups_named_the_other_way_round_turn_the_direction(tmp_path: Path) -> None:
    change = "{groups: {column: mix, first: plain, second: foam}, alternative: below, where: \"cracked == 'no'\"}"
    one = one_change(tmp_path, "strength/foam-plain", change)
    assert (one.same_direction, one.same_side) == (True, True)


def test_what_has_no_result_agrees_with_nothing(tmp_path: Path) -> None:
    one = one_change(tmp_path, "strength/foam-plain", "{where: \"slab == 'S02'\"}")
    assert one.hypothesis.no_result_because
    assert (one.p_read, one.read_as, one.same_direction, one.same_side) == (None, "no result", None, None)


def test_a_closed_gate_leaves_them_as_they_are(tmp_path: Path) -> None:
    """Behind a closed gate nothing is tested, and what supports a hypothesis is printed all the same."""
    spec = SPEC.replace("alternative: above\n", "alternative: below\n")
    record = beforehand.run(write(tmp_path, spec=spec)).record
    assert record.families[1].closed_by == "strength"
    assert row(record, "shrinks_less")["state"] == "described"
    assert not math.isnan(row(record, "shrinks_less")["p"])


def test_the_record_comes_back_as_it_was_written(record: Record, tmp_path: Path) -> None:
    run = beforehand.run(write(tmp_path))
    written = run.write(tmp_path / "out", only=("html",))
    again = beforehand.read_run(written.folder)
    assert again.record.supportive == record.supportive
    assert again.record.descriptions == record.descriptions
    assert again.files()["record.json"] == run.files()["record.json"]


def test_check_finds_the_rows_and_computes_no_test(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    def never(*_: object, **__: object) -> None:
        raise AssertionError("check computes no test")

    monkeypatch.setattr("beforehand.hypothesis_tests.contract.StatisticalTest.__call__", never)
    assert exit_code(["check", str(write(tmp_path)), "--json"]) == 0
    beside = json.loads(capsys.readouterr().out)["beside"]
    assert [(one["id"], one["sizes"]) for one in beside] == [
        ("uncracked/fibre-plain", [15, 7]), ("uncracked/foam-plain", [12, 7]), ("by_ranks", [15, 15]),
        ("shrinks_less", [16, 15]), ("slabs_made", [47]),
    ]  # fmt: skip


@pytest.mark.parametrize(("away", "sign"), [(2.0, 1.0), (-2.0, -1.0), (1e-9, 0.0), (-1e-9, 0.0), (1e-7, 1.0)])
def test_rounding_errors_are_no_direction(tmp_path: Path, away: float, sign: float) -> None:
    """In standard errors: two computations agree to 1e-8 of one; nearer to its null value no estimate has a side."""
    spec = load_spec(write(tmp_path))
    one = compute(spec.families[0], spec.hypotheses[0], read_data(spec))
    assert isinstance(one.result, Outcome)
    moved = replace(one, result=replace(one.result, estimate=away * one.result.standard_error))
    assert _signs(moved) == (sign,)
    assert _signs(moved, turned=True) == (-sign,)
