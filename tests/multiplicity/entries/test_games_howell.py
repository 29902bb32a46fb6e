"""Games and Howell's procedure against base R, and against Tukey's where the two are the same."""

import numpy as np
from multiplicity.contrasts import all_pairs, groups_of, known, unequal

from beforehand.multiplicity.entries.games_howell import critical_values, games_howell
from beforehand.multiplicity.entries.tukey import tukey


def test_check_values() -> None:
    entry, groups = known("games-howell-insectsprays"), groups_of("games-howell-insectsprays")
    found = unequal(groups, [(earlier, later) for later, earlier in all_pairs(groups)])
    np.testing.assert_allclose(found.given["dfs"], entry["expected"]["df"], rtol=1e-6)
    np.testing.assert_allclose(np.sqrt(2) * abs(found.given["statistics"]), entry["expected"]["q"], rtol=1e-6)
    # the entry asks for 1e-5 relative; base R's tail of the range is good to 1e-4 of it here, as the entry says
    np.testing.assert_allclose(games_howell(found.p, **found.given), entry["expected"]["p"], rtol=1e-5, atol=1e-9)
    reach = critical_values(1 - entry["params"]["level"], **found.given) * found.errors
    np.testing.assert_allclose(found.estimates - reach, entry["expected"]["lwr"], rtol=1e-5)
    np.testing.assert_allclose(found.estimates + reach, entry["expected"]["upr"], rtol=1e-5)


def test_tukey_with_one_df() -> None:
    t = np.array([0.4, -2.2, 3.1])
    here = games_howell([0.69, 0.04, 0.005], statistics=t, dfs=np.full(3, 20.0), groups=3)
    assert np.array_equal(here, tukey([0.69, 0.04, 0.005], statistics=t, df=20.0, groups=3))


def test_arithmetic() -> None:
    steps = games_howell.steps([0.01, 1.0], statistics=np.array([-2.9, 0.0]), dfs=np.array([12.345678, 0]), groups=4)
    assert steps.arithmetic[0] == "P(Q > 4.10122), range of 4 groups with 12.3457 df"
    assert steps.adjusted[1] == 1
