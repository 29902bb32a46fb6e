"""Hands each entry's test file the check values of its procedure: `reference` and `r_case`, by the file's name."""

import csv
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import yaml
from numpy.typing import ArrayLike, NDArray

REFERENCES = Path(__file__).parents[1] / "references" / "p_values"
# how the entries that hold several procedures abbreviate one of them
SHORT = {"benjamini_hochberg": "bh", "benjamini_yekutieli": "by"}


@dataclass(frozen=True)
class Reference:
    """One entry of the check values; `grade` says whether it was read, remembered or derived."""

    id: str
    grade: str
    p: NDArray[np.float64]
    level: float
    adjusted: NDArray[np.float64]
    rejections: int | None
    tolerance: dict[str, float]

    def agrees(self, found: ArrayLike) -> bool:
        """Whether numbers meet the entry's own tolerance."""
        allowed = self.tolerance.get("abs", 0.0) + self.tolerance.get("rel", 0.0) * np.abs(self.adjusted)
        return bool(np.all(np.abs(np.asarray(found) - self.adjusted) <= allowed))


@dataclass(frozen=True)
class RCase:
    """One vector of p-values with what base R's p.adjust makes of it."""

    case: str
    p: NDArray[np.float64]
    adjusted: NDArray[np.float64]


def entries(file: str) -> list[dict[str, Any]]:
    """Read one file of check values."""
    found: list[dict[str, Any]] = yaml.safe_load((REFERENCES / f"{file}.yaml").read_text("utf-8"))
    return found


def references(procedure: str) -> Iterator[Reference]:
    """Give every entry that prints adjusted p-values of a procedure."""
    if (REFERENCES / f"{procedure}.yaml").is_file():
        for entry in entries(procedure):
            if "adjusted_p" in entry["expected"]:
                yield reference(entry, entry["expected"]["adjusted_p"])
    for entry in entries("several_procedures"):
        adjusted = entry["expected"].get("adjusted_p", {}).get(SHORT.get(procedure, procedure))
        if adjusted is not None:
            yield reference(entry, adjusted)


def reference(entry: dict[str, Any], adjusted: list[float]) -> Reference:
    p = entry["inputs"]["p"]
    # hypotheses without a reported p count as p = 1; the entry prints the reported ones
    unreported = entry["params"].get("n_comparisons", len(p)) - len(p)
    return Reference(
        id=entry["id"],
        grade=entry["known_from"]["grade"],
        p=np.array(p + [1.0] * unreported),
        level=entry["params"].get("alpha", 0.05),
        adjusted=np.array(adjusted + [1.0] * unreported),
        rejections=entry["expected"].get("n_rejected"),
        tolerance=entry["tolerance"],
    )


def r_cases(procedure: str) -> Iterator[RCase]:
    """Give what base R's p.adjust gives; the script beside the file made it."""
    lines = (REFERENCES / "p_adjust.csv").read_text("utf-8").splitlines()
    rows = list(csv.DictReader(line for line in lines if not line.startswith("#")))
    for case in dict.fromkeys(row["case"] for row in rows):
        here = [row for row in rows if row["case"] == case]
        p, adjusted = (np.array([float(row[name]) for row in here]) for name in ("p", procedure))
        yield RCase(case, p, adjusted)


def pytest_generate_tests(metafunc: pytest.Metafunc) -> None:
    procedure = Path(metafunc.module.__file__ or "").stem.removeprefix("test_")
    if "reference" in metafunc.fixturenames:
        found = list(references(procedure))
        assert found, f"no check value for {procedure}"
        metafunc.parametrize("reference", found, ids=lambda one: f"{one.id}-{one.grade}")
    if "r_case" in metafunc.fixturenames:
        metafunc.parametrize("r_case", list(r_cases(procedure)), ids=lambda one: str(one.case))


@pytest.fixture
def entry() -> Any:
    """Find one entry of the check values by file and id."""

    def find(file: str, name: str) -> dict[str, Any]:
        return next(one for one in entries(file) if one["id"] == name)

    return find
