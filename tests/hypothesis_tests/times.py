"""Times until an event for tests: two groups split from columns, and what R found."""

import csv
from pathlib import Path
from typing import Any

import numpy as np

REFERENCES = Path(__file__).parents[1] / "references" / "data_based"


def split(time: Any, status: Any, first: Any, strata: Any = None) -> dict[str, Any]:
    """Split columns into the two groups, the first where ``first`` is true."""
    first = np.asarray(first, dtype=bool)
    sides = (first, ~first)
    beside = {"time": tuple(np.asarray(time, dtype=float)[side] for side in sides)}
    if strata is not None:
        beside["strata"] = tuple(np.asarray(strata)[side] for side in sides)
    return {"samples": tuple(np.asarray(status, dtype=bool)[side] for side in sides), "beside": beside}


def ask(entry: Any, case: dict[str, Any], **settings: Any) -> Any:
    """Call a test on a case."""
    return entry(*case["samples"], **case["beside"], **settings)


def patients(reference: Any, *, strata: bool) -> dict[str, Any]:
    """Give the ovarian patients, treatment 1 first."""
    data = reference("logrank-ovarian").data
    return split(data("futime"), data("fustat"), data("rx") == 1, data("ecog.ps").astype(int) if strata else None)


def bearings(*, strata: bool = True) -> dict[str, Any]:
    """Give the made-up times of survival.R, with many ties, in three strata."""
    number = np.arange(60)
    time, status = 3 + (number * 37) % 17 + 4 * (number % 2), (number * 5) % 9 < 6
    return split(time, status, number % 2 == 1, number % 3 if strata else None)


def base_r(case: str) -> dict[str, float]:
    """Give what R found."""
    lines = (REFERENCES / "survival.csv").read_text("utf-8").splitlines()
    rows = csv.DictReader(line for line in lines if not line.startswith("#"))
    return {row["quantity"]: float(row["value"]) for row in rows if row["case"] == case}
