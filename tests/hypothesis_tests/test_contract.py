"""What every statistical test of the catalogue has to do; an entry is tested the moment its file exists."""

import inspect
import math
import re
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any, get_args

import numpy as np
import pytest
from numpy.random import Generator

from beforehand.hypothesis_tests.contract import COMMON, STATISTICAL_TESTS, NotComputed, Outcome, StatisticalTest

Samples = tuple[Any, ...]
Entry = StatisticalTest[...]

# those that take more of a row than its outcome have the same laws in test_beside_contract
COMPUTED = [
    name
    for name in STATISTICAL_TESTS
    if STATISTICAL_TESTS[name].design not in ("supplied", "association") and not STATISTICAL_TESTS[name].takes
]
NUMBERS = [name for name in COMPUTED if STATISTICAL_TESTS[name].outcome == "number"]
COMPARISONS = [name for name in COMPUTED if STATISTICAL_TESTS[name].design != "one_sample"]
KINDS = ("plain", "tied", "few", "far", "tiny", "huge", "skewed")
# sums of at most a few hundred terms, and t distributions whose tails are good to about 1e-12
NEARLY = 1e-10
# what options that are numbers may be; a test that draws needs a seed, and few draws keep these tests quick
NUMBERS_OF = {"draws": (999, 1_500), "seed": (7, 20310511), "trim": (0.0, 0.1, 0.25)}
DRAWS = {"draws": 999, "seed": 7}


def entry_of(name: str) -> Entry:
    found: Entry = STATISTICAL_TESTS[name]
    return found


def draw(entry: Entry, random: Generator, kind: str = "plain") -> Samples:
    """Draw samples of the entry's design: of moderate size, with ties, very small, far from 0, in odd units."""
    low, high = (2, 6) if kind == "few" else (6, 30)
    first, second = (int(n) for n in random.integers(low, high, 2))
    if entry.design == "pairs":
        second = first
    sides = 1 if entry.design == "one_sample" else 2
    if entry.outcome == "event":
        return tuple(random.random(n) < random.uniform(0.1, 0.9) for n in (first, second)[:sides])
    scale = {"tiny": 1e-200, "huge": 1e200, "far": 7.0}.get(kind, 1.0)
    offset = 1e6 if kind == "far" else random.uniform(-1, 1)
    values = [random.normal(offset + shift, spread, n) for n, shift, spread in ((first, 0.6, 1), (second, 0, 2))]
    if kind == "tied":
        values = [np.round(sample) / 10 for sample in values]  # tenths: equal on paper, not always as doubles
    if kind == "skewed":
        values = [np.exp(3 * sample) for sample in values]
    if entry.scale == "ratio":
        values = [np.abs(sample) for sample in values]  # only what is above 0 has a ratio
    return tuple(sample * scale for sample in values[:sides])


def spread(samples: Samples) -> float:
    """A length in the unit of the outcome."""
    return float(np.ptp(np.concatenate(samples))) / 4


def null_near(entry: Entry, samples: Samples, random: Generator) -> float:
    """A null value to which neither p is 0 nor all is clear."""
    if entry.only_default_null:
        return entry.null_default
    if entry.null_between:
        low, high = entry.null_between
        observed = float(np.mean(samples[0]) - (np.mean(samples[1]) if len(samples) > 1 else 0))
        return moved(entry, samples, float(np.clip(observed, low + 0.02, high - 0.02)), float(random.normal(0, 0.5)))
    if entry.scale == "ratio":
        return float(np.exp(random.normal(0, 1)))
    centre = float(np.median(samples[0]) - (np.median(samples[1]) if len(samples) > 1 else 0))
    return centre + spread(samples) * float(random.normal(0, 0.5))


def moved(entry: Entry, samples: Samples, null_value: float, steps: float) -> float:
    """Another null value, so many steps above this one: on the scale on which the entry's null values are unbounded."""
    if entry.only_default_null:
        return null_value
    if entry.null_between:
        low, high = entry.null_between
        odds = (null_value - low) / (high - null_value) * math.exp(steps)
        return (low + high * odds) / (1 + odds)
    return null_value * math.exp(steps) if entry.scale == "ratio" else null_value + steps * spread(samples)


def options(entry: Entry, random: Generator) -> dict[str, Any]:
    """Choose each of the entry's own options."""
    words = {
        name: (True, False) if p.annotation is bool else NUMBERS_OF.get(name) or get_args(p.annotation)
        for name, p in entry.options.items()
    }
    return {name: values[random.integers(len(values))] for name, values in words.items()}


