"""Words against numbers: no sentence, comparison or line of arithmetic contradicts what the record holds."""

import re
from collections.abc import Callable
from dataclasses import replace
from typing import Any, get_args

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from beforehand.record.model import Record
from beforehand.report.view import view
from beforehand.report.view.lines import Line, lines_of
from beforehand.report.view.sentences import TEXTS, claim, family_verdict, finding, numbers
from beforehand.report.view.trail import arithmetic, entered, trail_table
from beforehand.report.view.written import comparison, written
from beforehand.spelling import NO_BREAK, TOLERANCE, calculated, read
from beforehand.terms import State

Make = Callable[..., Record]
P = st.one_of(st.none(), st.floats(min_value=1e-9, max_value=1.0))
DRAWN = settings(max_examples=200, suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)


def one_line(make: Make, plan: Any, state: State) -> Line:
    line = lines_of(make(plan(id="one", p=[0.01])))[0]
    return replace(line, values={**line.values, "state": state})


@pytest.mark.parametrize("state", get_args(State))
def test_every_state_has_a_sentence(make: Make, plan: Any, state: State) -> None:
    found = finding(one_line(make, plan, state))
    assert "drill 1 − hand: emergence is slower".capitalize()[1:] in found.text
    assert found.lead.endswith(":")
    assert "no effect" not in found.text.lower()


@pytest.mark.parametrize(
    ("state", "lead", "part"),
    [
        ("rejected", "Shown:", "drill 1 − hand: emergence is slower."),
        ("rejected_against_claim", "Against the claim:", "a finding against the claim"),
        ("not_rejected", "Not shown:", "Nor is the contrary shown."),
        ("not_tested", "Not tested:", "No claim is made"),
        ("no_result", "No result:", "counts with p = 1"),
        ("described", "Described only:", "asks for no decision"),
        ("continue", "Continue:", "the study goes on"),
    ],
)
def test_the_state_decides_the_words(make: Make, plan: Any, state: State, lead: str, part: str) -> None:
    found = finding(one_line(make, plan, state))
    assert found.lead == lead
    assert part in found.text


def test_only_a_rejection_states_its_claim_unquoted(make: Make, plan: Any) -> None:
    for state in get_args(State):
        line = one_line(make, plan, state)
        assert (f"‘{claim(line)}’" in TEXTS[state](line)) == (state != "rejected")


def test_an_exploratory_or_unadjusted_rejection_shows_nothing(make: Make, plan: Any) -> None:
    exploratory = make(plan(id="one", p=[0.001]), intent="exploratory")
    unadjusted = make(plan(id="one", p=[0.001], criterion="per_comparison_error_rate", procedure="unadjusted"))
    for record in (exploratory, unadjusted):
        assert finding(lines_of(record)[0]).lead == "Indicated:"


@DRAWN
@given(p=st.lists(P, min_size=1, max_size=8), procedure=st.sampled_from(["holm", "bonferroni", "benjamini_hochberg"]))
def test_no_comparison_contradicts_the_state(make: Make, plan: Any, p: list[float | None], procedure: str) -> None:
    for line in lines_of(make(plan(id="one", p=p, procedure=procedure))):
        if line.state not in ("rejected", "not_rejected"):
            assert "≤" not in numbers(line)
            continue
        found = re.fullmatch(r"adjusted p (.*) ([≤>]) (.*)", comparison(line).replace(NO_BREAK, " "))
        assert found
        value, sign, threshold = found.groups()
        assert (sign == "≤") == (line.state == "rejected")
        if not value.startswith(">"):
            written_value = read(value.replace(" ", NO_BREAK))
            assert (written_value <= read(threshold) * (1 + TOLERANCE)) == (sign == "≤")


@DRAWN
@given(p=st.lists(P, min_size=1, max_size=12), procedure=st.sampled_from(["holm", "bonferroni", "benjamini_hochberg"]))
def test_a_pocket_calculator_reaches_each_decision(
    make: Make, plan: Any, p: list[float | None], procedure: str
) -> None:
    record = make(plan(id="one", p=p, procedure=procedure))
    products = {}
    for line in lines_of(record):
        product = arithmetic(line).partition(" = ")[2].partition(";")[0]
        left, times, factor = arithmetic(line).partition(" = ")[0].rpartition(" × ")
        above, _, below = factor.partition("/")
        assert times
        assert calculated(read(left) * read(above) / float(below or 1)) == calculated(read(product))
        products[line.count("rank")] = min(read(product), 1.0)
    for line in lines_of(record):
        reached = products[line.count("from_rank")]
        assert reached == pytest.approx(line.number("p_family"), rel=1e-3)
        assert (line.state == "rejected") == (reached <= line.threshold * (1 + TOLERANCE))


