"""Hands each entry's test file the numbers from elsewhere: `reference` by id, `r_case` by the file's name."""

import csv
import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import yaml
from numpy.typing import NDArray

from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS, Outcome, Result

REFERENCES = Path(__file__).parents[1] / "references" / "data_based"


@dataclass(frozen=True)
class Reference:
    """One entry of the check values."""

    entry: dict[str, Any]

    def data(self, name: str) -> NDArray[np.float64]:
        """Give one sample."""
        return np.array(self.entry["data"][name], dtype=np.float64)

    def agrees(self, name: str, found: float, place: int | None = None) -> bool:
        """Whether a number is the expected one, and the published one to the digits that were printed.

        The entries say: rtol 1e-6 for `expected`; half a unit in the last printed digit, or the entry's own
        tolerance, for `published`.
        """
        expected, printed = self._at("expected", name, place), self._at("published", name, place)
        if expected is None or not math.isclose(found, expected, rel_tol=1e-6, abs_tol=1e-12):
            return False
        if printed is None:
            return True
        own = self._at("published_tolerance", name, place)
        digits = str(printed).lower().partition("e")
        last = len(digits[0].partition(".")[2]) - int(digits[2] or 0)
        return abs(found - float(printed)) <= (float(own) if own else 0.5 * 10.0**-last) * (1 + 1e-9)

    def _at(self, part: str, name: str, place: int | None) -> Any:
        value = self.entry.get(part, {}).get(name)
        return value[place] if place is not None and isinstance(value, list) else value


@dataclass(frozen=True)
class RCase:
    """One call of a test on the samples of base_r_samples.csv, with what base R finds."""

    test: str
    samples: tuple[NDArray[np.float64], ...]
    settings: dict[str, Any]
    found: dict[str, float]

    def result(self) -> Outcome:
        """Call the same test of the catalogue."""
        entry = STATISTICAL_TESTS[self.test]
        result = entry(*self.samples[: 1 if entry.design == "one_sample" else 2], **self.settings)
        assert isinstance(result, Outcome)
        return result


@cache
def _lines(name: str) -> list[dict[str, str]]:
    lines = (REFERENCES / name).read_text("utf-8").splitlines()
    return list(csv.DictReader(line for line in lines if not line.startswith("#")))


def r_cases(test: str) -> Iterator[tuple[str, RCase]]:
    """Give what base R finds; the scripts beside the files made it."""
    samples = [*_lines("base_r_samples.csv"), *_lines("base_r_shares_samples.csv")]
    results = [*_lines("base_r.csv"), *_lines("base_r_shares.csv")]
    asked = [name for name in results[0] if name not in ("quantity", "value")]
    calls: dict[tuple[str, ...], dict[str, float]] = {}
    for line in results:
        if line["test"] == test:
            calls.setdefault(tuple(line[name] for name in asked), {})[line["quantity"]] = float(line["value"])
    for call, found in calls.items():
        case, _, null_value, alternative, confidence, options = call
        sides = [
            np.array([float(s["value"]) for s in samples if (s["case"], s["side"]) == (case, side)])
            for side in ("first", "second")
        ]
        settings: dict[str, Any] = {
            name: {"True": True, "False": False}.get(word, word)
            for name, word in (option.split("=") for option in options.split())
        }
        settings |= {"null_value": float(null_value), "alternative": alternative, "confidence": float(confidence)}
        yield " ".join(call), RCase(test, tuple(sides), settings, found)


def pytest_generate_tests(metafunc: pytest.Metafunc) -> None:
    if "r_case" in metafunc.fixturenames:
        test = Path(metafunc.module.__file__ or "").stem.removeprefix("test_")
        cases = list(r_cases(test))
        assert cases, f"no values of base R for {test}"
        metafunc.parametrize("r_case", [case for _, case in cases], ids=[name for name, _ in cases])


@cache
def check_values() -> dict[str, Reference]:
    """Read all entries of the check values."""
    entries = [entry for file in REFERENCES.glob("*.yaml") for entry in yaml.safe_load(file.read_text("utf-8"))]
    return {entry["id"]: Reference(entry) for entry in entries}


@pytest.fixture
def reference() -> Callable[[str], Reference]:
    """Find one entry of the check values by its id."""
    return lambda name: check_values()[name]


@pytest.fixture
def outcome() -> Callable[[Result], Outcome]:
    """Insist on a result."""

    def insist(result: Result) -> Outcome:
        assert isinstance(result, Outcome), result
        return result

    return insist