def draws(entry: Entry) -> dict[str, Any]:
    """The options of a test that draws."""
    return {name: value for name, value in DRAWS.items() if name in entry.options}


def result(entry: Entry, samples: Samples, **settings: Any) -> Outcome:
    found = entry(*samples, **draws(entry), **settings)
    assert isinstance(found, Outcome), found
    return found


def computable(
    entry: Entry, seed: int, kinds: tuple[str, ...] = ("plain", "tied", "few")
) -> Iterator[tuple[Samples, float]]:
    """Draw samples that give a result, each with a null value."""
    random = np.random.default_rng(seed)
    for kind in kinds * 3:
        samples = draw(entry, random, kind)
        null_value = null_near(entry, samples, random)
        if isinstance(entry(*samples, null_value=null_value, **draws(entry)), Outcome):
            yield samples, null_value


def mirrored(entry: Entry, null_value: float) -> float:
    """The same null value with the groups swapped: 0 and, for a probability, 1/2 stay what they are."""
    return 1 / null_value if entry.scale == "ratio" else 2 * entry.null_default - null_value


@pytest.mark.parametrize("name", STATISTICAL_TESTS)
def test_one_word(name: str) -> None:
    entry = entry_of(name)
    assert entry.name == name
    assert Path(inspect.getfile(entry.compute)).stem == name
    assert (Path(__file__).parent / "entries" / f"test_{name}.py").is_file()


@pytest.mark.parametrize("name", STATISTICAL_TESTS)
def test_declares_what_it_is(name: str) -> None:
    entry = entry_of(name)
    assert re.search(r"\(\d{4}\)", entry.reference) or entry.design == "supplied"
    assert 0 < entry.bound <= 1e-6
    assert all((entry.title, entry.estimates, entry.parameter, entry.p_is, entry.null, entry.assumptions))
    text = inspect.getdoc(entry.compute) or ""
    for section in ("Parameters\n", "Returns\n", *(["Notes\n", "References\n"] if entry.design != "supplied" else [])):
        assert section in text
    parameters = inspect.signature(entry.compute).parameters
    assert all(parameters[setting].kind is inspect.Parameter.KEYWORD_ONLY for setting in COMMON)
    assert all(option in text for option in entry.options)
    # a seed is written into the spec: no default would be anybody's choice
    assert all(option.default is not option.empty or name == "seed" for name, option in entry.options.items())
    second = inspect.signature(STATISTICAL_TESTS.module(name).second_route)
    assert str(second) == str(inspect.signature(entry.compute))  # str: a default that is nan is not equal to itself


@pytest.mark.parametrize("name", COMPUTED)
def test_input_is_left_alone(name: str) -> None:
    entry = entry_of(name)
    samples = draw(entry, np.random.default_rng(1))
    before = [sample.copy() for sample in samples]
    for sample in samples:
        sample.flags.writeable = False
    entry(*samples, **draws(entry))
    entry.again(*samples, **draws(entry))
    for sample, copy in zip(samples, before, strict=True):
        np.testing.assert_array_equal(sample, copy)


@pytest.mark.parametrize("name", COMPUTED)
def test_sides(name: str) -> None:
    entry = entry_of(name)
    discrete = hasattr(STATISTICAL_TESTS.module(name), "smallest_p")
    for samples, null_value in computable(entry, 2):
        above, below, both = (
            result(entry, samples, null_value=null_value, alternative=side) for side in ("above", "below", "two_sided")
        )
        assert all(0 <= found.p <= 1 for found in (above, below, both))
        assert both.p == pytest.approx(min(1, 2 * min(above.p, below.p)), rel=NEARLY)
        # both sides hold what was observed: more than 1 together where that has a probability of its own
        together = above.p + below.p
        assert together >= 1 - NEARLY
        assert discrete or together == pytest.approx(1, rel=NEARLY)
        # the side asks where the estimate lies: a null value far below it makes p small above
        far = moved(entry, samples, null_value, -14)
        assert result(entry, samples, null_value=far, alternative="above").p <= above.p


@pytest.mark.parametrize("name", COMPUTED)
def test_p_moves_one_way_along_the_null_values(name: str) -> None:
    entry = entry_of(name)
    for samples, null_value in computable(entry, 3):
        nulls = [moved(entry, samples, null_value, step) for step in np.linspace(-1, 1, 9)]
        p = [result(entry, samples, null_value=float(null), alternative="above").p for null in nulls]
        assert np.all(np.diff(p) >= -NEARLY)


