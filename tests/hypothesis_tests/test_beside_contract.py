"""What every test has to do that takes more of a row than its outcome: exposure, covariates, strata, time, a second
column. The laws of ``test_contract`` for them; an entry is tested the moment its file exists."""

import inspect
import math
from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Any, get_args

import numpy as np
import pytest
from numpy.random import Generator

from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS, NotComputed, Outcome, Result, StatisticalTest

Entry = StatisticalTest[...]
SETTINGS = ("above", "below", "two_sided")
# sums of a few hundred terms, in another order
NEARLY = 1e-9
# searched to 1e-13 of a logarithm, then cut by a tail that is known to about 1e-12
AT_AN_END = 1e-6


def entry_of(name: str) -> Entry:
    found: Entry = STATISTICAL_TESTS[name]
    return found


TAKING = [name for name in STATISTICAL_TESTS if entry_of(name).takes or entry_of(name).design == "association"]
TWO_GROUPS = [name for name in TAKING if entry_of(name).design == "two_groups"]
ASSOCIATIONS = [name for name in TAKING if entry_of(name).design == "association"]


@dataclass(frozen=True)
class Case:
    """One call of a test: samples and what stands beside them."""

    entry: Entry
    samples: tuple[Any, ...]
    beside: dict[str, Any]

    def ask(self, **settings: Any) -> Result:
        return self.entry(*self.samples, **{**self.beside, **settings})

    def again(self, **settings: Any) -> Result:
        return self.entry.again(*self.samples, **{**self.beside, **settings})

    def result(self, **settings: Any) -> Outcome:
        found = self.ask(**settings)
        assert isinstance(found, Outcome), found
        return found

    def reordered(self, random: Generator) -> "Case":
        orders = [random.permutation(len(sample)) for sample in self.samples]
        if self.entry.aligned:
            orders = orders[:1] * 2
        samples = tuple(sample[order] for sample, order in zip(self.samples, orders, strict=True))
        return Case(self.entry, samples, {word: _taken(one, orders) for word, one in self.beside.items()})

    def swapped(self) -> "Case":
        return Case(self.entry, self.samples[::-1], {word: one[::-1] for word, one in self.beside.items()})


def _taken(columns: Any, orders: list[Any]) -> Any:
    return tuple(
        {name: values[order] for name, values in one.items()} if isinstance(one, dict) else one[order]
        for one, order in zip(columns, orders, strict=True)
    )


def draw(entry: Entry, random: Generator, *, few: bool = False, strata: bool = True) -> Case:
    """Draw a call of the entry's design, of moderate size or very small."""
    sizes = [int(n) for n in random.integers(*((3, 7) if few else (8, 30)), 2)]
    if entry.design == "association":
        n, rho = max(sizes), random.uniform(-0.9, 0.9)
        first = random.normal(0, 1, n)
        second = rho * first + math.sqrt(1 - rho**2) * random.normal(0, 1, n)
        rounded = np.round(np.stack([first, second]) * 4) / 4 if random.random() < 0.5 else np.stack([first, second])
        return Case(entry, tuple(rounded), {})
    sizes = sizes[: 1 if entry.design == "one_sample" else 2]
    beside: dict[str, Any] = {}
    if "strata" in entry.takes and (strata or "strata" in entry.needs):
        names = np.array(["coast", "hills", "plain"])
        beside["strata"] = tuple(names[random.integers(0, 1 if few else 3, n)] for n in sizes)
    if "exposure" in entry.takes:
        beside["exposure"] = tuple(random.uniform(0.5, 4, n) for n in sizes)
    if "time" in entry.takes:
        times = [random.exponential(1 + place, n) for place, n in enumerate(sizes)]
        beside["time"] = tuple(np.ceil(5 * one) if random.random() < 0.5 else one for one in times)
    if "covariates" in entry.takes:
        kinds = np.array(["new", "old"])
        beside["covariates"] = tuple(
            {"age": random.normal(40, 9, n), "kind": kinds[random.integers(0, 2, n)]} for n in sizes
        )
    return Case(entry, tuple(_outcome(entry, random, n, place) for place, n in enumerate(sizes)), beside)


def _outcome(entry: Entry, random: Generator, n: int, place: int) -> Any:
    match entry.outcome:
        case "count":
            return random.poisson(random.uniform(0.2, 3), n).astype(float)
        case "event":
            return random.random(n) < random.uniform(0.3, 0.9)
    return random.normal(place, 2, n)


