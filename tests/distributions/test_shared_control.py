"""The largest of t statistics with a shared control against tables, Student's t, the range, scipy and another rule."""

import math
from typing import Any

import numpy as np
import pytest
from scipy import special, stats

from beforehand.distributions.shared_control import shared_control_quantile, shared_control_tail
from beforehand.distributions.studentized_range import range_tail

EQUAL = math.sqrt(0.5)  # groups as large as the control
NODES, WEIGHTS = np.polynomial.legendre.leggauss(400)


@pytest.mark.parametrize(("name", "sides"), [("dunnett-two-sided", 2), ("dunnett-one-sided", 1)])
def test_printed_tables(name: str, sides: Any, table: Any) -> None:
    known = table(name)
    for m, printed in zip(known["inputs"]["k"], known["expected"]["critical_value"], strict=True):
        found = shared_control_quantile(0.05, loadings=[EQUAL] * m, df=math.inf, sides=sides)
        assert found == pytest.approx(printed, abs=known["tolerance"]["abs"])


@pytest.mark.parametrize("df", [1, 2, 3.7, 50, 20_000, 1e6])
@pytest.mark.parametrize("sides", [1, 2])
@pytest.mark.parametrize("b", [0.05, 0.7, 0.999, -0.7])
def test_one_statistic_is_student_t(df: float, sides: Any, b: float) -> None:
    # scipy's t is good to about 1e-13 in these tails
    p = 10.0 ** -np.arange(0.5, 280, 11)
    t = -special.stdtrit(df, p / sides)
    t = t[(t > 0) & (t < 1e150)]  # further out scipy has no quantile
    expected = sides * special.stdtr(df, -t)
    there = expected > 1e-285
    found = shared_control_tail(t[there], loadings=[b], df=df, sides=sides)
    np.testing.assert_allclose(found, expected[there], rtol=2e-12)


@pytest.mark.parametrize("df", [2, 30, 1e4, math.inf])
def test_one_statistic_on_the_other_side(df: float) -> None:
    t = -np.geomspace(0.001, 1e6, 30)
    expected = special.ndtr(-t) if math.isinf(df) else special.stdtr(df, -t)
    found = shared_control_tail([*t, 0.0], loadings=[0.6], df=df, sides=1)
    np.testing.assert_allclose(found, [*expected, 0.5], rtol=1e-13)


@pytest.mark.parametrize("df", [4, 25, math.inf])
def test_two_statistics_about_one_control_are_part_of_a_range(df: float) -> None:
    # with two equal groups and a control the largest |T| belongs to two of the three pairs of a range
    c = np.array([1.5, 3.0, 6.0])
    three_pairs = range_tail(math.sqrt(2) * c, groups=3, df=df)
    two = shared_control_tail(c, loadings=[EQUAL, EQUAL], df=df, sides=2)
    one = range_tail(math.sqrt(2) * c, groups=2, df=df)
    assert np.all((one < two) & (two < three_pairs))
    # P(A or B or C) <= P(A or B) + P(C)
    assert np.all(three_pairs < two + one)


@pytest.mark.parametrize("sides", [1, 2])
def test_scipy_multivariate_t(sides: Any) -> None:
    # scipy integrates by quasi-Monte Carlo: asked for 1e-6 absolute, given a seed
    b = np.sqrt([8 / 20, 15 / 27, 5 / 17, 12 / 24])
    correlation = np.outer(b, b)
    np.fill_diagonal(correlation, 1)
    for c, df in ((1.2, 9), (2.4, 36)):
        low = np.full(4, -c) if sides == 2 else None
        inside = stats.multivariate_t(np.zeros(4), correlation, df, seed=7).cdf(
            np.full(4, c), lower_limit=low, maxpts=400_000
        )
        found = shared_control_tail(c, loadings=b, df=df, sides=sides)[0]
        assert found == pytest.approx(1 - inside, abs=2e-5)


