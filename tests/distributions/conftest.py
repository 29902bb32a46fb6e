"""What the tests of distributions share: tables from elsewhere, and a second route by another rule."""

import csv
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import yaml
from numpy.typing import NDArray
from scipy import stats

Values = NDArray[np.float64]

REFERENCES = Path(__file__).parents[1] / "references" / "distributions"


@pytest.fixture(scope="session")
def table() -> Callable[[str], dict[str, Any]]:
    """Find one table by its id."""
    entries = {entry["id"]: entry for entry in yaml.safe_load((REFERENCES / "tables.yaml").read_text("utf-8"))}
    return lambda name: entries[name]


@pytest.fixture(scope="session")
def computed_elsewhere() -> list[dict[str, float]]:
    """Read the tails that mpmath computed."""
    lines = (REFERENCES / "studentized_range.csv").read_text("utf-8").splitlines()
    rows = csv.DictReader(line for line in lines if not line.startswith("#"))
    return [{name: float(value) for name, value in row.items()} for row in rows]


@pytest.fixture(scope="session")
def studentized() -> Callable[..., float]:
    """Integrate P(W > q s) over s by Gauss and Legendre's rule, with scipy's density of chi.

    Shares no node, no range and no density with the package. It walks s itself, not log s, on 60 panels of 20 nodes
    between the quantiles of s whose tails are 1e-18 (and further down, where a large q needs a small s).
    """
    x, weight = np.polynomial.legendre.leggauss(20)

    def tail(normal_tail: Callable[[Values], Values], q: float, df: float) -> float:
        s = stats.chi(df, scale=1 / np.sqrt(df))
        low, high = s.ppf(1e-18), s.isf(1e-18)
        ends = np.concatenate([np.geomspace(min(low, 1e-3 / q), low, 12)[:-1], np.linspace(low, high, 60)])
        half, middle = np.diff(ends)[:, None] / 2, (ends[1:] + ends[:-1])[:, None] / 2
        nodes = (middle + half * x).ravel()
        return float(((half * weight).ravel() * s.pdf(nodes) * normal_tail(q * nodes)).sum())

    return tail