def computable(entry: Entry, seed: int) -> Iterator[tuple[Case, float]]:
    """Draw calls that give a result, each with a null value."""
    random = np.random.default_rng(seed)
    for few in (False, True, False) * 3:
        case = draw(entry, random, few=few, strata=bool(random.random() < 0.5))
        null_value = null_near(case, random)
        if isinstance(case.ask(null_value=null_value), Outcome):
            yield case, null_value


def null_near(case: Case, random: Generator) -> float:
    """A null value to which neither p is 0 nor all is clear."""
    entry = case.entry
    found = case.ask()
    if entry.only_default_null or not isinstance(found, Outcome) or not math.isfinite(found.estimate):
        return entry.null_default
    start = found.estimate or entry.null_default
    if entry.null_between == (-1.0, 1.0):
        start = min(0.9, max(-0.9, start))
    return moved(case, start, float(random.normal(0, 0.5)))


def moved(case: Case, null_value: float, steps: float) -> float:
    """Another null value, so many steps above this one, on the scale on which null values are unbounded."""
    entry = case.entry
    if entry.only_default_null:
        return null_value
    if entry.null_between == (-1.0, 1.0):
        return math.tanh(math.atanh(null_value) + steps)
    if entry.scale == "ratio" or entry.null_between == (0.0, math.inf):
        return null_value * math.exp(steps)
    return null_value + steps * float(np.ptp(np.concatenate(case.samples))) / 4


def options(entry: Entry, random: Generator) -> dict[str, Any]:
    """Choose each of the entry's own options."""
    words = {
        name: (True, False) if p.annotation is bool else get_args(p.annotation) for name, p in entry.options.items()
    }
    return {name: values[random.integers(len(values))] for name, values in words.items()}


@pytest.mark.parametrize("name", TAKING)
def test_says_what_it_takes(name: str) -> None:
    entry = entry_of(name)
    text = inspect.getdoc(entry.compute) or ""
    assert all(f"\n{word} : " in text for word in entry.takes)
    assert not set(entry.options) & set(entry.takes)


@pytest.mark.parametrize("name", TAKING)
def test_input_is_left_alone(name: str) -> None:
    case = draw(entry_of(name), np.random.default_rng(1))
    before = [sample.copy() for sample in case.samples]
    for array in (*case.samples, *(column for one in case.beside.values() for column in one)):
        for values in array.values() if isinstance(array, dict) else (array,):
            values.flags.writeable = False
    case.ask()
    case.again()
    for sample, copy in zip(case.samples, before, strict=True):
        np.testing.assert_array_equal(sample, copy)


@pytest.mark.parametrize("name", TAKING)
def test_sides(name: str) -> None:
    discrete = hasattr(STATISTICAL_TESTS.module(name), "smallest_p")
    for case, null_value in computable(entry_of(name), 2):
        above, below, both = (case.result(null_value=null_value, alternative=side) for side in SETTINGS)
        assert all(0 <= found.p <= 1 for found in (above, below, both))
        assert both.p == pytest.approx(min(1, 2 * min(above.p, below.p)), rel=NEARLY)
        together = above.p + below.p
        assert together >= 1 - NEARLY
        assert discrete or together == pytest.approx(1, rel=NEARLY)


@pytest.mark.parametrize("name", TAKING)
def test_p_moves_one_way_along_the_null_values(name: str) -> None:
    for case, null_value in computable(entry_of(name), 3):
        nulls = [moved(case, null_value, step) for step in np.linspace(-1, 1, 9)]
        p = [case.result(null_value=null, alternative="above").p for null in nulls]
        assert np.all(np.diff(p) >= -NEARLY)
        assert case.entry.only_default_null or p[0] < p[-1] or p[-1] in (0, 1)


@pytest.mark.parametrize("name", TWO_GROUPS)
def test_swapped_groups_mirror(name: str) -> None:
    for case, null_value in computable(entry_of(name), 4):
        ratio = case.entry.scale == "ratio"
        here = case.result(null_value=null_value, alternative="above")
        mirror = 1 / null_value if ratio else -null_value
        there = case.swapped().result(null_value=mirror, alternative="below")
        assert there.p == pytest.approx(here.p, rel=NEARLY)
        ends = (here.estimate, here.upper, here.lower)
        turned = [(1 / end if end else math.inf) if ratio else -end for end in ends]
        assert (there.estimate, there.lower, there.upper) == pytest.approx(tuple(turned), rel=NEARLY, abs=1e-12)


