"""Scheffe's procedure against the handbook's contrasts, scipy's F, and what it has to allow for."""

import numpy as np
import pytest
from multiplicity.contrasts import all_pairs, drawn, groups_of, known, pooled
from scipy import special, stats

from beforehand.multiplicity.entries.scheffe import critical_values, scheffe
from beforehand.multiplicity.entries.tukey import tukey


@pytest.mark.parametrize("number", ["1", "2"])
def test_handbook(number: str) -> None:
    expected = known("scheffe-handbook")["expected"]
    estimate, error = expected[f"estimate{number}"], expected[f"se{number}"]
    given = {"statistics": np.array([estimate / error]), "df": 16.0, "groups": 4}
    p = 2 * special.stdtr(16, -abs(given["statistics"]))
    assert scheffe(p, **given)[0] == pytest.approx(expected[f"scheffe_p{number}"], rel=1e-6)
    reach = critical_values(0.05, **given)[0] * error
    assert (estimate - reach, estimate + reach) == pytest.approx(expected[f"scheffe_ci{number}"], rel=1e-6)


def test_handbook_variance() -> None:
    groups = groups_of("tukey-handbook")
    found = pooled(groups, all_pairs(groups))
    assert (found.errors[0] ** 2 * 5 / 2) == pytest.approx(known("scheffe-handbook")["expected"]["mse"], rel=1e-6)
    assert found.given["df"] == 16


def test_scipy_f() -> None:
    t = np.array([0.3, 2.0, -4.0, 9.0])
    for groups, df in ((2, 5), (3, 12), (6, 80), (7, 400)):
        p = 2 * special.stdtr(df, -np.abs(t))
        expected = np.maximum(stats.f.sf(t**2 / (groups - 1), groups - 1, df), p)
        np.testing.assert_allclose(scheffe(p, statistics=t, df=df, groups=groups), expected, rtol=1e-12)
        c = critical_values(0.03, statistics=t, df=df, groups=groups)[0]
        assert c == pytest.approx(np.sqrt((groups - 1) * stats.f.isf(0.03, groups - 1, df)), rel=1e-12)


def test_stricter_than_tukey_for_pairs() -> None:
    # it allows for every contrast, Tukey's for the pairs alone
    for seed in range(10):
        groups = drawn(np.random.default_rng(seed), 4)
        found = pooled(groups, all_pairs(groups))
        assert np.all(scheffe(found.p, **found.given) >= tukey(found.p, **found.given))


def test_arithmetic() -> None:
    steps = scheffe.steps([0.01], statistics=np.array([-2.9]), df=23.0, groups=4)
    assert list(steps.arithmetic) == ["P(F > 2.80333) with 3 and 23 df"]
