"""Make data/stores.csv: 160 invented cold stores, four kinds of door closure, one month each.

Nothing here was measured. The seed was chosen so that the report shows each kind of decision; a seed chosen like that
is right for an example and would be wrong for anything else. Run this file to write the data again.
"""

import csv
import io
from datetime import date, timedelta
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

SEED = 20312035
CLOSURES = ("standard", "brush", "curtain", "magnetic")
REGIONS = ("coast", "inland")
PER_CELL = 20  # stores of one closure in one region
FITTED_FROM = date(2031, 6, 1)

# The true differences from the standard closure that the data are drawn with, in the units of the columns.
ENERGY = {"standard": 0.0, "brush": -4.0, "curtain": -8.0, "magnetic": -9.5}
PASSAGE = {"standard": 0.0, "brush": 0.1, "curtain": 0.5, "magnetic": 1.4}
FROST = {"standard": 0.42, "brush": 0.34, "curtain": 0.28, "magnetic": 0.10}
ALARMS = {"standard": 5.2, "brush": 4.8, "curtain": 3.7, "magnetic": 4.4}

# Stores, by their place among those of their closure, for which something went wrong.
LATE = {"brush": (11,), "curtain": (30,), "magnetic": (5, 26)}
DEVIATED = {"standard": (17,), "brush": (8, 33), "curtain": (2, 14, 25, 38), "magnetic": (19, 31)}
METER_FAILED = {"standard": (6,), "curtain": (21,), "magnetic": (36,)}
SENSOR_FAILED = {"brush": (3,), "magnetic": (12,)}
NOT_INSPECTED = {"standard": (28,)}
LOG_LOST = {"standard": (9,), "curtain": (17,)}


def stores() -> str:
    """Give the text of data/stores.csv: one line per store, in the order of the store's number."""
    chance = np.random.default_rng(SEED)
    written = io.StringIO()
    table = csv.writer(written, lineterminator="\n")
    table.writerow(
        ["store", "region", "closure", "fitted", "baseline", "energy", "passage", "frost", "alarms", "deviated"]
    )
    seen = dict.fromkeys(CLOSURES, 0)
    for number, (region, closure) in enumerate(_allocation(chance), 1):
        place = seen[closure]
        seen[closure] += 1
        table.writerow([f"S{number:03d}", region, closure, *_month(chance, region, closure, place)])
    return written.getvalue()


def _allocation(chance: np.random.Generator) -> list[tuple[str, str]]:
    """Draw which store gets which closure: at random within its region, equally often."""
    regions: NDArray[np.str_] = chance.permutation(np.repeat(REGIONS, PER_CELL * len(CLOSURES)))
    closures = {region: iter(chance.permutation(np.repeat(CLOSURES, PER_CELL))) for region in REGIONS}
    return [(str(region), str(next(closures[str(region)]))) for region in regions]


def _month(chance: np.random.Generator, region: str, closure: str, place: int) -> list[str]:
    """Draw one store's month, and write it as its loggers would."""
    late = place in LATE.get(closure, ())
    deviated = place in DEVIATED.get(closure, ())
    effect = 0.4 if deviated or late else 1.0  # a closure that is not there for the whole month saves less
    fitted = FITTED_FROM + timedelta(days=int(chance.integers(0, 5)) + 8 * late)
    baseline = chance.normal(113 if region == "coast" else 106, 13)
    energy = baseline + chance.normal(11, 8) + effect * ENERGY[closure]
    passage = chance.normal(10.8, 1.8) + effect * PASSAGE[closure]
    frost = chance.random() < FROST["standard"] + effect * (FROST[closure] - FROST["standard"])
    alarms = chance.poisson(chance.gamma(4, ALARMS[closure] / 4))
    return [
        fitted.isoformat(),
        f"{baseline:.1f}",
        "-99" if place in METER_FAILED.get(closure, ()) else f"{energy:.1f}",
        "-99" if place in SENSOR_FAILED.get(closure, ()) else f"{passage:.1f}",
        "" if place in NOT_INSPECTED.get(closure, ()) else "yes" if frost else "no",
        "NA" if place in LOG_LOST.get(closure, ()) else str(alarms),
        "yes" if deviated else "no",
    ]


if __name__ == "__main__":
    (Path(__file__).parent / "data" / "stores.csv").write_bytes(stores().encode())