@pytest.mark.parametrize("name", ASSOCIATIONS)
def test_the_order_of_the_two_columns_does_not_matter(name: str) -> None:
    for case, null_value in computable(entry_of(name), 4):
        for side in SETTINGS:
            here, there = (one.result(null_value=null_value, alternative=side) for one in (case, case.swapped()))
            for number in ("estimate", "lower", "upper", "p"):
                assert getattr(there, number) == pytest.approx(getattr(here, number), rel=NEARLY, nan_ok=True)


@pytest.mark.parametrize("name", ASSOCIATIONS)
def test_a_column_turned_round_mirrors(name: str) -> None:
    for case, null_value in computable(entry_of(name), 5):
        here = case.result(null_value=null_value, alternative="above")
        turned = replace(case, samples=(case.samples[0], -case.samples[1]))
        there = turned.result(null_value=-null_value, alternative="below")
        assert there.p == pytest.approx(here.p, rel=NEARLY)
        mirrored = (-here.estimate, -here.upper, -here.lower)
        assert (there.estimate, there.lower, there.upper) == pytest.approx(mirrored, rel=NEARLY, nan_ok=True)


@pytest.mark.parametrize("name", TAKING)
def test_order_of_rows_does_not_matter(name: str) -> None:
    random = np.random.default_rng(7)
    for case, null_value in computable(entry_of(name), 7):
        here, there = (one.result(null_value=null_value) for one in (case, case.reordered(random)))
        assert (here.n, here.remarks) == (there.n, there.remarks)
        for number in ("estimate", "lower", "upper", "statistic", "p"):
            wanted = pytest.approx(getattr(here, number), rel=NEARLY, abs=1e-12, nan_ok=True)
            assert getattr(there, number) == wanted, number


@pytest.mark.parametrize("name", TAKING)
def test_settings_out_of_range_are_refused(name: str) -> None:
    case = draw(entry_of(name), np.random.default_rng(8))
    for settings in ({"alternative": "greater"}, {"confidence": 95}, {"confidence": 1.0}, {"null_value": math.inf}):
        for ask in (case.ask, case.again):
            with pytest.raises(ValueError, match="found"):
                ask(**settings)


@pytest.mark.parametrize("name", [name for name in TAKING if entry_of(name).takes])
def test_what_is_not_aligned_is_refused(name: str) -> None:
    case = draw(entry_of(name), np.random.default_rng(8))
    for word, given in case.beside.items():
        if word != "covariates":
            short = (given[0][1:], *given[1:])
            with pytest.raises(ValueError, match=f"{word} has one value for each outcome"):
                case.ask(**{word: short})
        with pytest.raises(ValueError, match=f"{word} has one entry for each group"):
            case.ask(**{word: given[0]})


@pytest.mark.parametrize("name", TAKING)
@pytest.mark.parametrize("route", ["ask", "again"])
def test_empty_data_have_no_result(name: str, route: str) -> None:
    entry = entry_of(name)
    case = draw(entry, np.random.default_rng(9))
    nothing = [np.arange(0)] * len(case.samples)
    samples = tuple(sample[:0] for sample in case.samples)
    empty = Case(entry, samples, {word: _taken(one, nothing) for word, one in case.beside.items()})
    found = getattr(empty, route)()
    assert isinstance(found, NotComputed)
    assert found.reason
    assert found.n == ((0,) if entry.design in ("one_sample", "association") else (0, 0))


@pytest.mark.parametrize("name", TAKING)
def test_intervals_are_nested(name: str) -> None:
    for case, _ in computable(entry_of(name), 9):
        found = [case.result(confidence=c) for c in (0.5, 0.8, 0.9, 0.95, 0.99, 0.9999)]
        for one in found:
            assert math.isnan(one.lower) or one.lower <= one.estimate <= one.upper
        finite = [one for one in found if not math.isnan(one.lower)]
        assert np.all(np.diff([one.lower for one in finite if one.lower > -math.inf]) <= 0)
        assert np.all(np.diff([one.upper for one in finite if one.upper < math.inf]) >= 0)


