"""The error rate of each procedure under true nulls where it is known exactly, beside what a slip would make of it.

Each case has independent true nulls and, where there are any, real effects so strong that they are always rejected.
Its exact rate follows from the procedure's thresholds in a line of probability; `wrong` is the rate that a plausible
slip (one more or one fewer hypothesis, weights of another sum, a factor left out) would give, and sets how many
families are needed to see it.
"""

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.stats import binom, norm

from beforehand.multiplicity.bounds.true_discoveries import true_discoveries
from beforehand.multiplicity.combination import Combined, cauchy, fisher, simes, stouffer
from beforehand.multiplicity.contract import PROCEDURES
from beforehand.multiplicity.decision import is_rejected
from beforehand.multiplicity.partial_conjunction import partial_conjunction

pytestmark = pytest.mark.thorough

LEVEL = 0.05
REAL_EFFECT = 1e-12
FALSE_ALARM = 1e-4
"""How often each of these tests may fail with a right program and another seed."""
MISSED = 0.01
"""How often it may pass with the slip."""

Errs = Callable[[NDArray[np.bool_]], bool]
"""Whether a family errs, by which of its true nulls are rejected."""


def any_of(rejected: NDArray[np.bool_]) -> bool:
    return bool(rejected.any())


def two_of(rejected: NDArray[np.bool_]) -> bool:
    return int(rejected.sum()) >= 2


@dataclass(frozen=True)
class Case:
    """One configuration: real effects first, true nulls behind them."""

    name: str
    effects: int
    nulls: int
    rate: float
    wrong: float
    given: dict[str, Any] = field(default_factory=dict)
    errs: Errs = any_of


def miss_all(*levels: float) -> float:
    """Give the probability that at least one of independent uniform p-values meets its level."""
    return 1 - float(np.prod(1 - np.array(levels)))


# two of n uniform p-values step down through two thresholds: the smaller meets the first, the larger the second
def two_steps(n: int, first: float, second: float) -> float:
    """Give the probability that the smallest of n uniform p-values meets one threshold and the second a higher one."""
    one_below_first = n * first * ((1 - first) ** (n - 1) - (1 - second) ** (n - 1))
    return one_below_first + float(binom.sf(1, n, first))


SHARES = {"weights": [0.5, 0.3, 0.2]}
IN_ORDER = {"positions": [0, 1, 2]}
CASES = [
    Case("sidak", 0, 5, LEVEL, 1 - 0.95 ** (5 / 4)),
    Case("holm_sidak", 0, 5, LEVEL, 1 - 0.95 ** (5 / 4)),
    Case("holm_sidak", 2, 4, LEVEL, 1 - 0.95 ** (4 / 5)),
    Case("holm", 1, 4, miss_all(*[LEVEL / 4] * 4), miss_all(*[LEVEL / 5] * 4)),
    # among two true nulls Hochberg and Hommel are Simes' test: either p up to a/2, or both up to a; exactly a
    Case("hochberg", 3, 2, LEVEL, miss_all(LEVEL / 2, LEVEL / 2) - 0.01),
    Case("hommel", 3, 2, LEVEL, miss_all(LEVEL / 2, LEVEL / 2) - 0.01),
    Case("all_or_none", 4, 1, LEVEL, LEVEL / 5),
    Case("all_or_none", 0, 2, LEVEL**2, LEVEL / 2),
    Case("weighted_bonferroni", 0, 3, miss_all(0.025, 0.015, 0.01), LEVEL * 1.2, SHARES),
    Case("weighted_holm", 1, 2, miss_all(LEVEL * 0.6, LEVEL * 0.4), miss_all(0.015, 0.01), SHARES),
    Case("fixed_sequence", 2, 1, LEVEL, LEVEL / 3, IN_ORDER),
    Case("fixed_sequence", 0, 3, LEVEL, miss_all(LEVEL, LEVEL, LEVEL), IN_ORDER),
    Case("fallback", 1, 2, miss_all(0.04, 0.01), miss_all(0.015, 0.01), SHARES | IN_ORDER),
    Case("fallback", 2, 1, LEVEL, 0.025, SHARES | IN_ORDER),
    Case("lehmann_romano", 0, 6, float(binom.sf(1, 6, LEVEL / 3)), float(binom.sf(1, 6, LEVEL / 6)),
         {"false_rejections": 2}, two_of),
    Case("exceedance_step_down", 0, 6, miss_all(*[LEVEL / 6] * 6), miss_all(*[LEVEL / 3] * 6),
         {"false_share": 0.1, "dependence": "independence"}),
    # nine real effects: one false rejection is a tenth of ten, two are more; thresholds 2a / (m + 2 - i) for i = 10, 11
    Case("exceedance_step_down", 9, 6, two_steps(6, 2 * LEVEL / 7, 2 * LEVEL / 6), two_steps(6, LEVEL / 6, LEVEL / 5),
         {"false_share": 0.1, "dependence": "independence"}, two_of),
]  # fmt: skip


def studies_for(rate: float, wrong: float) -> int:
    """Give how many families see the slip in 99 of 100 seeds, when the right program fails in 1 of 10,000."""
    spread = norm.isf(FALSE_ALARM / 2) * np.sqrt(rate * (1 - rate)) + norm.isf(MISSED) * np.sqrt(wrong * (1 - wrong))
    return int((spread / (rate - wrong)) ** 2 * 1.2) + 500


def accepted(studies: int, rate: float) -> tuple[float, float]:
    lower, upper = binom.ppf([FALSE_ALARM / 2, 1 - FALSE_ALARM / 2], studies, rate)
    return float(lower), float(upper)