def test_the_trail_says_where_another_rank_counts(make: Make, plan: Any) -> None:
    table = trail_table(lines_of(make(plan(id="one", p=[0.01, 0.011, 0.04]))))
    arithmetics = [row.cells[2].text for row in table.rows]
    # Holm: 0.01 × 3 = 0.03, 0.011 × 2 = 0.022, 0.04 × 1 = 0.04: worked out by hand
    assert arithmetics == ["0.01 × 3 = 0.03", "0.011 × 2 = 0.022; rank 1 counts: 0.03", "0.04 × 1 = 0.04"]
    assert "running maximum" in " ".join(table.notes)


def test_what_is_no_multiple_of_p_is_said_in_words(make: Make, plan: Any) -> None:
    nothing = [float("nan")]
    line = lines_of(make(plan(id="one", p=[0.01], changes={"factor": nothing})))[0]
    worded = replace(line, hypothesis=replace(line.hypothesis, arithmetic="P(Q > 3.41), 4 groups, 76 df"))
    assert arithmetic(worded) == "P(Q > 3.41), 4 groups, 76 df = 0.01"


def test_the_trail_says_how_p_enters(make: Make, plan: Any) -> None:
    doubled = lines_of(make(plan(id="one", p=[0.01, None], entered_as="doubled", level_is="two_sided")))
    assert entered(doubled[0]) == "0.02: 0.01 doubled, because the level is two-sided"
    assert entered(doubled[1]) == "no result: p counts as 1"


def test_a_closed_gate_leaves_no_arithmetic_and_no_claim(make: Make, plan: Any) -> None:
    record = make(plan(id="first", p=[0.2]), plan(id="second", p=[0.001, 0.002]))
    closed = view(record, ()).results.families[1]
    assert closed.trail.rows == ()
    assert all("No claim is made, because the gate of family first stayed closed" in f.text for f in closed.findings)
    assert "no claim" in closed.estimates.caption


def test_a_bound_is_the_end_the_test_looks_at(make: Make, plan: Any) -> None:
    record = make(plan(id="one", p=[0.01], side="below"))
    table = view(record, ()).results.families[0].estimates
    assert table.head[0][-1].text.replace("\u202f", " ") == "One-sided bound, 97.5 %"
    assert table.rows[0].cells[-1].text == f"≤{NO_BREAK}{written(lines_of(record)[0]).upper}"


def test_counts_add_up() -> None:
    verdict = family_verdict({"rejected": 2, "not_rejected": 1, "no_result": 1})
    assert verdict == "4 null hypotheses: 2 rejected; 1 not rejected; 1 without a result."


def test_characters_without_a_glyph_are_named(make: Make, plan: Any) -> None:
    """U+51B7 is a Chinese character, which none of the bundled fonts has."""
    record = make(plan(id="one", p=[0.01]))
    titled = replace(record, study=replace(record.study, title="\N{CJK UNIFIED IDEOGRAPH-51B7} stores"))
    said = view(titled, ()).methods.spelling
    assert said[-1] == (
        "The fonts of this report lack 1 of the characters in the study's texts; they are shown by their codes: U+51B7."
    )
    assert not any("lack" in text for text in view(record, ()).methods.spelling)


def test_an_interval_on_the_other_side_is_said(make: Make, plan: Any) -> None:
    """A one-sided test that could only show "below" says so when its interval lies wholly above the null value."""
    beyond = {"estimate": [1.25], "lower": [0.45], "upper": [2.05], "state": ["not_rejected"]}
    (line,) = lines_of(make(plan(id="one", p=[0.99], changes=beyond)))
    assert finding(line).text.endswith("The interval lies wholly on the other side of the null value.")
    around = beyond | {"lower": [-0.45]}
    (line,) = lines_of(make(plan(id="one", p=[0.99], changes=around)))
    assert finding(line).text.endswith("Nor is the contrary shown.")


def test_a_claim_is_quoted_as_it_is_written(make: Make, plan: Any) -> None:
    (line,) = lines_of(make(plan(id="one", p=[0.01], claim="pH rises")))
    assert finding(line).text == "pH rises."