@pytest.mark.parametrize("name", [name for name in TAKING if entry_of(name).interval_inverts_p])
def test_the_interval_holds_the_null_values_that_are_not_rejected(name: str) -> None:
    random = np.random.default_rng(10)
    for case, _ in computable(entry_of(name), 10):
        level = float(random.choice([0.05, 0.2]))
        found = case.result(confidence=1 - level)
        for _ in range(4):
            null_value = null_near(case, random)
            inside = found.lower < null_value < found.upper
            assert inside == (case.result(null_value=null_value).p > level)
        for end, outwards in ((found.lower, -1), (found.upper, 1)):
            if math.isfinite(end) and end != 0 and abs(end) != 1:
                step = AT_AN_END * (abs(end) if math.isinf(found.upper) else found.upper - found.lower)
                near = [case.ask(null_value=end + sign * outwards * step) for sign in (1, -1)]
                assert all(isinstance(one, Outcome) for one in near)
                assert near[0].p <= level < near[1].p  # type: ignore[union-attr]


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


@pytest.mark.parametrize("name", TAKING)
@pytest.mark.parametrize("few", [False, True])
def test_computed_twice(name: str, few: bool) -> None:
    entry, random = entry_of(name), np.random.default_rng(12)
    for _ in range(24):
        case = draw(entry, random, few=few, strata=bool(random.random() < 0.5))
        settings: dict[str, Any] = {
            "null_value": moved(case, null_near(case, random), float(random.choice([0, 0, 2]))),
            "alternative": str(random.choice(SETTINGS)),
            "confidence": float(random.choice([0.001, 0.5, 0.9, 0.95, 1 - 0.05 / 3, 0.999999])),
            **options(entry, random),
        }
        first, again = case.ask(**settings), case.again(**settings)
        if isinstance(first, NotComputed) or isinstance(again, NotComputed):
            assert first == again
            continue
        assert (first.n, first.remarks) == (again.n, again.remarks)
        for number in ("estimate", "lower", "upper", "statistic", "df", "p", "standard_error"):
            assert disagreement(first, again, number) <= entry.bound, (number, first, again, settings)


@pytest.mark.parametrize("name", TAKING)
def test_tests_that_count_know_their_smallest_p(name: str) -> None:
    entry, random = entry_of(name), np.random.default_rng(13)
    for case, _ in computable(entry, 13):
        sizes = tuple(len(sample) for sample in case.samples)[: 1 if entry.aligned else 2]
        beside = {word: one for word, one in case.beside.items() if word != "time"}
        for side in SETTINGS:
            known = {"alternative": side, "null_value": entry.null_default, **options(entry, random)}
            smallest = entry.smallest_p(sizes, pooled_of(case), **known, **beside)
            found = case.ask(**known)
            assert isinstance(found, NotComputed) or found.p >= smallest * (1 - NEARLY)
            before = entry.smallest_p(sizes, None, **known)
            # an approximation has a smaller variance, and so a smaller smallest p, with ties than without
            assert 0 <= before <= smallest * (1 + NEARLY) or known.get("method") not in (None, "exact")


def pooled_of(case: Case) -> Any:
    """The outcomes without their groups, as `check` knows them."""
    if case.entry.design == "association":
        return np.sort(np.stack(case.samples))
    pooled = np.concatenate(case.samples)
    strata = np.concatenate(case.beside["strata"]) if "strata" in case.beside else np.zeros(pooled.size)
    return pooled[np.lexsort((pooled, strata))]


def test_nothing_beside_but_what_a_test_takes() -> None:
    random = np.random.default_rng(14)
    first, second = random.normal(0, 1, 8), random.normal(0, 1, 9)
    with pytest.raises(TypeError, match="exposure"):
        STATISTICAL_TESTS["welch_t"](first, second, exposure=(np.ones(8), np.ones(9)))
    with pytest.raises(TypeError, match="exposure"):
        STATISTICAL_TESTS["rate_ratio"](np.ones(8), np.ones(9))


@pytest.mark.parametrize(
    ("beside", "said"),
    [
        ({"exposure": (np.array([1.0, 0.0]), np.ones(2))}, "an exposure is above 0; found"),
        ({"exposure": (np.array([1.0, math.nan]), np.ones(2))}, "finite numbers, and no missing value"),
        ({"exposure": (np.array(["1", "2"]), np.ones(2))}, "exposure is a number; found"),
    ],
)
def test_values_out_of_range_are_refused(beside: dict[str, Any], said: str) -> None:
    with pytest.raises(ValueError, match=said):
        STATISTICAL_TESTS["rate_ratio"](np.ones(2), np.ones(2), **beside)
