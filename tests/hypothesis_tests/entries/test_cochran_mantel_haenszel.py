"""The Cochran-Mantel-Haenszel test against printed values, statsmodels and the counting of all divisions."""

import math
from itertools import combinations, product
from typing import Any

import numpy as np
import pytest
from scipy import stats
from statsmodels.stats.contingency_tables import StratifiedTable

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.cochran_mantel_haenszel import AT_LEAST, AT_MOST, cochran_mantel_haenszel
from beforehand.hypothesis_tests.entries.fisher_exact import fisher_exact
from beforehand.spelling import integer

Tables = list[list[list[int]]]


def rows(tables: Tables) -> dict[str, Any]:
    """Write tables [[events, others], [events, others]] as rows."""
    samples, strata = [], []
    for side in (0, 1):
        cells = [(s, table[side]) for s, table in enumerate(tables)]
        samples.append(np.concatenate([np.arange(sum(cell)) < cell[0] for _, cell in cells]))
        strata.append(np.concatenate([np.full(sum(cell), f"stratum {s}") for s, cell in cells]))
    return {"samples": tuple(samples), "strata": tuple(strata)}


def ask(tables: Tables, **settings: Any) -> Any:
    case = rows(tables)
    return cochran_mantel_haenszel(*case["samples"], strata=case["strata"], **settings)


def test_rabbits(reference: Any, outcome: Any) -> None:
    # the printed tables have [no delay cured, died] above [delay cured, died]: one stratum tells nothing
    rabbits = reference("cmh-rabbits")
    tables = rabbits.entry["data"]["strata"]
    turned = [[list(column) for column in zip(*table, strict=True)] for table in tables]
    for given in (tables, turned):  # an odds ratio is the same by rows and by columns
        exact = outcome(ask(given))
        assert rabbits.agrees("exact_p_two", exact.p)
        assert rabbits.agrees("exact_p_greater", outcome(ask(given, alternative="above")).p)
        # base R searches with a tolerance of 1.2e-4: estimate and upper end on the scale of their inverses
        lower, upper = rabbits.entry["expected"]["exact_ci95"]
        estimate = rabbits.entry["expected"]["exact_or_cmle"]
        assert (exact.lower, 1 / exact.estimate, 1 / exact.upper) == pytest.approx(
            (lower, 1 / estimate, 1 / upper), abs=1.2e-4
        )
        assert rabbits.agrees("p_cc", outcome(ask(given, method="score")).p)
        plain = outcome(ask(given, method="score", continuity=False))
        assert stats.chi2.isf(plain.p, 1) == pytest.approx(rabbits.entry["expected"]["X2"], rel=1e-9)
        weighed = outcome(ask(given, method="mantel_haenszel"))
        assert rabbits.agrees("mh_or", weighed.estimate)
        for place, end in enumerate((weighed.lower, weighed.upper)):
            assert rabbits.agrees("mh_or_ci95_rbg", end, place)
    assert exact.remarks[0].endswith("from 3 of 5 strata.")  # in the first all died, in the last none


THREE: Tables = [[[12, 30], [7, 41]], [[4, 9], [1, 16]], [[22, 18], [15, 25]]]


def test_statsmodels(outcome: Any) -> None:
    again = StratifiedTable([np.array(table) for table in THREE])
    weighed = outcome(ask(THREE, method="mantel_haenszel", confidence=0.9))
    assert weighed.estimate == pytest.approx(again.oddsratio_pooled, rel=1e-12)
    assert (weighed.lower, weighed.upper) == pytest.approx(again.oddsratio_pooled_confint(0.1), rel=1e-10)
    for continuity in (True, False):
        found = outcome(ask(THREE, method="score", continuity=continuity))
        assert found.p == pytest.approx(again.test_null_odds(correction=continuity).pvalue, rel=1e-10)
    equal = again.test_equal_odds(adjust=True)
    said = f"χ² {equal.statistic:.3g}, df 2, p {equal.pvalue:.3f}"
    assert all(said in outcome(ask(THREE, method=method)).remarks[-1] for method in ("exact", "mantel_haenszel"))


