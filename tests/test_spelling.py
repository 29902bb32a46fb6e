import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from beforehand.spelling import (
    NO_BREAK,
    NOTHING,
    THIN,
    TOLERANCE,
    between,
    calculated,
    checksum,
    decimal,
    decimals_for,
    exact,
    integer,
    interval,
    multiplication,
    number,
    p_value,
    percent,
    ratio,
    read,
    scientific,
    short,
    with_unit,
)

P = st.floats(min_value=1e-12, max_value=1.0)
LEVELS = st.sampled_from([0.025, 0.05, 0.1, 0.0125, 1 / 3, 0.05 / 7, 0.1 / 600, 0.0086666666666])


def spaced(text: str) -> str:
    """Write ordinary spaces where the report has narrow or unbreakable ones."""
    return text.replace(THIN, " ").replace(NO_BREAK, " ")


@pytest.mark.parametrize(
    ("written", "expected"),
    [
        (integer(1234567), "1 234 567"),
        (integer(-5), "−5"),
        (decimal(-0.0004, 2), "0.00"),
        (decimal(-1234.5, 1), "−1 234.5"),
        (decimal(math.inf, 2), "∞"),
        (decimal(-math.inf, 2), "−∞"),
        (decimal(math.nan, 2), NOTHING),
        (scientific(0.0000421), "4.2 × 10⁻⁵"),
        (number(0.00012345, 3), "0.000123"),
        (number(123456789.0), "1.235 × 10⁸"),
        (short(0.0008), "0.0008"),
        (short(540.0), "540"),
        (short(0.0000186), "1.86 × 10⁻⁵"),
        (exact(0.025), "0.025"),
        (exact(0.025 / 3), "0.00833333"),
        (exact(0.00001), "1 × 10⁻⁵"),
        (p_value(0.0523), "0.052"),
        (p_value(0.0004), "0.00040"),
        (p_value(0.0000062), "6.2 × 10⁻⁶"),
        (p_value(1.0), "1"),
        (p_value(0.99999), "> 0.999"),
        (p_value(0.0), "< 10⁻³⁰⁰"),
        (p_value(math.nan), NOTHING),
        (interval(-8.61, 0.8, 1), "−8.6 to 0.8"),
        (interval(-math.inf, 0.8, 1), "−∞ to 0.8"),
        (interval(math.nan, math.nan, 1), NOTHING),
        (between("0.2", "∞"), "0.2 to ∞"),
        (percent(0.025), "2.5 %"),
        (percent(0.995833), "99.58 %"),
        (percent(0.00001), "0.001 %"),
        (with_unit("3.2", "kWh/day"), "3.2 kWh/day"),
        (with_unit(NOTHING, "kWh/day"), NOTHING),
        (checksum("0123456789abcdef"), "01234567 89abcdef"),
        (ratio(0.41), "0.410"),
        (ratio(1.0004, (1.0,)), "1.0004"),
    ],
)
def test_numbers_are_written_by_the_rules(written: str, expected: str) -> None:
    assert spaced(written) == expected


@pytest.mark.parametrize(
    ("p", "threshold", "expected"),
    [
        (0.0125, 0.0125, "0.0125"),  # 0.013 would look larger than its threshold, which it meets
        (0.02501, 0.025, "0.02501"),
        (0.0250001, 0.025, "0.0250001"),
        (0.0249999, 0.025, "0.025"),
        (0.05 / 7 * (1 + 1e-13), 0.05 / 7, "0.007"),  # met, by the tolerance of the decision
    ],
)
def test_p_values_stand_on_the_side_of_their_threshold(p: float, threshold: float, expected: str) -> None:
    assert p_value(p, threshold) == expected


@given(p=P, threshold=LEVELS)
def test_no_written_value_contradicts_its_threshold(p: float, threshold: float) -> None:
    met = p <= threshold * (1 + TOLERANCE)
    for text in (p_value(p, threshold), calculated(p, threshold)):
        if not text.startswith(">"):
            assert (read(text) <= read(exact(threshold)) * (1 + TOLERANCE)) == met


@given(value=st.floats(min_value=-1e9, max_value=1e9), digits=st.integers(min_value=2, max_value=12))
def test_what_is_written_reads_back(value: float, digits: int) -> None:
    assert read(number(value, digits)) == pytest.approx(value, rel=10.0 ** (1 - digits), abs=1e-300)


@given(p=P, m=st.integers(min_value=1, max_value=700), rank=st.integers(min_value=1, max_value=700))
def test_the_written_product_comes_out_of_the_written_factors(p: float, m: int, rank: int) -> None:
    written = multiplication(p, m / rank, rank=rank)
    above, _, below = written.factor.replace(THIN, "").partition("/")
    on_a_calculator = read(written.p) * float(above) / float(below or 1)
    assert calculated(on_a_calculator) == written.product


def test_a_factor_is_written_as_the_division_it_is() -> None:
    assert multiplication(0.012, 600 / 7, rank=7).factor == "600/7"
    assert multiplication(0.012, 3.0, rank=2).factor == "3"


@pytest.mark.parametrize(
    ("lower", "upper", "nulls", "expected"),
    [
        (-12.9, -3.5, (), 1),
        (0.17, 0.95, (), 2),
        (-0.04, 9.0, (0.0,), 2),  # one decimal would write the lower end as 0.0, on the null value
        (1.0, 1.0, (), 3),
        (-math.inf, 4.0, (), 1),
    ],
)
def test_decimals_follow_the_width_and_the_null(
    lower: float, upper: float, nulls: tuple[float, ...], expected: int
) -> None:
    assert decimals_for(lower, upper, 0.0, nulls) == expected


@given(
    ends=st.lists(st.floats(min_value=-1e4, max_value=1e4), min_size=2, max_size=2).map(sorted),
    null=st.sampled_from([0.0, 1.0, 2.0, -0.5]),
)
def test_a_written_end_stays_on_its_side_of_the_null(ends: list[float], null: float) -> None:
    lower, upper = ends
    decimals = decimals_for(lower, upper, 0.0, (null,))
    for end in ends:
        if abs(end - null) > 1e-9:
            assert (read(decimal(end, decimals)) > null) == (end > null)