@pytest.mark.parametrize("name", COMPARISONS)
def test_swapped_groups_mirror(name: str) -> None:
    entry = entry_of(name)
    for samples, null_value in computable(entry, 4):
        here = result(entry, samples, null_value=null_value, alternative="above")
        there = result(entry, samples[::-1], null_value=mirrored(entry, null_value), alternative="below")
        assert there.p == pytest.approx(here.p, rel=NEARLY)
        if entry.scale == "ratio":
            ends = [1 / end if end else math.inf for end in (here.estimate, here.upper, here.lower)]
        else:
            ends = [mirrored(entry, end) for end in (here.estimate, here.upper, here.lower)]
        assert (there.estimate, there.lower, there.upper) == pytest.approx(tuple(ends), rel=NEARLY)


@pytest.mark.parametrize("name", NUMBERS)
@pytest.mark.parametrize("scale", [2.0**-600, 2.0**9, 2.0**600])
def test_another_unit_moves_only_the_numbers_that_have_one(name: str, scale: float) -> None:
    entry = entry_of(name)
    for samples, null_value in computable(entry, 5):
        unit = scale if entry.scale in ("difference", "location") else 1.0
        here = result(entry, samples, null_value=null_value)
        there = result(entry, tuple(sample * scale for sample in samples), null_value=null_value * unit)
        assert (there.p, repr(there.statistic)) == (here.p, repr(here.statistic))  # repr: nan is not equal to itself
        for number in ("estimate", "lower", "upper"):
            assert getattr(there, number) == pytest.approx(getattr(here, number) * unit, rel=NEARLY)


@pytest.mark.parametrize("name", [name for name in NUMBERS if entry_of(name).scale == "difference"])
def test_a_common_offset_changes_nothing(name: str) -> None:
    entry, random = entry_of(name), np.random.default_rng(6)
    for _ in range(6):
        # eighths: sums with 2^40 are exact
        samples = tuple(np.round(sample * 8) / 8 for sample in draw(entry, random))
        here, there = result(entry, samples), result(entry, tuple(sample + 2.0**40 for sample in samples))
        assert (here.p, here.estimate, here.lower, here.upper) == (there.p, there.estimate, there.lower, there.upper)


@pytest.mark.parametrize("name", COMPUTED)
def test_order_of_rows_does_not_matter(name: str) -> None:
    entry, random = entry_of(name), np.random.default_rng(7)
    for samples, null_value in computable(entry, 7):
        orders = [random.permutation(sample.size) for sample in samples]
        if entry.design == "pairs":
            orders = [orders[0]] * 2
        shuffled = tuple(sample[order] for sample, order in zip(samples, orders, strict=True))
        here, there = (result(entry, rows, null_value=null_value) for rows in (samples, shuffled))
        assert repr(here) == repr(there)  # repr: a missing df is not equal to itself


@pytest.mark.parametrize("name", COMPUTED)
@pytest.mark.parametrize("route", ["compute", "again"])
def test_constant_and_empty_data_have_no_result(name: str, route: str) -> None:
    entry = entry_of(name)
    ask = entry if route == "compute" else entry.again
    how_many = 1 if entry.design == "one_sample" else 2
    for size in (0, 1, 12):
        value = True if entry.outcome == "event" else 7.25
        found = ask(*[np.full(size, value)] * how_many, **draws(entry))
        # units that are all alike can still say something of a share
        if entry.outcome == "event" and isinstance(found, Outcome):
            assert size
            assert found.lower <= found.estimate <= found.upper
            continue
        assert isinstance(found, NotComputed)
        assert found.reason
        assert found.n == ((size, size) if entry.design in ("two_groups", "contrast") else (size,))


@pytest.mark.parametrize("name", COMPUTED)
def test_settings_out_of_range_are_refused(name: str) -> None:
    entry = entry_of(name)
    samples = draw(entry, np.random.default_rng(8))
    for settings in ({"alternative": "greater"}, {"confidence": 95}, {"confidence": 1.0}, {"null_value": math.inf}):
        for ask in (entry, entry.again):
            with pytest.raises(ValueError, match="found"):
                ask(*samples, **draws(entry), **settings)


@pytest.mark.parametrize("name", COMPUTED)
def test_intervals_are_nested(name: str) -> None:
    entry = entry_of(name)
    for samples, _ in computable(entry, 9):
        found = [result(entry, samples, confidence=c) for c in (0.5, 0.8, 0.9, 0.95, 0.99, 0.9999)]
        assert all(one.lower <= one.estimate <= one.upper for one in found)
        assert np.all(np.diff([one.lower for one in found if one.lower > -math.inf]) <= 0)
        assert np.all(np.diff([one.upper for one in found if one.upper < math.inf]) >= 0)


