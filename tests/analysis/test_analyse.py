"""One analysis of a small study: numbers by hand or by scipy, states by the rules of the design."""

from pathlib import Path

import numpy as np
import pytest
from scipy import stats
from small_study import SPEC, rows, write_study

import beforehand
from beforehand.record.model import Record


def values(column: int, mix: str) -> list[float]:
    """Read one column of the data file by hand: without the slab that broke, and without missing values."""
    cells = [row.split(",") for row in rows()[1:]]
    return [float(c[column]) for c in cells if c[1] == mix and c[column] and not (c[2] and float(c[2]) < 5)]


def column(record: Record, name: str) -> dict[str, float]:
    return dict(zip(record.results.id, getattr(record.results, name), strict=True))


def test_p_is_that_of_scipy_and_is_doubled_against_a_two_sided_level(tmp_path: Path) -> None:
    record = beforehand.run(write_study(tmp_path)).record
    fibre, plain = values(2, "fibre"), values(2, "plain")
    expected = stats.ttest_ind(fibre, plain, equal_var=False, alternative="greater").pvalue
    assert column(record, "p")["strength/fibre-plain"] == pytest.approx(expected, rel=1e-10)
    assert column(record, "p_entered")["strength/fibre-plain"] == pytest.approx(2 * expected, rel=1e-10)
    shrinkage = stats.ttest_ind(values(3, "fibre"), values(3, "plain")).pvalue
    assert column(record, "p_entered")["shrinkage_fibre"] == pytest.approx(shrinkage, rel=1e-10)


def test_the_study_p_of_a_later_family_is_the_largest_on_the_way(tmp_path: Path) -> None:
    record = beforehand.run(write_study(tmp_path)).record
    p_family, p_study = column(record, "p_family"), column(record, "p_study")
    gate = max(p_family["strength/fibre-plain"], p_family["strength/foam-plain"])
    assert p_study["shrinkage_fibre"] == max(gate, p_family["shrinkage_fibre"])


