"""The F distribution by quadrature against scipy and closed forms."""

import math

import numpy as np
import pytest
from scipy import special, stats

from beforehand.hypothesis_tests.f_again import LogF


def test_closed_forms() -> None:
    # 2 and 2: P(F >= f) = 1 / (1 + f); 1 and 1: 1 - (2 / pi) atan √f
    for log_f in (-30.0, -2.0, 0.0, 0.5, 8.0, 200.0):
        f = math.exp(log_f)
        assert LogF(2, 2).tails(log_f).above == pytest.approx(1 / (1 + f), rel=1e-12)
        assert LogF(1, 1).tails(log_f).above == pytest.approx(2 / math.pi * math.atan(1 / math.sqrt(f)), rel=1e-12)


@pytest.mark.parametrize("seed", range(8))
def test_scipy(seed: int) -> None:
    random = np.random.default_rng(seed)
    d1, d2 = (float(np.floor(np.exp(random.uniform(0, 8)))) for _ in range(2))
    log_f = float(random.normal(0, 3 / math.sqrt(min(d1, d2))))
    tails = LogF(d1, d2).tails(log_f)
    # scipy's F goes through the incomplete beta function, to about 1e-11 with thousands of degrees of freedom
    assert tails.above == pytest.approx(stats.f.sf(math.exp(log_f), d1, d2), rel=1e-9)
    assert tails.below == pytest.approx(stats.f.cdf(math.exp(log_f), d1, d2), rel=1e-9)
    for tail in (0.4995, 0.2, 0.025, 1e-6, 1e-12):
        rest = special.betaincinv(d2 / 2, d1 / 2, tail)
        quantile = math.exp(LogF(d1, d2).upper_quantile(tail))
        assert quantile == pytest.approx(d2 * special.betainccinv(d1 / 2, d2 / 2, tail) / (d1 * rest), rel=1e-9)
