"""Storey's q-values against check values, base R and a second spline."""

import csv
from itertools import groupby
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.interpolate import make_smoothing_spline

from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.benjamini_hochberg import benjamini_hochberg
from beforehand.multiplicity.entries.storey_q import storey_q
from beforehand.multiplicity.true_nulls import POINTS, Way, share_of_true_nulls, smoothing, smoothing_parameter

WAYS: list[Way] = ["smoother", "bootstrap", "from_half"]
LINES = (Path(__file__).parents[2] / "references" / "p_values" / "storey.csv").read_text("utf-8").splitlines()
ROWS = list(csv.DictReader(line for line in LINES if not line.startswith("#")))
CASES = {case: list(rows) for case, rows in groupby(ROWS, key=lambda row: row["case"])}


@pytest.mark.parametrize("case", CASES)
@pytest.mark.parametrize(("way", "tolerance"), [("smoother", 2e-5), ("bootstrap", 1e-14)])
def test_base_r(way: Way, tolerance: float, case: str) -> None:
    # R's spline finds its weight by a search that ends within 1e-5 of three degrees of freedom; it is not capped at 1
    p = np.sort([float(row["p"]) for row in CASES[case]])
    expected = min(1.0, float(CASES[case][0][way]))
    assert share_of_true_nulls(p, way) == pytest.approx(expected, abs=tolerance)


def test_the_smoother_has_three_degrees_of_freedom() -> None:
    # scipy's spline with the same weight for points one apart; the trace from its answers to unit vectors
    at = np.arange(19.0)
    replayed = 125.76032706841322  # the number in `replay`
    unit = [make_smoothing_spline(at, row, lam=replayed) for row in np.eye(19)]
    assert sum(float(unit[i](i)) for i in range(19)) == pytest.approx(3, abs=1e-9)
    np.testing.assert_allclose(smoothing(), [float(spline(18.0)) for spline in unit], rtol=0, atol=1e-12)


def test_the_weight_of_the_roughness() -> None:
    assert smoothing_parameter(np.array([0.0, 0.0, 1.0, 1.0])) == pytest.approx(1.0)  # 2 + 2/(1 + x) = 3


def test_check_values(entry: Any) -> None:
    known = entry("storey_q", "bh95-storey-pi0")
    p = np.array(known["inputs"]["p"])
    at_half = int(np.flatnonzero(known["params"]["lambda"] == POINTS)[0])
    counted = np.count_nonzero(p >= POINTS[at_half]) / (p.size * (1 - POINTS[at_half]))
    assert counted == pytest.approx(known["expected"]["pi0"], abs=known["tolerance"]["abs"])
    plus_one = share_of_true_nulls(p, "from_half")
    assert plus_one == pytest.approx(known["expected"]["pi0_plus_one"], abs=known["tolerance"]["abs"])
    q = entry("storey_q", "bh95-storey-q")
    scaled = benjamini_hochberg(q["inputs"]["p"]) * q["params"]["pi0"]
    np.testing.assert_allclose(scaled, q["expected"]["q"], rtol=0, atol=q["tolerance"]["abs"])


def test_rejections_from_half(entry: Any) -> None:
    known = entry("storey_q", "bh95-sts-adaptive")
    p = known["inputs"]["p"]
    assert len(p) * share_of_true_nulls(np.sort(p), "from_half") == pytest.approx(known["expected"]["m0_hat"])
    rejected = is_rejected(storey_q(p, null_share="from_half"), known["params"]["alpha"])
    assert np.count_nonzero(rejected) == known["expected"]["n_rejected"]


@pytest.mark.parametrize("way", WAYS)
@pytest.mark.parametrize("seed", range(20))
def test_q_is_the_share_times_benjamini_hochberg(seed: int, way: Way) -> None:
    p = np.random.default_rng(seed).random(40 + 30 * seed) ** (1 + seed % 4)
    p = np.round(p, 3) if seed % 2 else p
    expected = np.minimum(benjamini_hochberg(p) * share_of_true_nulls(np.sort(p), way), 1)
    adjusted = storey_q(p, null_share=way)
    if way == "from_half":  # the smallest product from a p above 0.5 on doesn't count there
        at_most_half = p <= 0.5
        assert np.all(adjusted[~at_most_half] == 1)
        assert np.all(adjusted[at_most_half] >= expected[at_most_half] * (1 - 1e-15))
    else:
        np.testing.assert_allclose(adjusted, expected, rtol=1e-15)
    again = storey_q.replay(p.tolist(), 0.1, null_share=way)
    np.testing.assert_allclose(again["adjusted"], adjusted, rtol=1e-11)
    assert again["rejected"] == is_rejected(adjusted, 0.1).tolist()


def test_a_count_on_a_point_counts() -> None:
    # 3 x 0.05 is above 0.15 in doubles, and p = 0.15 counts as from 0.15 on all the same
    assert [float(f"{k * 0.05:.2f}") for k in range(1, 20)] == POINTS.tolist()


def test_an_estimate_from_half_may_be_above_one() -> None:
    # cut off at 1 it would reject among ten true nulls more often than the level; tests/calibration measures it
    assert share_of_true_nulls(np.full(10, 0.9), "from_half") == 2.2
    assert share_of_true_nulls(np.full(10, 0.9), "smoother") == 1
    assert storey_q([0.01, *[0.9] * 9], null_share="from_half")[0] == pytest.approx(0.01 * 10 * 2, rel=1e-14)


@pytest.mark.parametrize("way", WAYS)
def test_one_null_is_true_at_least(way: Way) -> None:
    p = np.full(50, 1e-6)
    assert share_of_true_nulls(p, way) >= 1 / 50
    assert np.all(storey_q(p, null_share=way) > 0)


def test_raising_a_p_can_add_a_rejection() -> None:
    # why it is exempt by name: more values up to the middle let the spline fall more steeply to its end
    p = np.array([*[0.001] * 20, 0.04, *np.linspace(0.06, 0.96, 13)])
    raised = np.where(p == 0.04, 0.45, p)
    assert np.all(storey_q(raised)[:20] < storey_q(p)[:20] * 0.999)
