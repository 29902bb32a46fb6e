"""The family-wise error of serial gates in the configuration that breaks the naive form.

Each family but the last holds one real effect, so strong that it is always rejected, beside true nulls. Opening the
next family after *any* rejection then errs in 9.75 % of studies with two families of one null each, in 14.3 % with
three, instead of 5 %: 1 - 0.95^2 and 1 - 0.95^3, independent families.
"""

from collections.abc import Callable

import numpy as np
import pytest
from scipy.stats import binom

from beforehand.multiplicity.across.serial import serial
from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.entries.holm import holm
from beforehand.multiplicity.scheme import FamilyResult

LEVEL = 0.05
REAL_EFFECT = 1e-12
FALSE_ALARM = 1e-4
"""How often these tests may fail with a right program and another seed."""

Errs = Callable[[list[np.ndarray], list[np.ndarray]], bool]


def by_serial_gates(p: list[np.ndarray], adjusted: list[np.ndarray]) -> bool:
    """Whether a study rejects a true null; each family's first member, but for the last family, is the real effect."""
    families = [
        FamilyResult(
            id=str(k),
            p_family=values,
            has_result=np.full(values.size, True),
            against_claim=np.full(values.size, False),
            level=LEVEL,
        )
        for k, values in enumerate(adjusted)
    ]
    decided = serial(families)
    return any(state == "rejected" for k, one in enumerate(decided) for state in one.states[nulls(k, p)])


def after_any_rejection(p: list[np.ndarray], adjusted: list[np.ndarray]) -> bool:
    """Whether a study errs that opens the next family after any rejection: the form that is refused."""
    for k, values in enumerate(adjusted):
        rejected = is_rejected(values, LEVEL)
        if rejected[nulls(k, p)].any():
            return True
        if not rejected.any():
            return False
    return False


def nulls(k: int, p: list[np.ndarray]) -> slice:
    return slice(0 if k == len(p) - 1 else 1, None)


def errors(errs: Errs, *, families: int, true_nulls: int, studies: int) -> int:
    random = np.random.default_rng(20310302)
    found = 0
    for _ in range(studies):
        p = [random.random(true_nulls + (k < families - 1)) for k in range(families)]
        for one in p[:-1]:
            one[0] = REAL_EFFECT
        found += errs(p, [holm(one) for one in p])
    return found


def accepted(studies: int, rate: float) -> tuple[float, float]:
    """Give the range of counts that a program with this error rate leaves once in 10,000 seeds."""
    lower, upper = binom.ppf([FALSE_ALARM / 2, 1 - FALSE_ALARM / 2], studies, rate)
    return float(lower), float(upper)


@pytest.mark.parametrize("studies", [3_000])
@pytest.mark.parametrize(("families", "naive"), [(2, 0.0975), (3, 0.142625)])
def test_serial_gates_keep_the_level(families: int, naive: float, studies: int) -> None:
    lower, upper = accepted(studies, LEVEL)
    # the power of this test: a program that opens after any rejection passes less than once in a million seeds
    assert binom.cdf(upper, studies, naive) < 1e-6
    assert lower <= errors(by_serial_gates, families=families, true_nulls=1, studies=studies) <= upper
    assert errors(after_any_rejection, families=families, true_nulls=1, studies=studies) > upper


@pytest.mark.thorough
@pytest.mark.parametrize(("families", "true_nulls"), [(2, 1), (3, 1), (3, 3), (4, 2)])
def test_serial_gates_keep_the_level_closely(families: int, true_nulls: int) -> None:
    studies = 80_000
    # Holm among t independent true nulls beside a rejected effect errs with 1 - (1 - a/t)^t. No later family adds to
    # it: its gate opens only when every null before it was rejected, and that is an error already.
    rate = 1 - (1 - LEVEL / true_nulls) ** true_nulls
    lower, upper = accepted(studies, rate)
    # the power of this test: an error rate that is off by a tenth is seen in at least 99 of 100 seeds
    assert binom.cdf(upper, studies, rate * 1.1) + binom.sf(lower - 1, studies, rate * 1.1) - 1 < 0.01
    assert lower <= errors(by_serial_gates, families=families, true_nulls=true_nulls, studies=studies) <= upper
