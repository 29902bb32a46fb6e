"""What every procedure has to do that refers statistics to the distribution of the largest one."""

import inspect
import math
from collections.abc import Iterator
from typing import Any

import numpy as np
import pytest
from multiplicity.contrasts import Contrasts, all_pairs, drawn, family, unequal
from multiplicity.given import judges_by_p

from beforehand.multiplicity import largest_again
from beforehand.multiplicity.contract import PER_MEMBER, PROCEDURES, Procedure
from beforehand.multiplicity.decision import is_rejected

NAMES = [
    name for name in PROCEDURES if PROCEDURES[name].intervals == "critical_value" and not judges_by_p(PROCEDURES[name])
]
# two quadratures, each good to about 1e-13
AGREE = 1e-11


@pytest.fixture(params=NAMES)
def procedure(request: pytest.FixtureRequest) -> Procedure:
    found: Procedure = PROCEDURES[request.param]
    return found


def families(name: str, seed: int) -> Iterator[Contrasts]:
    random = np.random.default_rng(seed)
    for k in (2, 3, 5):
        yield from family(name, drawn(random, k))


def taken(given: dict[str, Any], order: list[int]) -> dict[str, Any]:
    return {name: value[order] if name in PER_MEMBER else value for name, value in given.items()}


def without_result(found: Contrasts, gone: int) -> Contrasts:
    """The same family when one of its comparisons has no result."""
    there = np.arange(found.p.size) != gone
    given = {
        name: np.where(there, value, 0) if name in ("statistics", "loadings", "dfs") else value
        for name, value in found.given.items()
    }
    return Contrasts(np.where(there, found.p, 1.0), given, found.estimates, found.errors)


def test_declares_what_it_judges(procedure: Procedure) -> None:
    assert procedure.tests
    assert procedure.compares in ("groups", "control")
    parameters = inspect.signature(PROCEDURES.module(procedure.name).critical_values).parameters
    assert parameters.keys() - {"level"} == procedure.needs


def test_range(procedure: Procedure) -> None:
    for found in families(procedure.name, 1):
        adjusted = procedure(found.p, **found.given)
        assert np.all((adjusted >= found.p) & (adjusted <= 1))


def test_alone_it_is_the_unadjusted_p(procedure: Procedure) -> None:
    for found in family(procedure.name, drawn(np.random.default_rng(2), 2)):
        assert found.p.size == 1
        np.testing.assert_allclose(procedure(found.p, **found.given), found.p, rtol=1e-11)


def test_order_of_the_hypotheses_does_not_matter(procedure: Procedure) -> None:
    random = np.random.default_rng(3)
    for found in families(procedure.name, 3):
        order = random.permutation(found.p.size).tolist()
        moved = procedure(found.p[order], **taken(found.given, order))
        assert np.array_equal(moved, procedure(found.p, **found.given)[order])


def test_equal_statistics_get_equal_p(procedure: Procedure) -> None:
    for found in families(procedure.name, 4):
        given = {
            name: np.full_like(value, value[0]) if name in PER_MEMBER else value for name, value in found.given.items()
        }
        assert len(set(procedure(np.full_like(found.p, found.p[0]), **given))) == 1


def test_larger_statistics_get_smaller_p(procedure: Procedure) -> None:
    for found in families(procedure.name, 5):
        grown = found.given | {
            "statistics": found.given["statistics"] * 1.1 + 0.01 * np.sign(found.given["statistics"])
        }
        more, less = (procedure(np.zeros_like(found.p), **given) for given in (grown, found.given))
        speaks = found.given["statistics"] > 0 if found.given.get("sides") == 1 else np.ones_like(found.p, dtype=bool)
        assert np.all((more < less) | (less == 1) | ~speaks)


def test_replay_is_the_same(procedure: Procedure) -> None:
    for found in families(procedure.name, 6):
        for level in (0.01, 0.05, 0.2):
            adjusted = procedure(found.p, **found.given)
            again = procedure.replay(found.p.tolist(), level, **found.plain)
            np.testing.assert_allclose(again["adjusted"], adjusted, rtol=AGREE)
            assert again["rejected"] == is_rejected(adjusted, level).tolist()


def test_replay_far_out(procedure: Procedure) -> None:
    for found in families(procedure.name, 7):
        given = found.given | {"statistics": found.given["statistics"] * 12}
        adjusted = procedure(np.zeros_like(found.p), **given)
        plain = {name: value.tolist() if isinstance(value, np.ndarray) else value for name, value in given.items()}
        again = procedure.replay([0.0] * found.p.size, 0.05, **plain)
        np.testing.assert_allclose(again["adjusted"], adjusted, rtol=AGREE, atol=1e-290)


def test_replay_needs_only_what_it_names(procedure: Procedure) -> None:
    module = PROCEDURES.module(procedure.name)
    texts = [inspect.getsource(function) for function in (*module.REPLAY_USES, module.replay)]
    alone: dict[str, Any] = {}
    exec("\n\n".join(["from __future__ import annotations", "import math", *texts]), alone)
    assert all(inspect.getmodule(function) is largest_again for function in module.REPLAY_USES)
    for found in families(procedure.name, 8):
        again = alone["replay"](found.p.tolist(), 0.05, **found.plain)
        assert again == procedure.replay(found.p.tolist(), 0.05, **found.plain)


