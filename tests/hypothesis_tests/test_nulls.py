"""Null hypotheses of five forms against printed equivalence tests, statsmodels and their definitions."""

from typing import Any

import numpy as np
import pytest
from statsmodels.stats.weightstats import ttost_ind, ttost_paired

from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS, NotComputed, Outcome
from beforehand.hypothesis_tests.nulls import (
    Null,
    alternative_in_symbols,
    judge_null,
    null_in_symbols,
)

WELCH, STUDENT, FISHER = (STATISTICAL_TESTS[name] for name in ("welch_t", "student_t", "fisher_exact"))
WITHIN = Null("outside", (-0.6, 0.6))


@pytest.mark.parametrize(
    ("name", "entry"),
    [("tost-clinic-welch-var1", WELCH), ("tost-clinic-welch-var2", WELCH), ("tost-clinic-pooled-var2", STUDENT)],
)
def test_printed_equivalence_tests(name: str, entry: Any, reference: Any, outcome: Any) -> None:
    clinic = reference(name)
    samples = clinic.data("first"), clinic.data("second")
    found = outcome(judge_null(entry, samples, null=WITHIN, confidence=0.9))
    assert clinic.agrees("p_tost", found.p)
    for place, end in enumerate((found.lower, found.upper)):
        assert clinic.agrees("ci90", end, place)
    assert clinic.agrees("df", found.df)
    # the two one-sided tests of which it is made
    lower = outcome(judge_null(entry, samples, null=Null("at_most", (-0.6,))))
    upper = outcome(judge_null(entry, samples, null=Null("at_least", (0.6,))))
    assert clinic.agrees("p_lower", lower.p)
    assert clinic.agrees("p_upper", upper.p)


def test_statsmodels(outcome: Any) -> None:
    random = np.random.default_rng(19)
    for n in (5, 20, 60):
        first, second = random.normal(0, 1, n), random.normal(0.2, 1, n)
        low, high = sorted(random.normal(0, 1, 2))
        null = Null("outside", (float(low), float(high)))
        pairs = STATISTICAL_TESTS["paired_t"]
        for entry, usevar in ((WELCH, "unequal"), (STUDENT, "pooled")):
            expected = ttost_ind(first, second, low, high, usevar=usevar)[0]
            assert outcome(judge_null(entry, (first, second), null=null)).p == pytest.approx(expected, rel=1e-9)
        expected = ttost_paired(first, second, low, high)[0]
        assert outcome(judge_null(pairs, (first, second), null=null)).p == pytest.approx(expected, rel=1e-9)


def drawn(name: str) -> tuple[Any, ...]:
    random = np.random.default_rng(20)
    if name == "fisher_exact":
        return random.random(25) < 0.6, random.random(30) < 0.4
    samples = random.normal(0.4, 1, 14), random.normal(0, 1, 14)
    return samples[:1] if name == "one_sample_t" else samples


# one entry of each way in which samples come and null values are bounded; the composition knows no entry by name
@pytest.mark.parametrize("name", ["one_sample_t", "welch_t", "paired_t", "mann_whitney", "fisher_exact"])
def test_forms_are_made_of_one_sided_tests(name: str, outcome: Any) -> None:
    entry, samples = STATISTICAL_TESTS[name], drawn(name)
    a, b = (0.8, 1.9) if entry.scale == "ratio" else (-0.1, 0.3)

    def p(null_value: float, side: Any) -> float:
        return float(outcome(entry(*samples, null_value=null_value, alternative=side)).p)

    def judged(form: Any, *values: float, side: Any = None) -> Outcome:
        found = judge_null(entry, samples, null=Null(form, values), alternative=side)
        assert isinstance(found, Outcome)
        return found

    for side in ("above", "below", "two_sided"):
        assert judged("at", a, side=side).p == pytest.approx(p(a, side), rel=1e-9)
    assert judged("at", a).p == judged("at", a, side="two_sided").p
    assert judged("at_most", a).p == judged("at", a, side="above").p
    assert judged("at_least", a).p == judged("at", a, side="below").p
    assert judged("outside", a, b).p == pytest.approx(max(p(a, "above"), p(b, "below")), rel=1e-9)
    assert judged("inside", a, b).p == pytest.approx(min(1, 2 * min(p(b, "above"), p(a, "below"))), rel=1e-9)
    assert judged("inside", a, b, side="above").p == judged("at_most", b).p
    assert judged("inside", a, b, side="below").p == judged("at_least", a).p
    # margins change p alone: estimate and interval are those of the test
    assert judged("outside", a, b).estimate == judged("inside", a, b).estimate == judged("at", a).estimate


