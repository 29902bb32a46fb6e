"""The numbers that the figures draw, put into the record so that a figure reads nothing else."""

import math
from typing import Any

import numpy as np

from beforehand.multiplicity.unadjusted_error import unadjusted_error
from beforehand.record.model import FamilyRecord, HypothesisRecord, PromiseRecord, Results

SMALLEST_RANGE = 10
"""The figure of the error by m reaches at least to this m, and to twice the study's own."""
POINTS = 400
"""A curve over m is drawn with at most about this many points."""


def drawn(
    families: tuple[FamilyRecord, ...],
    hypotheses: tuple[HypothesisRecord, ...],
    results: Results,
    *,
    thresholds: dict[str, float],
    graph: dict[str, Any] | None,
) -> dict[str, Any]:
    """Collect what each figure draws; ``thresholds`` are those of the p-values, by hypothesis."""
    place = {name: index for index, name in enumerate(results.id)}
    words = {hypothesis.id: hypothesis for hypothesis in hypotheses}
    return {
        "estimates": {f.id: [_estimate(words[i], results.row(place[i])) for i in f.members] for f in families},
        "staircase": {f.id: _staircase(f, words, results, place, thresholds) for f in families},
        "error_by_m": _error_by_m(families),
        **({"graph": graph} if graph else {}),
    }


def _estimate(words: HypothesisRecord, row: dict[str, Any]) -> dict[str, Any]:
    numbers = ("estimate", "lower", "upper", "matching_lower", "matching_upper", "interval_level", "matching_level")
    return {
        "id": words.id,
        "label": words.label,
        "scale": words.scale,
        "estimates": words.estimates,
        "unit": words.unit,
        "null_values": list(words.null_values),
        "state": row["state"],
        **{name: _drawable(row[name]) for name in numbers},
    }


def _drawable(value: float) -> float | str | None:
    """Give a number as JSON can hold it: "infinite" ends by their sign in words, none as null."""
    if math.isnan(value):
        return None
    if math.isinf(value):
        return "infinity" if value > 0 else "-infinity"
    return value


def _staircase(
    family: FamilyRecord,
    words: dict[str, HypothesisRecord],
    results: Results,
    place: dict[str, int],
    thresholds: dict[str, float],
) -> dict[str, Any]:
    rows = sorted((results.row(place[member]) for member in family.members), key=lambda row: row["rank"])
    points = [
        {
            "id": row["id"],
            "label": words[row["id"]].label,
            "rank": row["rank"],
            "p": row["p_entered"],
            "threshold": thresholds[row["id"]] if thresholds[row["id"]] > 0 else None,
            "state": row["state"],
        }
        for row in rows
    ]
    return {
        "procedure": family.procedure,
        "procedure_title": family.procedure_title,
        "level": family.level,
        "points": points,
    }


def _error_by_m(families: tuple[FamilyRecord, ...]) -> dict[str, Any]:
    """Give the family-wise error of a reader who tests all hypotheses of the study at the first family's level."""
    promise: PromiseRecord = families[0].promise
    this_m = sum(family.planned for family in families)
    last = max(SMALLEST_RANGE, 2 * this_m)
    grid = np.unique(np.append(np.rint(np.linspace(1, last, min(last, POINTS))).astype(int), this_m))
    curve = unadjusted_error(grid, level=promise.level)
    here = unadjusted_error(this_m, level=promise.level)
    return {
        "level": promise.level,
        "level_is": promise.level_is,
        "m": [int(m) for m in grid],
        "independent": curve.independent.tolist(),
        "at_most": curve.at_most.tolist(),
        "this_m": this_m,
        "this_independent": float(here.independent),
        "this_at_most": float(here.at_most),
    }
