"""Dunnett's procedure against printed values, scipy, and what is known of it in special cases."""

import numpy as np
import pytest
from multiplicity.contrasts import drawn, groups_of, known, with_control
from scipy import stats

from beforehand.multiplicity.entries.bonferroni import bonferroni
from beforehand.multiplicity.entries.dunnett import critical_values, dunnett

SIDES = {"p_two": "two_sided", "p_greater": "above", "p_less": "below"}


@pytest.mark.parametrize("name", ["dunnett-1955", "dunnett-mucociliary"])
@pytest.mark.parametrize("key", SIDES)
def test_check_values(name: str, key: str) -> None:
    entry = known(name)
    found = with_control(groups_of(name), "control", side=SIDES[key])
    assert found.given["df"] == entry["expected"]["df"]
    adjusted = dunnett(found.p, **found.given)
    np.testing.assert_allclose(adjusted, entry["expected"][key], rtol=1e-7)  # two integrations agree to 1e-8
    printed = [float(value) for value in entry["published"][key]]
    np.testing.assert_allclose(adjusted, printed, rtol=0, atol=entry["published_tolerance"][key])


@pytest.mark.parametrize("name", ["dunnett-1955", "dunnett-mucociliary"])
def test_critical_values(name: str) -> None:
    expected = known(name)["expected"]
    found = with_control(groups_of(name), "control", side="two_sided")
    c = critical_values(0.05, **found.given)
    np.testing.assert_allclose(c, expected["crit_two_95"], rtol=1e-7)
    np.testing.assert_allclose(found.estimates - c * found.errors, expected["lwr_two_95"], rtol=1e-7)
    np.testing.assert_allclose(found.estimates + c * found.errors, expected["upr_two_95"], rtol=1e-7)
    one = with_control(groups_of(name), "control", side="above")
    np.testing.assert_allclose(critical_values(0.05, **one.given), expected["crit_one_95"], rtol=1e-7)


@pytest.mark.parametrize(("side", "scipys"), [("two_sided", "two-sided"), ("above", "greater"), ("below", "less")])
def test_scipy(side: str, scipys: str) -> None:
    # scipy's p moves by about 1e-4 with its seed
    groups = drawn(np.random.default_rng(31), 4)
    found = with_control(groups, "g0", side=side)
    control, *others = groups.values()
    again = stats.dunnett(*others, control=control, alternative=scipys, rng=np.random.default_rng(7))
    np.testing.assert_allclose(dunnett(found.p, **found.given), again.pvalue, atol=1e-3)


def test_never_stricter_than_bonferroni() -> None:
    for seed in range(6):
        for side in ("two_sided", "above", "below"):
            found = with_control(drawn(np.random.default_rng(seed), 5), "g0", side=side)
            assert np.all(dunnett(found.p, **found.given) <= bonferroni(found.p) * (1 + 1e-12))


def test_control_first_or_second_is_the_same_question() -> None:
    found = with_control(drawn(np.random.default_rng(32), 4), "g0", side="above")
    turned = found.given | {"statistics": found.given["statistics"], "loadings": -found.given["loadings"]}
    np.testing.assert_allclose(dunnett(found.p, **found.given), dunnett(found.p, **turned), rtol=1e-12)


def test_both_sides_share_the_level() -> None:
    found = with_control(drawn(np.random.default_rng(33), 4), "g0", side="below", doubled=True)
    alone = with_control(drawn(np.random.default_rng(33), 4), "g0", side="below")
    expected = np.minimum(2 * dunnett(alone.p, **alone.given), 1)
    np.testing.assert_allclose(dunnett(found.p, **found.given), expected, rtol=1e-12)
    np.testing.assert_allclose(critical_values(0.05, **found.given), critical_values(0.025, **alone.given), rtol=1e-12)


def test_planned_over_computed() -> None:
    given = {"df": 20.0, "sides": 2, "doubled": False}
    t, b = np.array([2.5, -1.0, 0.0]), np.array([0.6, 0.7, 0.0])
    p = [0.02, 0.33, 1.0]
    steps = dunnett.steps(p, statistics=t, loadings=b, **given)
    two = dunnett(p[:2], statistics=t[:2], loadings=b[:2], **given)
    np.testing.assert_allclose(steps.adjusted, np.minimum([*(two * 3 / 2), 1], 1), rtol=1e-14)
    assert steps.arithmetic[0] == (
        f"P(largest |T| of 2 > 2.5) with 20 df = {two[0]:.4g}, times 3/2, planned over computed"
    )
    assert steps.arithmetic[2] == "no result"


def test_arithmetic() -> None:
    asked = {"statistics": np.array([2.5, 1.0]), "loadings": np.array([0.6, 0.7]), "df": 20.0}
    p = [0.02, 0.33]
    assert dunnett.steps(p, **asked, sides=2, doubled=False).arithmetic[0] == "P(largest |T| of 2 > 2.5) with 20 df"
    assert dunnett.steps(p, **asked, sides=1, doubled=False).arithmetic[0] == "P(largest T of 2 > 2.5) with 20 df"
    assert dunnett.steps(p, **asked, sides=1, doubled=True).arithmetic[0].endswith(", doubled")