def largest_by_legendre(b: np.ndarray, sides: int) -> Any:
    """P(max > w) of normal values with product correlation, 400 nodes between -11 and w + 11 or the mirror of it."""

    def tail(w: np.ndarray) -> np.ndarray:
        low, high = -11.0 - w.clip(0) * (sides == 2 or b.min() < 0), 11.0 + w.clip(0) * (sides == 2 or b.max() > 0)
        half = (high - low)[:, None] / 2
        z = (high + low)[:, None] / 2 + half * NODES
        none = np.ones_like(z)
        some = np.zeros_like(z)
        for one in b:
            rest = math.sqrt(1 - one**2)
            above = special.ndtr((one * z - w[:, None]) / rest)
            if sides == 2:
                above += special.ndtr((-one * z - w[:, None]) / rest)
            some += none * above  # this one above, and none before it
            none *= 1 - above
        return (half * WEIGHTS * np.exp(-z * z / 2) * some).sum(axis=1) / math.sqrt(2 * math.pi)

    return tail


@pytest.mark.parametrize("sides", [1, 2])
@pytest.mark.parametrize(
    ("b", "df", "t"),
    [
        ([EQUAL] * 3, 12, 2.8), ([0.3, 0.6, 0.9], 7, 5.0), ([0.6, -0.7], 40, 2.0), ([-0.5, -0.4], 20, 3.0),
        ([0.8] * 12, 300, 4.5),
    ],
)  # fmt: skip
def test_by_another_rule(b: list[float], df: float, t: float, sides: Any, studentized: Any) -> None:
    expected = studentized(largest_by_legendre(np.array(b), sides), t, df)
    assert shared_control_tail(t, loadings=b, df=df, sides=sides)[0] == pytest.approx(expected, rel=1e-10)


@pytest.mark.parametrize("sides", [1, 2])
@pytest.mark.parametrize("b", [[0.7], [0.2, 0.5, 0.9], [0.5, -0.5], [math.sqrt(900 / 910)] * 3, [EQUAL] * 400])
def test_quantiles_are_where_the_tail_is(b: list[float], sides: Any) -> None:
    for df in (2.5, 40, math.inf):
        for tail in (0.4, 0.025, 1e-9):
            t = shared_control_quantile(tail, loadings=b, df=df, sides=sides)
            assert shared_control_tail(t, loadings=b, df=df, sides=sides)[0] == pytest.approx(tail, rel=1e-10)


def test_a_turned_statistic_is_another_question() -> None:
    # two statistics that lean together are less often large than two that lean apart
    for c in (1.0, 2.0, 3.0):
        together = shared_control_tail(c, loadings=[0.7, 0.7], df=30, sides=1)[0]
        apart = shared_control_tail(c, loadings=[0.7, -0.7], df=30, sides=1)[0]
        assert together < apart
        # on both sides at once the sign means nothing
        both = [shared_control_tail(c, loadings=b, df=30, sides=2)[0] for b in ([0.7, 0.7], [0.7, -0.7])]
        assert both[0] == both[1]


@pytest.mark.parametrize("sides", [1, 2])
def test_falls_with_t_and_grows_with_the_statistics(sides: Any) -> None:
    t = np.linspace(-5 if sides == 1 else 0, 30, 200)
    tails = np.array([shared_control_tail(t, loadings=[0.6] * m, df=11, sides=sides) for m in (1, 2, 9, 40)])
    assert np.all((tails >= 0) & (tails <= 1))
    assert np.all(np.diff(tails, axis=1) <= 1e-14)
    assert np.all(np.diff(tails, axis=0) >= -1e-14)


def test_each_quantile_by_itself_gives_the_same_bits() -> None:
    t = np.random.default_rng(22).uniform(-3, 9, 200)
    asked = {"loadings": [0.5, 0.6, 0.6], "df": 33, "sides": 1}
    together = shared_control_tail(t, **asked)
    assert [shared_control_tail(one, **asked)[0] for one in t] == together.tolist()


@pytest.mark.parametrize(
    ("loadings", "sides", "complaint"),
    [([], 2, "at least one"), ([0.0], 2, "not 0"), ([1.0], 2, "between -1 and 1"), ([0.5], 3, "sides are 1 or 2")],
)
def test_what_makes_no_sense_is_refused(loadings: list[float], sides: Any, complaint: str) -> None:
    with pytest.raises(ValueError, match=complaint):
        shared_control_tail(2.0, loadings=loadings, df=9, sides=sides)


@pytest.mark.parametrize("tail", [0, 0.5, -1, math.nan])
def test_no_such_tail(tail: float) -> None:
    with pytest.raises(ValueError, match="a tail lies between"):
        shared_control_quantile(tail, loadings=[0.5], df=9, sides=2)
