"""From short forms to hypotheses, from the spec alone and with the rows of the data."""

from pathlib import Path

import pytest

from beforehand.errors import SpecFault
from beforehand.spec.expand import escape, with_features
from beforehand.spec.load import Spec, read_spec

HEAD = """\
beforehand: 1
study: {title: Rust on railings, identifier: RR-1, intent: exploratory}
data:
  - id: railings
    file: railings.csv
    identified_by: [railing]
    columns:
      railing: {kind: text}
      coat: {kind: category, levels: [none, wax, "zinc/tin", 50 %]}
      side: {kind: category, levels: [sea, land]}
      rust: {kind: number, unit: mm}
      depth: {kind: number, unit: mm}
      flaking: {kind: category, levels: ["yes", "no"]}
      blistered: {kind: category, levels: ["yes", "no"]}
      label: {kind: text}
      p_value: {kind: number}
      effect: {kind: number}
promise: {criterion: false_discovery_rate, level: 0.1, level_is: two_sided}
families:
  - id: coats
    question: Which coats differ?
    purpose: EXPLORATORY OUTCOME MEASURE
    reason: DATA DRIVEN
    procedure: benjamini_hochberg
"""


def spec_of(form: str) -> Spec:
    return read_spec((HEAD + form).encode(), Path("railings.yaml"))


def test_all_pairs_are_later_minus_earlier() -> None:
    spec = spec_of(
        "    comparisons: {test: welch_t, outcome: rust, groups: coat, pairs: all, alternative: two_sided}\n"
    )
    (family,) = spec.families
    assert [hypothesis.id for hypothesis in family.members] == [
        "coats/wax-none",
        "coats/zinc%2Ftin-none",
        "coats/50 %25-none",
        "coats/zinc%2Ftin-wax",
        "coats/50 %25-wax",
        "coats/50 %25-zinc%2Ftin",
    ]
    assert (family.planned, family.from_data) == (6, None)
    first = family.members[0]
    assert first.groups is not None
    assert (first.groups.first, first.groups.second) == ("wax", "none")
    assert (first.family, first.data, first.outcome) == ("coats", "railings", "rust")
    assert (first.purpose, first.reason) == ("EXPLORATORY OUTCOME MEASURE", "DATA DRIVEN")
    assert first.null_hypothesis.at == 0
    assert first.missing_values.method == "complete_cases"
    assert family.promise.level == 0.1


def test_each_with_one_and_the_claim() -> None:
    spec = spec_of(
        "    comparisons:\n      test: welch_t\n      outcome: rust\n      groups: coat\n"
        "      pairs: {each_with: wax}\n      alternative: below\n"
        '      claim: "{group} rusts less than {second} ({first} first, {other} {braces})"\n'
    )
    assert [hypothesis.id for hypothesis in spec.hypotheses] == [
        "coats/none-wax",
        "coats/zinc%2Ftin-wax",
        "coats/50 %25-wax",
    ]
    assert spec.hypotheses[1].claim == "zinc/tin rusts less than wax (zinc/tin first, {other} {braces})"


def test_the_null_of_a_ratio_is_one_and_options_have_their_defaults() -> None:
    spec = spec_of(
        "    hypotheses:\n      - id: flaking_wax\n        test: fisher_exact\n"
        '        outcome: {column: flaking, values: ["yes"]}\n'
        "        groups: {column: coat, first: wax, second: none}\n        alternative: two_sided\n"
    )
    (hypothesis,) = spec.hypotheses
    assert hypothesis.null_hypothesis.at == 1
    assert hypothesis.options == {"two_sided_by": "smaller_tail"}


def test_many_outcomes() -> None:
    spec = spec_of(
        "    hypotheses_from:\n      test: welch_t\n      each: outcome\n      outcomes: [rust, depth]\n"
        "      groups: {column: side, first: sea, second: land}\n      alternative: above\n"
        '      claim: "{feature} is larger at the {first}"\n'
    )
    assert [(one.id, one.outcome, one.feature) for one in spec.hypotheses] == [
        ("coats/rust", "rust", "rust"),
        ("coats/depth", "depth", "depth"),
    ]
    assert spec.hypotheses[0].claim == "rust is larger at the sea"
    assert spec.families[0].planned == 2