@pytest.mark.parametrize("name", [name for name in COMPUTED if entry_of(name).interval_inverts_p])
def test_the_interval_holds_the_null_values_that_are_not_rejected(name: str) -> None:
    entry, random = entry_of(name), np.random.default_rng(10)
    for samples, _ in computable(entry, 10):
        level = float(random.choice([0.05, 0.2]))
        found = result(entry, samples, confidence=1 - level)
        for _ in range(4):
            null_value = null_near(entry, samples, random)
            inside = found.lower < null_value < found.upper
            assert inside == (result(entry, samples, null_value=null_value).p > level)
            above = result(entry, samples, null_value=null_value, alternative="above")
            assert (null_value > found.lower) == (above.p > level / 2)


@pytest.mark.parametrize("name", [name for name in COMPUTED if entry_of(name).interval_inverts_p])
def test_an_end_is_where_p_crosses_the_level(name: str) -> None:
    entry = entry_of(name)
    for samples, _ in computable(entry, 11, ("plain",)):
        found = result(entry, samples, confidence=0.9)
        step = 1e-7 * (found.upper - found.lower)
        for end, outwards in ((found.lower, -1), (found.upper, 1)):
            if math.isfinite(end) and end not in (entry.null_between or (0.0,)) and math.isfinite(step):
                assert result(entry, samples, null_value=end + outwards * step).p <= 0.1
                assert result(entry, samples, null_value=end - outwards * step).p > 0.1


def disagreement(first: Outcome, again: Outcome, number: str) -> float:
    """|x - y| / max(|x|, |y|, floor): the floor is 1e-300 for p and statistic, 1e-8 standard errors for the rest."""
    x, y = getattr(first, number), getattr(again, number)
    if x == y or (math.isnan(x) and math.isnan(y)):
        return 0.0
    floor = 1e-300
    if number in ("estimate", "lower", "upper"):
        width = first.upper - first.lower
        floor = 1e-8 * (first.standard_error if first.standard_error > 0 else width if math.isfinite(width) else 0.0)
    return float(abs(x - y) / max(abs(x), abs(y), floor, 1e-300))


@pytest.mark.parametrize("name", COMPUTED)
@pytest.mark.parametrize("kind", KINDS)
def test_computed_twice(name: str, kind: str) -> None:
    entry, random = entry_of(name), np.random.default_rng(12)
    for _ in range(16):
        samples = draw(entry, random, kind)
        settings: dict[str, Any] = {
            "null_value": null_near(entry, samples, random) * (1 if entry.null_between else random.choice([1, 1, 100])),
            "alternative": str(random.choice(["above", "below", "two_sided"])),
            "confidence": float(random.choice([0.001, 0.5, 0.9, 0.95, 1 - 0.05 / 3, 0.999999])),
            **options(entry, random),
        }
        first, again = entry(*samples, **settings), entry.again(*samples, **settings)
        if isinstance(first, NotComputed) or isinstance(again, NotComputed):
            assert first == again
            continue
        assert (first.n, first.remarks) == (again.n, again.remarks)
        for number in ("estimate", "lower", "upper", "statistic", "df", "p", "standard_error"):
            assert disagreement(first, again, number) <= entry.bound, (number, first, again, settings)


@pytest.mark.parametrize("name", COMPUTED)
def test_tests_that_count_know_their_smallest_p(name: str) -> None:
    entry, random = entry_of(name), np.random.default_rng(13)
    for samples, _ in computable(entry, 13):
        sizes = tuple(sample.size for sample in samples)[: 1 if entry.design == "pairs" else 2]
        null_value = entry.null_default
        pooled = np.concatenate(samples)
        if entry.design == "pairs":
            pooled = samples[0] != samples[1] if entry.outcome == "event" else np.abs(samples[0] - samples[1])
        for side in ("above", "below", "two_sided"):
            chosen = options(entry, random)
            found = entry(*samples, null_value=null_value, alternative=side, **chosen)
            known: dict[str, Any] = {"alternative": side, "null_value": null_value, **chosen}
            smallest = entry.smallest_p(sizes, pooled, **known)
            assert isinstance(found, NotComputed) or found.p >= smallest * (1 - NEARLY)
            before = entry.smallest_p(sizes, None, **known)
            # a normal approximation has a smaller variance, and so a smaller smallest p, with ties than without
            assert 0 <= before <= smallest * (1 + NEARLY) or chosen.get("method") == "normal"


def test_an_outcome_stays_as_it_is() -> None:
    found = result(entry_of("one_sample_t"), (np.arange(5.0),))
    with pytest.raises(AttributeError):
        found.p = 0.01  # type: ignore[misc]
    assert replace(found, p=0.5).p == 0.5
