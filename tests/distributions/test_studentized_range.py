"""The studentized range against tables, mpmath, Student's t, scipy and Gauss and Legendre's rule."""

import math
from typing import Any

import numpy as np
import pytest
from scipy import special, stats

from beforehand.distributions.studentized_range import range_quantile, range_tail

HALVES, HALF_WEIGHTS = np.polynomial.legendre.leggauss(200)


def test_printed_tables(table: Any) -> None:
    known = table("table-studentized-range")
    for level, name in ((0.05, "q05"), (0.01, "q01")):
        for k, df, expected, printed in zip(
            known["params"]["k"], known["params"]["df"], known["expected"][name], known["published"][name], strict=True
        ):
            found = range_quantile(level, groups=k, df=df)
            assert found == pytest.approx(expected, rel=1e-7)  # as far as its engines agree
            assert printed is None or abs(found - float(printed)) <= 0.005
    for k, expected in enumerate(known["expected"]["q05_df_inf_k2to5"], start=2):
        assert range_quantile(0.05, groups=k, df=math.inf) == pytest.approx(expected, rel=1e-7)
    for df, expected in enumerate(known["expected"]["q95_k2_df2to11"], start=2):
        assert range_quantile(0.05, groups=2, df=df) == pytest.approx(expected, rel=1e-9)
    lower = 1 - range_tail(np.arange(11), groups=2, df=5)
    np.testing.assert_allclose(lower, known["expected"]["ptukey_0to10_k2_df5"], rtol=1e-9)


def test_mpmath(computed_elsewhere: list[dict[str, float]]) -> None:
    # lower tails are given as doubles: 1 minus them is known to 1.1e-16 absolute
    for row in computed_elsewhere:
        found = range_tail(row["q"], groups=int(row["groups"]), df=row["df"])[0]
        assert found == pytest.approx(1 - row["lower_tail"], rel=1e-12, abs=3e-16)


@pytest.mark.parametrize("df", [1, 2, 3.7, 10, 50, 450, 20_000, 1e6])
def test_two_groups_are_student_t(df: float) -> None:
    # |t| of one pair is Q / √2, exactly; scipy's t is good to about 1e-13 in these tails
    p = 10.0 ** -np.arange(0.05, 280, 5)
    t = -special.stdtrit(df, p / 2)
    t = t[(t > 0) & (t < 1e150)]  # further out scipy has no quantile
    expected = 2 * special.stdtr(df, -t)
    there = expected > 1e-285
    assert there.sum() >= 10
    found = range_tail(math.sqrt(2) * t[there], groups=2, df=df)
    np.testing.assert_allclose(found, expected[there], rtol=2e-12)


def test_scipy_where_it_is_good() -> None:
    # absolute error of scipy's cdf about 1e-11 (its own tests); it has nothing to say below 1e-12
    for k, df in ((3, 10), (12, 40), (50, 450)):
        q = np.linspace(1, 7, 5)
        np.testing.assert_allclose(
            range_tail(q, groups=k, df=df), stats.studentized_range.sf(q, k, df), rtol=1e-8, atol=2e-10
        )


def range_by_legendre(k: int) -> Any:
    """P(range > w) of k normal values over the smallest of them, 200 nodes between -10 and w / 2 + 10."""

    def tail(w: np.ndarray) -> np.ndarray:
        top = w[:, None] / 2 + 10
        z = -top + (HALVES + 1) / 2 * (top + 10)  # the smallest value
        above = special.ndtr(-z)
        within = 1 - np.minimum(special.ndtr(-z - w[:, None]) / above, 1)
        with np.errstate(divide="ignore"):
            some_beyond = -np.expm1((k - 1) * np.log(within))
        density = k * np.exp(-z * z / 2) / math.sqrt(2 * math.pi) * above ** (k - 1)
        return ((top + 10) / 2 * HALF_WEIGHTS * density * some_beyond).sum(axis=1)

    return tail


@pytest.mark.parametrize(("k", "df", "q"), [(3, 4, 2.5), (3, 12, 9.0), (8, 3, 6.0), (20, 60, 5.3), (50, 900, 4.0)])
def test_by_another_rule(k: int, df: float, q: float, studentized: Any) -> None:
    expected = studentized(range_by_legendre(k), q, df)
    assert range_tail(q, groups=k, df=df)[0] == pytest.approx(expected, rel=1e-10)


@pytest.mark.parametrize("k", [2, 7, 100, 1_000])
@pytest.mark.parametrize("df", [1, 8.5, 300, 1e7, math.inf])
def test_quantiles_are_where_the_tail_is(k: int, df: float) -> None:
    for tail in (0.5, 0.05, 0.01, 1e-6, 1e-30):
        q = range_quantile(tail, groups=k, df=df)
        assert range_tail(q, groups=k, df=df)[0] == pytest.approx(tail, rel=1e-10)


@pytest.mark.parametrize("df", [1, 6, 240, 1e5, math.inf])
def test_falls_with_q_and_grows_with_the_groups(df: float) -> None:
    q = np.linspace(0, 30, 200)
    tails = np.array([range_tail(q, groups=k, df=df) for k in (2, 3, 9, 40)])
    assert np.all((tails >= 0) & (tails <= 1))
    assert np.all(np.diff(tails, axis=1) <= 1e-14)
    assert np.all(np.diff(tails, axis=0) >= -1e-14)
    assert np.all(tails[:, 0] == 1)


def test_each_quantile_by_itself_gives_the_same_bits() -> None:
    q = np.random.default_rng(21).uniform(0, 12, 300)
    together = range_tail(q, groups=9, df=33)
    assert [range_tail(one, groups=9, df=33)[0] for one in q] == together.tolist()


def test_ends() -> None:
    assert range_tail([-2.0, 0.0, 1e6, math.inf], groups=4, df=20).tolist()[:2] == [1, 1]
    assert range_tail(math.inf, groups=4, df=20)[0] == 0


@pytest.mark.parametrize(
    ("q", "groups", "df", "complaint"),
    [(2.0, 1, 9, "at least 2 groups"), (2.0, 3, 0, "above 0"), (math.nan, 3, 9, "quantiles are numbers")],
)
def test_what_makes_no_sense_is_refused(q: float, groups: int, df: float, complaint: str) -> None:
    with pytest.raises(ValueError, match=complaint):
        range_tail(q, groups=groups, df=df)


@pytest.mark.parametrize("tail", [0, 0.6, -1, math.nan])
def test_no_such_tail(tail: float) -> None:
    with pytest.raises(ValueError, match="a tail lies between"):
        range_quantile(tail, groups=3, df=9)
