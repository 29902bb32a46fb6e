"""The models: every key explained, nothing loose, exact numbers exact."""

from fractions import Fraction

import pytest
from pydantic import BaseModel, ValidationError

from beforehand.spec import availability
from beforehand.spec.model import Document, Exact, Family, Hypothesis, Keys, NullHypothesis
from beforehand.spec.model.walk import fields_of, models_at, models_below
from beforehand.terms import WARNING_NAMES


def every_model() -> list[type[BaseModel]]:
    found: list[type[BaseModel]] = [Document]
    for model in found:
        found += [below for below in dict.fromkeys(models_below(model)) if below not in found]
    return found


@pytest.mark.parametrize("model", every_model(), ids=lambda model: model.__name__)
def test_every_key_says_what_it_means(model: type[BaseModel]) -> None:
    assert (model.__doc__ or "").strip().endswith(".")
    for key, field in fields_of(model).items():
        assert field.description, key
        assert field.description.endswith("."), key


@pytest.mark.parametrize("model", every_model(), ids=lambda model: model.__name__)
def test_every_model_is_strict_and_frozen(model: type[BaseModel]) -> None:
    assert issubclass(model, Keys)
    config = model.model_config
    assert config["strict"]
    assert config["frozen"]
    assert not config["allow_inf_nan"]
    assert config["extra"] == ("allow" if model.__name__ == "Assumption" else "forbid")


@pytest.mark.parametrize(
    ("written", "fraction", "canonical"),
    [
        (0.025, Fraction(1, 40), 0.025),
        (0.1, Fraction(1, 10), 0.1),
        (1, Fraction(1), 1.0),
        ("1/3", Fraction(1, 3), "1/3"),
        ("2/6", Fraction(1, 3), "1/3"),
        ("1/40", Fraction(1, 40), 0.025),
        ("1 / 8", Fraction(1, 8), 0.125),
    ],
)
def test_exact_numbers(written: object, fraction: Fraction, canonical: object) -> None:
    number = Exact.of(written)
    assert number.fraction == fraction
    assert number.canonical() == canonical
    assert number == float(fraction)
    assert isinstance(number, float)


def test_shares_of_thirds_sum_to_one() -> None:
    assert sum(Exact.of("1/3").fraction for _ in range(3)) == 1


def test_nulls_know_their_form() -> None:
    assert NullHypothesis(at_most=-1.0).form == "at_most"
    assert NullHypothesis(outside=(-1.0, 1.0)).margins == (-1.0, 1.0)
    assert NullHypothesis(at=0.0).margins == (0.0,)
    with pytest.raises(ValidationError):
        NullHypothesis()


def test_what_is_not_built_is_a_key_of_the_language() -> None:
    models = {model.__name__: model for model in every_model()}
    kinds = {kind.__name__: kind for model in models.values() for kind in model.__mro__ if issubclass(kind, BaseModel)}
    for name, keys in availability.KEYS.items():
        assert keys <= set(fields_of(kinds[name])), name
    for name, key in availability.WORDS:
        assert key in fields_of(models[name])


def test_what_is_built_is_not_listed_as_not_built() -> None:
    from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
    from beforehand.multiplicity.contract import PROCEDURES

    assert not set(availability.TESTS) & set(STATISTICAL_TESTS)
    assert not set(availability.PROCEDURES_LATER) & set(PROCEDURES)


def test_every_warning_rule_can_be_answered() -> None:
    from beforehand.snooping.contract import WARNING_RULES

    assert set(WARNING_RULES) <= set(WARNING_NAMES)


def test_a_path_leads_to_its_model() -> None:
    path = ("families", 0, "hypotheses", 3, "outcome", "event")
    assert {model.__name__ for model in models_at(Document, path)} == {"EventOutcome", "PairOutcome"}
    assert models_at(Document, ("data", 0, "columns", "kind"))[0].__name__ == "ColumnSpec"
    assert models_at(Document, ("families", 2)) == (Family,)


@pytest.mark.parametrize(
    ("null", "alternative", "side"),
    [
        ({"at": 0.0}, "below", "below"),
        ({"at": 0.0}, "two_sided", "two_sided"),
        ({"at_most": -1.0}, None, "above"),
        ({"at_least": 1.0}, None, "below"),
        ({"outside": (-1.0, 1.0)}, None, "two_sided"),
        ({"inside": (-1.0, 1.0)}, None, "two_sided"),
    ],
)
def test_side(null: dict, alternative: str | None, side: str) -> None:
    hypothesis = Hypothesis.model_construct(null_hypothesis=NullHypothesis(**null), alternative=alternative)
    assert hypothesis.side == side