def test_many_events() -> None:
    spec = spec_of(
        "    hypotheses_from:\n      test: fisher_exact\n      each: outcome\n      outcomes: [flaking, blistered]\n"
        '      values: ["yes"]\n      planned: 2\n'
        "      groups: {column: side, first: sea, second: land}\n      alternative: above\n"
    )
    assert [(one.outcome.column, one.outcome.values) for one in spec.hypotheses] == [
        ("flaking", ("yes",)),
        ("blistered", ("yes",)),
    ]


def test_each_family_has_the_promise_that_applies() -> None:
    form = "    hypotheses: [{id: %s, test: one_sample_t, outcome: %s, alternative: above}]\n"
    text = (
        HEAD
        + form % ("rusty", "rust")
        + (
            "  - id: wear\n    question: Is it deep?\n    procedure: holm\n"
            "    promise: {criterion: familywise_error_rate, level: 1/40, level_is: one_sided}\n"
        )
        + form % ("deep", "depth")
    )
    coats, wear = read_spec(text.encode(), Path("railings.yaml")).families
    assert (coats.promise.criterion, coats.promise.level, coats.stands_apart) == ("false_discovery_rate", 0.1, False)
    assert (wear.promise.criterion, wear.promise.level, wear.stands_apart) == ("familywise_error_rate", 0.025, True)
    study = "promise: {criterion: false_discovery_rate, level: 0.1, level_is: two_sided}\n"
    own = "    promise: {criterion: false_discovery_rate, level: 0.2, level_is: two_sided}\n"
    apart = text.replace(study, "promise: {across_families: separate}\n").replace(
        "  - id: wear", own + "  - id: wear", 1
    )
    families = read_spec(apart.encode(), Path("railings.yaml")).families
    assert [(family.promise.level, family.stands_apart) for family in families] == [(0.2, True), (0.025, True)]


SUPPLIED = (
    "    hypotheses_from:\n      test: supplied_p\n      each: label\n      p: p_value\n      estimate: effect\n"
    "      origin: the laboratory, with its own program\n      planned: 3\n"
)


def test_supplied_p_wait_for_the_data() -> None:
    spec = spec_of(SUPPLIED)
    (family,) = spec.families
    assert (family.members, family.planned) == ((), 3)
    assert family.from_data is not None
    with_rows = with_features(spec, {"coats": ("a", "b/c", "ü\u00a0d")})
    assert [(one.id, one.feature) for one in with_rows.hypotheses] == [
        ("coats/a", "a"),
        ("coats/b%2Fc", "b/c"),
        ("coats/ü%C2%A0d", "ü\u00a0d"),
    ]
    assert with_rows.hypotheses[0].alternative == "two_sided"
    assert with_rows.plan == spec.plan
    assert spec.hypotheses == ()


def test_another_number_of_rows_is_a_fault() -> None:
    with pytest.raises(SpecFault) as caught:
        with_features(spec_of(SUPPLIED), {"coats": ("a", "b", "a", "c")})
    assert str(caught.value) == (
        "railings.yaml: 2 faults\n"
        "  line 27, column 13: the label 'a' stands in several rows; in family 'coats' each names one.\n"
        "  line 31, column 16: family 'coats' plans 3 hypotheses and the data have 4. "
        "Correct the data, or the number and the reason for it."
    )


@pytest.mark.parametrize(
    ("text", "escaped"),
    [("plain", "plain"), ("a/b", "a%2Fb"), ("a-b", "a%2Db"), ("5 %", "5 %25"), ("a\u200bb", "a%E2%80%8Bb"), ("é", "é")],
)
def test_escape(text: str, escaped: str) -> None:
    assert escape(text) == escaped


def test_places_of_made_and_written_ids() -> None:
    spec = read_spec((Path(__file__).parent / "faults" / "base.yaml").read_bytes(), Path("buoys.yaml"))
    assert spec.place_of("main/copper-bare") == ("families", 0, "comparisons")
    assert spec.place_of("limit") == ("families", 1, "hypotheses", 2)
    assert spec.place_of("buoys") == ("data", 0)
    assert str(spec.fault((*spec.place_of("limit"), "where"), "x")) == "line 73, column 16: x"
    assert spec.data_set("buoys").unit_columns == ("buoy",)