@pytest.mark.parametrize("level", [0.001, 0.025, 0.05, 0.3])
def test_the_interval_leaves_out_what_is_rejected(procedure: Procedure, level: float) -> None:
    # the null value is 0: statistics are estimates over their standard errors
    for found in families(procedure.name, 9):
        rejected = is_rejected(procedure(found.p, **found.given), level)
        reach = procedure.critical_values(level, **found.given) * found.errors
        if found.given.get("sides") == 1:
            spoken_for = found.given["statistics"] * found.errors
            outside = spoken_for - reach >= 0
        else:
            outside = np.abs(found.estimates) - reach >= 0
        assert outside.tolist() == rejected.tolist()


def test_a_statistic_at_the_critical_value_has_the_level(procedure: Procedure) -> None:
    for found in families(procedure.name, 10):
        for level in (0.01, 0.2):
            given = found.given | {"statistics": procedure.critical_values(level, **found.given)}
            np.testing.assert_allclose(procedure(np.zeros_like(found.p), **given), level, rtol=1e-10)


def test_thresholds_are_the_p_of_the_critical_values(procedure: Procedure) -> None:
    for found in families(procedure.name, 11):
        for level in (0.01, 0.05):
            steps = procedure.steps(found.p, **found.given)
            rejected = np.sort(found.p) <= steps.thresholds(level)
            assert rejected.tolist() == is_rejected(steps.adjusted, level).tolist()


def test_a_comparison_without_result_is_still_counted(procedure: Procedure) -> None:
    for found in families(procedure.name, 12):
        if found.p.size < 2:
            continue
        missing = without_result(found, 1)
        whole, part = procedure(found.p, **found.given), procedure(missing.p, **missing.given)
        assert part[1] == 1
        others = np.arange(found.p.size) != 1
        # as many groups as planned, or the tail of those that are there times planned over computed
        assert procedure.name == "dunnett" or np.array_equal(part[others], whole[others])
        again = procedure.replay(missing.p.tolist(), 0.05, **missing.plain)
        np.testing.assert_allclose(again["adjusted"], part, rtol=AGREE)
        reach = procedure.critical_values(0.05, **missing.given)
        assert np.isfinite(reach[others]).all()


def test_no_result_at_all(procedure: Procedure) -> None:
    for found in families(procedure.name, 13):
        none = {name: np.zeros_like(value) if name in PER_MEMBER else value for name, value in found.given.items()}
        none |= {"df": 0} if "df" in none else {}
        p = np.ones_like(found.p)
        assert procedure(p, **none).tolist() == p.tolist()
        plain = {name: value.tolist() if isinstance(value, np.ndarray) else value for name, value in none.items()}
        assert procedure.replay(p.tolist(), 0.05, **plain) == {
            "adjusted": p.tolist(),
            "rejected": [False] * p.size,
        }
        assert np.isnan(procedure.critical_values(0.05, **none)).all()


def test_the_arithmetic_says_where_each_comes_from(procedure: Procedure) -> None:
    for found in families(procedure.name, 14):
        steps = procedure.steps(found.p, **found.given)
        assert np.isnan(steps.factor).all()
        assert len(steps.arithmetic) == found.p.size
        assert all(text.startswith("P(") for text in steps.arithmetic)
        assert np.array_equal(steps.adjusted, np.minimum(steps.product, 1))
        assert steps.taken_from.tolist() == list(range(found.p.size))


def test_input_is_left_alone(procedure: Procedure) -> None:
    for found in families(procedure.name, 15):
        arrays = [found.p, *(value for value in found.given.values() if isinstance(value, np.ndarray))]
        before = [array.copy() for array in arrays]
        procedure(found.p, **found.given)
        procedure.critical_values(0.05, **found.given)
        assert all(np.array_equal(array, copy) for array, copy in zip(arrays, before, strict=True))


def test_different_degrees_of_freedom_change_the_order() -> None:
    # with few units a pair pays more for the other groups than its p says
    random = np.random.default_rng(16)
    for _ in range(200):
        found = unequal(groups := drawn(random, 6), all_pairs(groups))
        adjusted = PROCEDURES["games_howell"](found.p, **found.given)
        if not np.all(np.diff(adjusted[np.argsort(found.p)]) >= 0):
            return
    pytest.fail("the order never changed")


def test_many_equal_groups_and_very_many_units() -> None:
    given = {"statistics": [4.0, 6.0], "df": 3_000_000.0, "groups": 400}
    first = PROCEDURES["tukey"]([1e-4, 1e-8], **{**given, "statistics": np.array(given["statistics"])})
    again = PROCEDURES["tukey"].replay([1e-4, 1e-8], 0.05, **given)
    np.testing.assert_allclose(again["adjusted"], first, rtol=1e-10)
    assert math.isfinite(first[0])
