"""Make data/runs.csv and data/calibrations.csv: an invented comparison of two windscreens for sound level meters.

Nothing here was measured. The seed was chosen so that the report shows a staircase with bands on both sides of it; a
seed chosen like that is right for an example and would be wrong for anything else. Run this file to write the data
again.
"""

import csv
import io
from collections.abc import Sequence
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

SEED = 20310441
RUNS = 30
SCREENS = ("weatherproof", "foam")

# Third-octave bands: centre frequency in Hz, level of the invented sites in dB, true difference weatherproof - foam in
# dB, and its spread from run to run. A larger screen keeps more wind noise out of the low bands, where the turbulence
# at two microphones differs most, and takes a little of the sound in the high ones.
BANDS = (
    (50, 56.0, -1.10, 1.00),
    (63, 55.5, -0.85, 0.90),
    (80, 54.0, -0.60, 0.75),
    (100, 52.0, -0.40, 0.60),
    (125, 50.5, -0.25, 0.50),
    (160, 49.5, -0.15, 0.42),
    (200, 49.0, -0.05, 0.36),
    (250, 48.5, 0.00, 0.32),
    (315, 48.0, 0.00, 0.28),
    (400, 48.0, 0.00, 0.26),
    (500, 48.5, 0.00, 0.24),
    (630, 49.0, 0.00, 0.22),
    (800, 49.5, 0.00, 0.20),
    (1000, 50.0, 0.00, 0.20),
    (1250, 49.0, 0.00, 0.20),
    (1600, 47.5, -0.05, 0.22),
    (2000, 45.5, -0.08, 0.24),
    (2500, 43.0, -0.14, 0.26),
    (3150, 40.0, -0.20, 0.30),
    (4000, 37.0, -0.30, 0.34),
)
OVERLOADED = {(4, "foam"): (50, 63, 80), (22, "foam"): (50, 63), (22, "weatherproof"): (50,)}  # by gusts
WITHOUT_HIGH_BANDS = (13,)  # the run whose bands from 2500 Hz up were struck out: a cricket sat at the mast

SESSIONS = 12
# True reading of each check against the calibrator's 94.0 dB; the foam-screened meter drifts over a session.
CHECKS = {"weatherproof_before": 94.00, "weatherproof_after": 94.02, "foam_before": 94.01, "foam_after": 94.09}


def runs() -> str:
    """Give the text of data/runs.csv: two lines per run, one for each windscreen."""
    chance = np.random.default_rng(SEED)
    lines = [["run", "windscreen", "wind", *(f"hz_{hertz}" for hertz, *_ in BANDS)]]
    for run in range(1, RUNS + 1):
        wind = chance.uniform(0.8, 5.4)
        levels = _levels(chance, wind)
        for screen, spectrum in zip(SCREENS, levels, strict=True):
            lines.append([f"R{run:02d}", screen, f"{wind:.1f}", *_shown(run, screen, spectrum)])
    return _text(lines)


def calibrations() -> str:
    """Give the text of data/calibrations.csv: one line per day of measurement."""
    chance = np.random.default_rng(SEED + 1)
    lines = [["session", *CHECKS]]
    for session in range(1, SESSIONS + 1):
        calibrator = chance.normal(0, 0.03)
        readings = [level + calibrator + chance.normal(0, 0.05) for level in CHECKS.values()]
        lines.append([f"D{session:02d}", *(f"{reading:.2f}" for reading in readings)])
    return _text(lines)


def _levels(chance: np.random.Generator, wind: float) -> list[NDArray[np.float64]]:
    """Draw the band levels of one run, first with the weatherproof screen, then with the foam one."""
    _, level, difference, spread = np.array(BANDS).T
    site = level + chance.normal(0, 5) + chance.normal(0, 2, len(BANDS))
    shared, own = chance.normal(0, 1, len(BANDS) + 1), chance.normal(0, 1, len(BANDS))
    neighbours = (shared[1:] + shared[:-1]) / np.sqrt(2)  # neighbouring bands vary together
    windiness = 0.4 + 0.6 * wind / 3.1  # wind makes both the difference and its spread larger
    between = np.where(difference < -0.3, windiness, 1.0) * difference
    between = between + spread * (0.7 * neighbours + 0.7 * own)
    return [site + between / 2, site - between / 2]


def _shown(run: int, screen: str, spectrum: NDArray[np.float64]) -> list[str]:
    """Write a spectrum as the meter does: one decimal, OVL where a gust overloaded it, nothing where struck out."""
    overloaded = OVERLOADED.get((run, screen), ())
    shown = []
    for (hertz, *_), level in zip(BANDS, spectrum, strict=True):
        struck_out = run in WITHOUT_HIGH_BANDS and hertz >= 2500
        shown.append("OVL" if hertz in overloaded else "" if struck_out else f"{level:.1f}")
    return shown


def _text(lines: Sequence[Sequence[str]]) -> str:
    written = io.StringIO()
    csv.writer(written, lineterminator="\n").writerows(lines)
    return written.getvalue()


if __name__ == "__main__":
    data = Path(__file__).parent / "data"
    (data / "runs.csv").write_bytes(runs().encode())
    (data / "calibrations.csv").write_bytes(calibrations().encode())
