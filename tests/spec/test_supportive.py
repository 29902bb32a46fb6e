"""Supportive analyses and descriptions in the spec: what they expand to, every fault, and the sealed plan."""

import json
from pathlib import Path
from typing import Any

import pytest
import yaml

from beforehand.errors import SpecFault
from beforehand.spec.load import Spec, read_spec

HERE = Path(__file__).parent
BASE = (HERE / "faults" / "base.yaml").read_text(encoding="utf-8")
CASES = yaml.safe_load((HERE / "faults" / "supportive.yaml").read_text(encoding="utf-8"))


def supportive(of: str, change: str, kind: str = "sensitivity") -> str:
    return (
        f"supportive:\n  - id: kept_only\n    of: {of}\n    change: {change}\n    because: some were lost\n"
        f"    analysis: {kind}\n"
    )


def load(sections: str, *edits: list[str]) -> Spec:
    text = BASE
    for there, instead in edits:
        assert there in text, "the edit no longer fits base.yaml"
        text = text.replace(there, instead, 1)
    return read_spec(text.replace("answers:\n", f"{sections}answers:\n", 1).encode(), Path("buoys.yaml"))


def sections_of(case: dict[str, Any]) -> str:
    if "describe" in case:
        return f"describe:\n  - {case['describe']}\n"
    more = "".join(f"  {line}\n" for line in case.get("sections", "").splitlines())
    return supportive(case["of"], case["change"], case.get("kind", "sensitivity")) + more


@pytest.mark.parametrize("case", CASES, ids=[case["name"] for case in CASES])
def test_message(case: dict[str, Any]) -> None:
    with pytest.raises(SpecFault) as caught:
        load(sections_of(case), *case.get("edits", []))
    assert str(caught.value) == case["message"].rstrip("\n")


def test_names_of_cases_are_unique() -> None:
    names = [case["name"] for case in CASES]
    assert len(names) == len(set(names))


def test_everything_but_the_change_is_inherited() -> None:
    spec = load(supportive("lost_silicone", "{analysis_set: kept}"))
    (one,) = spec.supportive
    (base,) = [hypothesis for hypothesis in spec.hypotheses if hypothesis.id == "lost_silicone"]
    assert (one.id, one.of, one.analysis, one.because) == (
        "kept_only", "lost_silicone", "sensitivity", "some were lost",
    )  # fmt: skip
    different = {key for key in type(base).model_fields if getattr(base, key) != getattr(one.hypothesis, key)}
    assert different == {"id", "analysis_set"}
    assert one.hypothesis.analysis_set == "kept"


def test_of_a_family_is_one_analysis_of_each_member() -> None:
    spec = load(supportive("main", "{analysis_set: kept}"))
    assert [(one.id, one.of) for one in spec.supportive] == [
        ("kept_only/copper-bare", "main/copper-bare"),
        ("kept_only/silicone-bare", "main/silicone-bare"),
    ]
    assert spec.place_of("kept_only/copper-bare") == ("supportive", 0)
    written_out = load(supportive("further", "{where: \"harbour == 'south'\"}"))
    assert [one.id for one in written_out.supportive] == [
        "kept_only/lost_silicone", "kept_only/gained", "kept_only/limit",
    ]  # fmt: skip


def test_nothing_of_it_is_counted_or_opens_a_gate() -> None:
    spec = load(supportive("main", "{analysis_set: kept}"))
    assert [family.planned for family in spec.families] == [2, 3]
    assert [hypothesis.id for hypothesis in spec.hypotheses] == [hypothesis.id for hypothesis in load("").hypotheses]


@pytest.mark.parametrize(
    ("of", "change", "side", "direction", "null"),
    [
        # from one side to both: the claim keeps its side, so that a one-sided level can read p
        ("main/copper-bare", "{alternative: two_sided}", "two_sided", "below", {"at": 0}),
        # from both sides to that of the claim
        ("gained", "{alternative: above}", "above", None, {"at": 0}),
        # another margin brings its own side; without one the side stays
        ("main/copper-bare", "{null_hypothesis: {at_least: -2}, margin_basis: {text: t, source: s}}", "below", None,
         {"at_least": -2}),
        ("limit", "{null_hypothesis: {at: 40}}", "below", None, {"at": 40}),
        ("limit", "{null_hypothesis: {at_least: 45}}", "below", None, {"at_least": 45}),
        # groups named the other way round, on the mirrored side and in other rows
        ("main/copper-bare", "{groups: {column: paint, first: bare, second: copper}, alternative: above, "
         "analysis_set: kept}", "above", None, {"at": 0}),
    ],
)  # fmt: skip
def test_side_and_null_follow_the_change(
    of: str, change: str, side: str, direction: str | None, null: dict[str, float]
) -> None:
    (one,) = load(supportive(of, change)).supportive
    written = one.hypothesis.null_hypothesis.model_dump(exclude_none=True)
    assert (one.hypothesis.side, one.hypothesis.claim_direction, written) == (side, direction, null)


def test_another_test_brings_its_own_options_and_null_value() -> None:
    options = "test: fisher_exact\n        options: {two_sided_by: smaller_probability}"
    change = "{test: mann_whitney, outcome: growth}"
    (one,) = load(supportive("lost_silicone", change), ["test: fisher_exact", options]).supportive
    assert "two_sided_by" not in one.hypothesis.options
    assert one.hypothesis.null_hypothesis.margins == (0.0,)  # a shift, where the odds ratio had 1


def test_a_margin_of_a_difference_is_no_margin_of_a_ratio() -> None:
    margin = "alternative: below\n      analysis_set"
    with_margin = "null_hypothesis: {at_least: 2}\n      margin_basis: {text: t, source: s}\n      analysis_set"
    change = '{test: fisher_exact, outcome: {column: lost, values: ["yes"]}}'
    with pytest.raises(SpecFault, match="keeps the null hypothesis of a test about difference in means for one about"):
        load(supportive("main", change), [margin, with_margin])


@pytest.mark.parametrize(
    "edit",
    [
        ["of: main\n", "of: main/copper-bare\n"],
        ["{analysis_set: kept}", "{test: mann_whitney}"],
        ["some were lost", "many were lost"],
        ["analysis: sensitivity", "analysis: supplementary"],
        ["columns: [before]", "columns: [before, growth]"],
        ["by: paint}", "by: harbour}"],
    ],
    ids=lambda edit: edit[1][:30],
)
def test_the_sealed_plan_covers_both(edit: list[str]) -> None:
    sections = supportive("main", "{analysis_set: kept}") + "describe:\n  - {id: start, columns: [before], by: paint}\n"
    spec, changed = load(sections), load(sections.replace(*edit))
    assert spec.plan_checksum != load("").plan_checksum
    assert changed.plan_checksum != spec.plan_checksum
    assert changed.particulars == spec.particulars


def test_the_plan_holds_what_is_computed_with_its_defaults() -> None:
    plan = json.loads(load(supportive("lost_silicone", "{analysis_set: kept}")).plan)
    (written,) = plan["supportive"]
    assert written["change"] == {"analysis_set": "kept"}
    (computed,) = written["analyses"]
    assert (computed["id"], computed["test"], computed["null_hypothesis"]) == ("kept_only", "fisher_exact", {"at": 1})
    assert computed["options"] == {"two_sided_by": "smaller_tail"}


def test_an_answer_may_be_about_a_supportive_analysis() -> None:
    text = BASE.replace("about: further", "about: kept_only")
    sections = supportive("main", "{analysis_set: kept}")
    assert read_spec(text.replace("answers:\n", f"{sections}answers:\n", 1).encode(), Path("buoys.yaml")).supportive