def test_scipys_noncentral_distributions_added_up(outcome: Any) -> None:
    found = outcome(ask(THREE, confidence=0.9))
    observed = sum(table[0][0] for table in THREE)

    def tails(ratio: float) -> tuple[float, float, float]:
        total = np.ones(1)
        for (a, b), (c, d) in THREE:
            total = np.convolve(total, stats.nchypergeom_fisher(a + b + c + d, a + c, a + b, ratio).pmf(np.arange(81)))
        return float(total[observed:].sum()), float(total[: observed + 1].sum()), float(total @ np.arange(total.size))

    assert tails(found.lower)[0] == pytest.approx(0.05, rel=1e-7)
    assert tails(found.upper)[1] == pytest.approx(0.05, rel=1e-7)
    assert tails(found.estimate)[2] == pytest.approx(observed, rel=1e-9)
    assert outcome(ask(THREE, null_value=1.7, alternative="above")).p == pytest.approx(tails(1.7)[0], rel=1e-8)


def test_one_stratum_is_fishers_test(outcome: Any) -> None:
    case = rows(THREE[:1])
    for null_value in (1.0, 2.5):
        for side in ("above", "below", "two_sided"):
            settings: Any = {"null_value": null_value, "alternative": side}
            ours, theirs = outcome(ask(THREE[:1], **settings)), outcome(fisher_exact(*case["samples"], **settings))
            for number in ("estimate", "lower", "upper", "p"):
                assert getattr(ours, number) == pytest.approx(getattr(theirs, number), rel=1e-10)


def test_counting_all_divisions(outcome: Any) -> None:
    # within strata every way to choose the units of the first group is equally likely when the groups do not matter
    tables: Tables = [[[2, 1], [1, 3]], [[1, 2], [1, 1]]]
    counts = []
    for table in tables:
        units = sum(table[0]) + sum(table[1])
        happened = np.arange(units) < table[0][0] + table[1][0]
        counts.append([int(happened[list(chosen)].sum()) for chosen in combinations(range(units), sum(table[0]))])
    sums = np.array([sum(one) for one in product(*counts)])
    observed = sum(table[0][0] for table in tables)
    above, below = (outcome(ask(tables, alternative=side)).p for side in ("above", "below"))
    assert (above, below) == pytest.approx((np.mean(sums >= observed), np.mean(sums <= observed)), rel=1e-12)
    # the score has the mean and the variance of these counts
    score = outcome(ask(tables, alternative="above", method="score", continuity=False))
    assert score.p == pytest.approx(stats.norm.sf((observed - sums.mean()) / sums.std()), rel=1e-10)


@pytest.mark.parametrize("method", ["exact", "score", "mantel_haenszel"])
def test_each_interval_inverts_its_own_test(method: Any, outcome: Any) -> None:
    found = outcome(ask(THREE, method=method, confidence=0.9))
    for end, side in ((found.lower, "above"), (found.upper, "below")):
        at_end = outcome(ask(THREE, method=method, null_value=end, alternative=side))
        assert at_end.p == pytest.approx(0.05, rel=1e-8)


def test_ends(outcome: Any) -> None:
    none: Tables = [[[0, 5], [3, 4]], [[0, 2], [1, 6]]]
    every: Tables = [[table[1], table[0]] for table in none]
    for method in ("exact", "score"):
        low, high = outcome(ask(none, method=method)), outcome(ask(every, method=method))
        assert (low.estimate, low.lower, low.remarks[1:]) == (0, 0, (AT_LEAST,))
        assert (high.estimate, high.upper, high.remarks[1:]) == (math.inf, math.inf, (AT_MOST,))
        assert high.lower == pytest.approx(1 / low.upper, rel=1e-9)
    assert ask(none, method="mantel_haenszel") == NotComputed(
        "the estimate of Mantel and Haenszel is 0 or infinite, and has no error. Use method: exact", (7, 14)
    )