def test_an_estimate_at_its_null_value_lies_on_no_side(tmp_path: Path) -> None:
    """Equal means leave two one-sided p of 1/2, whose last digits the two computations may write differently."""
    spec = SPEC.replace("alternative: above\n", "alternative: two_sided\n      claim_direction: above\n")
    same = ["5.0", "7.0", "6.0"] * 6
    head, *body = rows()
    lines = [head]
    for number, row in enumerate(body):
        cells = row.split(",")
        cells[2] = same[number // 3]
        lines.append(",".join(cells))
    record = beforehand.run(write_study(tmp_path, spec=spec, lines=lines)).record
    assert column(record, "estimate")["strength/fibre-plain"] == 0.0
    assert column(record, "side_agrees")["strength/fibre-plain"] == "yes"


@pytest.mark.parametrize(
    ("direction", "states"),
    [
        ("above", ["rejected", "rejected"]),
        # both are rejected on the other side than their claim: a finding of harm, and the gate stays closed
        ("below", ["rejected_against_claim", "rejected_against_claim"]),
    ],
)
def test_against_the_claim_frees_nothing(tmp_path: Path, direction: str, states: list[str]) -> None:
    spec = SPEC.replace("alternative: above\n", f"alternative: two_sided\n      claim_direction: {direction}\n")
    record = beforehand.run(write_study(tmp_path, spec=spec)).record
    assert list(record.results.state[:2]) == states
    assert record.families[1].tested is (direction == "above")
    assert record.families[1].closed_by == ("" if direction == "above" else "strength")


def test_a_two_sided_test_meets_a_one_sided_level_with_the_side_of_its_claim(tmp_path: Path) -> None:
    spec = SPEC.replace("level: 0.05\n  level_is: two_sided", "level: 0.025\n  level_is: one_sided")
    record = beforehand.run(write_study(tmp_path, spec=spec)).record
    below = stats.ttest_ind(values(3, "fibre"), values(3, "plain"), alternative="less").pvalue
    assert column(record, "entered_as")["shrinkage_fibre"] == "claim side"
    assert column(record, "p_entered")["shrinkage_fibre"] == pytest.approx(below, rel=1e-10)
    assert column(record, "entered_as")["strength/fibre-plain"] == "as it is"
    assert column(record, "interval_level")["strength/fibre-plain"] == 0.95


def test_a_missing_result_counts_as_one_and_closes_the_gate(tmp_path: Path) -> None:
    lines = [row if ",foam," not in row else ",".join([*row.split(",")[:2], "", *row.split(",")[3:]]) for row in rows()]
    record = beforehand.run(write_study(tmp_path, lines=lines)).record
    assert list(record.results.state) == ["rejected", "no_result", "not_tested", "not_tested"]
    assert column(record, "p_entered")["strength/foam-plain"] == 1.0
    # with m = 2 as planned the smallest p is doubled, although only one test has a result
    assert column(record, "factor")["strength/fibre-plain"] == 2.0
    assert (record.families[0].planned, record.families[0].computed) == (2, 1)
    assert np.isnan(record.results.p_family[2:]).all()
    assert not np.isnan(record.results.p_study[2:]).any()
    assert [w.rule for w in record.warnings if w.about == "strength"] == ["planned_test_without_result"]


def test_exclusions_and_missing_values_are_counted(tmp_path: Path) -> None:
    record = beforehand.run(write_study(tmp_path)).record
    (account,) = record.rows
    assert (account.received, account.analysed) == (48, 47)
    assert account.exclusions[0].by_group == {"plain": 1, "fibre": 0, "foam": 0}
    missing = {one.variable: one.by_group for one in account.missing if one.rows}
    assert missing == {"strength": {"plain": 0, "fibre": 1, "foam": 0}}


def test_simultaneous_intervals_match_bonferroni(tmp_path: Path) -> None:
    """By hand: with m = 2 at 5 % two-sided each interval has 97.5 %; half-width is t(0.9875) standard errors."""
    record = beforehand.run(write_study(tmp_path)).record
    row = record.results.row(2)
    half = stats.t.ppf(0.9875, row["df"]) * row["standard_error"]
    assert row["matching_level"] == 0.975
    assert row["matching_lower"] == pytest.approx(row["estimate"] - half, rel=1e-10)
    assert row["matching_upper"] == pytest.approx(row["estimate"] + half, rel=1e-10)


def test_own_promises_stand_apart(tmp_path: Path) -> None:
    spec = SPEC.replace("level: 0.05\n  level_is: two_sided\n  across_families: serial\n  order: [strength, second]",
                        "across_families: separate").replace("  criterion: familywise_error_rate\n", "")  # fmt: skip
    own = "    promise: {criterion: familywise_error_rate, level: 1/40, level_is: two_sided}\n    procedure: "
    record = beforehand.run(write_study(tmp_path, spec=spec.replace("    procedure: ", own))).record
    assert record.promise is None
    assert record.scheme == "separate"
    assert record.families[0].promise.level_text == "0.025"
    assert set(record.results.decides) == {"p_family"}
    assert np.isnan(record.results.p_study).all()


def test_equivalence_uses_the_larger_of_two_one_sided_p(tmp_path: Path) -> None:
    spec = SPEC.replace(
        "        alternative: two_sided\n        claim_direction: below\n",
        "        null_hypothesis: {outside: [-0.3, 0.3]}\n        margin_basis: {text: agreed, source: protocol}\n",
    ).replace("level: 0.05\n  level_is: two_sided", "level: 0.05\n  level_is: one_sided")
    record = beforehand.run(write_study(tmp_path, spec=spec)).record
    fibre, plain = values(3, "fibre"), values(3, "plain")
    upper = stats.ttest_ind(np.array(fibre) + 0.3, plain, alternative="greater").pvalue
    lower = stats.ttest_ind(np.array(fibre) - 0.3, plain, alternative="less").pvalue
    assert column(record, "p")["shrinkage_fibre"] == pytest.approx(max(upper, lower), rel=1e-9)
    assert column(record, "interval_level")["shrinkage_fibre"] == 0.90  # two one-sided tests at 5 % each


def test_nothing_depends_on_other_hypotheses(tmp_path: Path) -> None:
    """Taking one hypothesis out changes no p of the others, only their adjustment."""
    whole = column(beforehand.run(write_study(tmp_path / "a")).record, "p")
    head, tail = SPEC.split("      - id: cracks_fibre\n")
    assert tail
    part = column(beforehand.run(write_study(tmp_path / "b", spec=head)).record, "p")
    assert part == {name: p for name, p in whole.items() if name != "cracks_fibre"}