def check(errors: int, studies: int, rate: float, wrong: float) -> None:
    lower, upper = accepted(studies, rate)
    assert binom.cdf(upper, studies, wrong) - binom.cdf(lower - 1, studies, wrong) < MISSED
    assert lower <= errors <= upper


@pytest.mark.parametrize("case", CASES, ids=lambda case: f"{case.name}-{case.effects}-{case.nulls}")
def test_the_rate_is_the_exact_one(case: Case) -> None:
    studies = studies_for(case.rate, case.wrong)
    random = np.random.default_rng(20310601)
    errors = 0
    for _ in range(studies):
        p = np.concatenate([np.full(case.effects, REAL_EFFECT), random.random(case.nulls)])
        rejected = is_rejected(PROCEDURES[case.name](p, **case.given), LEVEL)
        errors += case.errs(rejected[case.effects :])
    check(errors, studies, case.rate, case.wrong)


@pytest.mark.parametrize(
    ("name", "given", "rate", "wrong"),
    [
        # under independence exactly (true nulls / m) a, over c for any dependence, and with weights their share of a
        ("benjamini_hochberg", {}, LEVEL * 6 / 10, LEVEL),
        ("benjamini_yekutieli", {}, LEVEL * 6 / 10 / float(np.sum(1 / np.arange(1, 11))), LEVEL * 6 / 10),
        ("weighted_benjamini_hochberg", {"weights": [2] * 4 + [1] * 6}, LEVEL * 6 / 14, LEVEL * 6 / 10),
    ],
)
def test_the_false_discovery_rate_is_the_exact_one(name: str, given: dict[str, Any], rate: float, wrong: float) -> None:
    shares = false_shares(name, given, effects=4, nulls=6, studies=30_000)
    error = shares.std() / np.sqrt(shares.size)
    assert abs(rate - wrong) > 6.3 * error  # 3.9 for the false alarms and 2.4 for the power
    assert abs(shares.mean() - rate) <= norm.isf(FALSE_ALARM / 2) * error


@pytest.mark.parametrize("nulls", [2, 8, 10])
@pytest.mark.parametrize(
    ("name", "given"), [("two_stage_adaptive", {}), ("storey_q", {"null_share": "from_half"})]
)  # fmt: skip
def test_an_adaptive_rate_is_kept(name: str, given: dict[str, Any], nulls: int) -> None:
    # kept under independence, exactly nowhere; a level that is not divided by 1 + a, or nulls counted without one more,
    # adds about a twentieth or more of it
    shares = false_shares(name, given, effects=10 - nulls, nulls=nulls, studies=20_000)
    assert shares.mean() <= LEVEL + norm.isf(FALSE_ALARM) * shares.std() / np.sqrt(shares.size)


def false_shares(name: str, given: dict[str, Any], *, effects: int, nulls: int, studies: int) -> NDArray[np.float64]:
    random = np.random.default_rng(20310602)
    shares = np.zeros(studies)
    for study in range(studies):
        p = np.concatenate([np.full(effects, REAL_EFFECT), random.random(nulls)])
        rejected = is_rejected(PROCEDURES[name](p, **given), LEVEL)
        shares[study] = rejected[effects:].sum() / max(rejected.sum(), 1)
    return shares


def test_k_false_rejections_in_the_worst_dependence() -> None:
    # With probability a, k of the m nulls, drawn by lot, have p below k a / m; all others are above it. So each p is
    # uniform, and k are rejected with probability a: no first threshold above k a / m would keep the promise. One of
    # a / m, as Holm's, would let both be rejected a quarter as often.
    random, m, k, studies = np.random.default_rng(20310603), 6, 2, 20_000
    bound, errors = k * LEVEL / m, 0
    for _ in range(studies):
        p = bound + (1 - bound) * random.random(m)
        if random.random() < LEVEL:
            p[random.choice(m, k, replace=False)] = bound * random.random(k)
        errors += two_of(is_rejected(PROCEDURES["lehmann_romano"](p, false_rejections=k), LEVEL))
    check(errors, studies, LEVEL, LEVEL / 4)


@pytest.mark.parametrize("local", ["simes", "bonferroni"])
@pytest.mark.parametrize("effects", [0, 3])
def test_a_bound_is_seldom_wrong(effects: int, local: Any) -> None:
    # some bound is wrong exactly when that of the true nulls is above 0: when all larger sets and they are rejected
    nulls, wrong = 4, LEVEL * 1.25
    rate = LEVEL if local == "simes" else miss_all(*[LEVEL / nulls] * nulls)
    random, studies, errors = np.random.default_rng(20310604), studies_for(rate, wrong), 0
    for _ in range(studies):
        p = np.concatenate([np.full(effects, REAL_EFFECT), random.random(nulls)])
        bounds = true_discoveries(p, level=LEVEL, local=local)
        errors += bounds.of(np.arange(effects, effects + nulls)) > 0
    check(errors, studies, rate, wrong)


def of_two(p: NDArray[np.float64]) -> Combined:
    return partial_conjunction(np.append(p, REAL_EFFECT), at_least=2, by="simes")


@pytest.mark.parametrize("combine", [fisher, stouffer, simes, cauchy, of_two])
def test_a_combined_p_is_uniform(combine: Callable[[NDArray[np.float64]], Combined]) -> None:
    random, studies = np.random.default_rng(20310605), studies_for(0.01, 0.014)
    found = np.array([combine(random.random(4)).p for _ in range(studies)])
    for level in (0.01, LEVEL, 0.5):
        check(int(np.count_nonzero(found <= level)), studies, level, level * 1.4)