def test_strata_keep_what_they_explain(outcome: Any) -> None:
    # the same odds in both groups of each stratum, but the groups lie in different strata: no effect within them
    confounded: Tables = [[[30, 10], [6, 2]], [[2, 6], [10, 30]]]
    assert outcome(ask(confounded)).estimate == pytest.approx(1, rel=1e-12)
    first, second = rows(confounded)["samples"]
    assert outcome(fisher_exact(first, second)).p < 0.01


def test_many_units_take_the_score(outcome: Any) -> None:
    many: Tables = [[[300, 500], [250, 550]], [[100, 300], [90, 310]]]
    found = outcome(ask(many))
    assert found.remarks[0] == (
        f"Normal score, with continuity correction (the rule for more than {integer(2000)} units; here "
        f"{integer(2400)}), from 2 of 2 strata."
    )
    exact = outcome(ask(many, method="exact"))
    assert found.p == pytest.approx(exact.p, rel=0.01)
    assert (found.lower, found.upper) == pytest.approx((exact.lower, exact.upper), rel=0.001)


@pytest.mark.parametrize("alternative", ["above", "below", "two_sided"])
@pytest.mark.parametrize("method", ["exact", "score"])
def test_smallest_p_is_attained(alternative: Any, method: Any, outcome: Any) -> None:
    margins = ((3, 4, 3), (2, 3, 2))  # units of each group and events
    settings: dict[str, Any] = {"null_value": 1.4, "alternative": alternative, "method": method}
    choices = [range(max(0, m - n2), min(n1, m) + 1) for n1, n2, m in margins]
    found = []
    for events in product(*choices):
        cells = [[[a, n1 - a], [m - a, n2 - m + a]] for a, (n1, n2, m) in zip(events, margins, strict=True)]
        found.append(outcome(ask(cells, **settings)).p)
    case = rows([[[0, 3], [3, 1]], [[0, 2], [2, 1]]])
    pooled = np.array([False] * 4 + [True] * 3 + [False] * 3 + [True] * 2)
    smallest = cochran_mantel_haenszel.smallest_p((5, 7), pooled, strata=case["strata"], **settings)
    assert smallest == pytest.approx(min(found), rel=1e-12)
    # with any number of events in each stratum
    found = []
    for events in product(range(4), range(5), range(3), range(4)):
        cells = [[[events[2 * s], n1 - events[2 * s]], [events[2 * s + 1], n2 - events[2 * s + 1]]]
                 for s, (n1, n2, _) in enumerate(margins)]  # fmt: skip
        result = ask(cells, **settings)
        found.append(1.0 if isinstance(result, NotComputed) else result.p)
    smallest = cochran_mantel_haenszel.smallest_p((5, 7), None, strata=case["strata"], **settings)
    assert smallest == pytest.approx(min(found), rel=1e-12)


@pytest.mark.parametrize(
    ("tables", "method", "reason"),
    [
        ([[[0, 0], [1, 2]]], "by_size", "at least 1 unit of the first group is needed; there are 0 units"),
        (
            [[[0, 4], [0, 3]], [[2, 0], [5, 0]], [[1, 2], [0, 0]]],
            "by_size",
            "no stratum tells anything: in each one a group is missing, or no unit or every unit has the event",
        ),
        (
            [[[2000, 4000], [2000, 4000]]],
            "exact",
            f"the exact distribution is counted for up to {integer(10_000)} units; there are {integer(12_000)}. "
            "Use method: score",
        ),
    ],
)
def test_no_result(tables: Tables, method: Any, reason: str) -> None:
    sizes = (sum(sum(table[0]) for table in tables), sum(sum(table[1]) for table in tables))
    assert ask(tables, method=method) == NotComputed(reason, sizes)


def test_refused_calls() -> None:
    with pytest.raises(ValueError, match="an odds ratio under the null hypothesis is above 0; found 0"):
        ask(THREE, null_value=0)
    with pytest.raises(ValueError, match="method is by_size, exact, score or mantel_haenszel; found 'chi_square'"):
        ask(THREE, method="chi_square")