def test_options_and_confidence_reach_the_test(outcome: Any) -> None:
    samples = drawn("fisher_exact")
    found = outcome(
        judge_null(
            FISHER, samples, null=Null("at", (1.0,)), confidence=0.8, options={"two_sided_by": "smaller_probability"}
        )
    )
    assert repr(found) == repr(FISHER(*samples, confidence=0.8, two_sided_by="smaller_probability"))


def test_what_can_not_be_computed_stays_so() -> None:
    flat = np.full(4, 2.0), np.arange(4.0)
    for form in ("outside", "inside"):
        found = judge_null(WELCH, flat, null=Null(form, (-1.0, 1.0)))
        assert found == NotComputed("all 4 values of the first group are equal", (4, 4))


@pytest.mark.parametrize(
    ("null", "side", "spelled", "rejected"),
    [
        (Null(), None, "μ₁ − μ₂ = 0", "μ₁ − μ₂ ≠ 0"),
        (Null("at", (0.5,)), "two_sided", "μ₁ − μ₂ = 0.5", "μ₁ − μ₂ ≠ 0.5"),
        (Null("at", (0.0,)), "above", "μ₁ − μ₂ ≤ 0", "μ₁ − μ₂ > 0"),
        (Null("at", (0.0,)), "below", "μ₁ − μ₂ ≥ 0", "μ₁ − μ₂ < 0"),
        (Null("at_most", (-2.0,)), None, "μ₁ − μ₂ ≤ −2", "μ₁ − μ₂ > −2"),
        (Null("at_most", (-2.0,)), "above", "μ₁ − μ₂ ≤ −2", "μ₁ − μ₂ > −2"),
        (Null("at_least", (1.23456789,)), None, "μ₁ − μ₂ ≥ 1.23456789", "μ₁ − μ₂ < 1.23456789"),
        (Null("outside", (-2.0, 2.0)), None, "μ₁ − μ₂ ≤ −2 or μ₁ − μ₂ ≥ 2", "−2 < μ₁ − μ₂ < 2"),
        (Null("inside", (-2.0, 3.0)), None, "−2 ≤ μ₁ − μ₂ ≤ 3", "μ₁ − μ₂ < −2 or μ₁ − μ₂ > 3"),
        (Null("inside", (-2.0, 3.0)), "above", "μ₁ − μ₂ ≤ 3", "μ₁ − μ₂ > 3"),
        (Null("inside", (-2.0, 3.0)), "below", "μ₁ − μ₂ ≥ −2", "μ₁ − μ₂ < −2"),
    ],
)
def test_symbols(null: Null, side: Any, spelled: str, rejected: str) -> None:
    assert null_in_symbols(WELCH, null, side) == spelled
    assert alternative_in_symbols(WELCH, null, side) == rejected


def test_symbols_name_the_parameter() -> None:
    assert null_in_symbols(FISHER, Null("at_least", (1.25,))) == "odds₁ / odds₂ ≥ 1.25"


@pytest.mark.parametrize(
    ("form", "values", "message"),
    [
        ("near", (0.0,), "a null hypothesis is at, at_most, at_least, outside, inside; found 'near'"),
        ("at", (), "the form at has 1 margins; found 0"),
        ("outside", (1.0,), "the form outside has 2 margins; found 1"),
        ("inside", (2.0, 2.0), "the smaller margin comes first; found (2.0, 2.0)"),
    ],
)
def test_refused_nulls(form: Any, values: tuple[float, ...], message: str) -> None:
    with pytest.raises(ValueError) as refused:  # noqa: PT011  the whole message is compared
        Null(form, values)
    assert str(refused.value) == message


@pytest.mark.parametrize(("form", "side"), [("at_most", "below"), ("at_least", "two_sided"), ("outside", "above")])
def test_a_form_with_its_own_side_takes_no_other(form: Any, side: Any) -> None:
    null = Null(form, (0.0, 1.0) if form == "outside" else (0.0,))
    with pytest.raises(ValueError, match=f"the form {form} has its own side; found the alternative {side}"):
        judge_null(WELCH, (np.arange(4.0), np.arange(5.0)), null=null, alternative=side)


def test_a_supplied_p_knows_no_margins(outcome: Any) -> None:
    supplied = STATISTICAL_TESTS["supplied_p"]
    assert outcome(judge_null(supplied, (0.03,), null=Null())).p == 0.03
    with pytest.raises(ValueError, match="a supplied p-value can't be judged against margins; found the form at_most"):
        judge_null(supplied, (0.03,), null=Null("at_most", (0.0,)))
