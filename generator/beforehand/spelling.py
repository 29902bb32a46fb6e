"""How a number, a p-value, an interval or a checksum is written: the one place.

The rules are printed in every report. Full precision stays in the record.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass

MINUS = "\N{MINUS SIGN}"
THIN = "\N{NARROW NO-BREAK SPACE}"  # a number is never broken at the end of a line
NO_BREAK = "\N{NO-BREAK SPACE}"
SUPERSCRIPTS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
SMALLEST = 1e-300
NOTHING = "\N{EN DASH}"

# The tolerance with which a value meets its threshold: what is written must agree with what was decided.
TOLERANCE = 1e-12
MOST_DIGITS = 17

P_RULE = (
    "p-values are written with three decimals from 0.001 on and with two significant digits below, with more digits "
    "where fewer would put them on the wrong side of their threshold, and as < 10⁻³⁰⁰ where they are too small to hold."
)
INTERVAL_RULE = (
    "Estimates and the ends of their intervals are written with the decimals that show two to three significant digits "
    "of the interval's width (ratios: three significant digits of each number), with more where fewer would move an "
    "end across the value of the null hypothesis."
)


def integer(value: int) -> str:
    """Write a count, thousands set apart by a thin space: 12 345."""
    return f"{value:,}".replace(",", THIN).replace("-", MINUS)


def decimal(value: float, decimals: int) -> str:
    """Write a number with fixed decimals, a real minus sign and thin spaces; never "-0.00"."""
    if math.isnan(value):
        return NOTHING
    if math.isinf(value):
        return "∞" if value > 0 else f"{MINUS}∞"
    text = f"{value:,.{decimals}f}"
    if text.startswith("-") and not text.strip("-0.,"):
        text = text[1:]
    return text.replace(",", THIN).replace("-", MINUS)


def scientific(value: float, digits: int = 2) -> str:
    """Write a number as 4.2 × 10⁻⁵ with so many significant digits."""
    mantissa, exponent = f"{value:.{digits - 1}e}".split("e")
    power = str(int(exponent)).translate(SUPERSCRIPTS)
    return f"{mantissa}{NO_BREAK}×{NO_BREAK}10{power}".replace("-", MINUS)


def _size(value: float) -> int:
    """Give the power of ten of the first significant digit."""
    return math.floor(math.log10(abs(value)))


def number(value: float, digits: int = 4) -> str:
    """Write a number with so many significant digits, in scientific form where it is very large or small."""
    if not math.isfinite(value) or value == 0:
        return decimal(value, 0)
    size = _size(value)
    if size < -4 or size >= 7:
        return scientific(value, digits)
    return decimal(value, max(0, digits - 1 - size))


def short(value: float, digits: int = 4) -> str:
    """Write a number with at most so many significant digits and no zeros at its end: 0.0008, 85.71, 1.86 × 10⁻⁵."""
    text = number(value, digits)
    mantissa, times, power = text.partition(f"{NO_BREAK}×")
    if "." in mantissa:
        mantissa = mantissa.rstrip("0").rstrip(".")
    return mantissa + times + power


def exact(value: float) -> str:
    """Write a level or a threshold with as many digits as it has, six at most: 0.025, 0.00833333."""
    return short(value, 6)


def _met(value: float, threshold: float) -> bool:
    return value <= threshold * (1 + TOLERANCE)


def on_its_side(value: float, threshold: float, *, digits: int, write: Callable[[float, int], str]) -> str:
    """Write a value with at least so many digits: enough to stand on the side of the written threshold it stands on."""
    shown_threshold = read(exact(threshold)) if not math.isnan(threshold) else math.nan
    for more in range(digits, MOST_DIGITS):
        text = write(value, more)
        if math.isnan(threshold) or _met(read(text), shown_threshold) == _met(value, threshold):
            return text
    return repr(value)


def read(text: str) -> float:
    """Read back a number that this module has written."""
    mantissa, _, power = text.replace(MINUS, "-").replace(THIN, "").partition(f"{NO_BREAK}×{NO_BREAK}10")
    exponent = power.translate(str.maketrans("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "-0123456789")) or "0"
    return float(f"{mantissa}e{exponent}")


def _plain_p(p: float, digits: int) -> str:
    significant = max(2, digits - 1)
    if p < 0.0001:
        return scientific(p, significant)
    return decimal(p, digits if p >= 0.001 else significant - 1 - _size(p))


def p_value(p: float, threshold: float = math.nan) -> str:
    """Write a p-value by ``P_RULE``; with a threshold, never on the wrong side of it."""
    if math.isnan(p):
        return NOTHING
    if p < SMALLEST:
        return f"<{NO_BREAK}10⁻³⁰⁰"
    if p > 0.9995:
        return "1" if p == 1 else f">{NO_BREAK}0.999"
    return on_its_side(p, threshold, digits=3, write=_plain_p)


@dataclass(frozen=True)
class Multiplication:
    """A factor, a p-value and their product as a pocket calculator shows them."""

    p: str
    factor: str
    product: str


def multiplication(p: float, factor: float, *, rank: int, threshold: float = math.nan) -> Multiplication:
    """Write p × factor = product with so many digits of p that the written product comes out of the written factors.

    A factor that is a whole number divided by the rank is written as that division: 600/7.
    """
    product = calculated(p * factor, threshold)
    whole = round(factor * rank)
    above, below = factor, 1
    if math.isclose(factor * rank, whole, rel_tol=TOLERANCE) and factor != round(factor):
        above, below = float(whole), rank
    written = integer(round(above)) if above == round(above) else short(above, 10)
    for digits in range(4, MOST_DIGITS):
        shown = short(p, digits)
        if calculated(read(shown) * read(written) / below, threshold) == product:
            break
    return Multiplication(shown, f"{written}/{integer(below)}" if below > 1 else written, product)


def calculated(value: float, threshold: float = math.nan) -> str:
    """Write a step of a calculation with four significant digits, never on the wrong side of its threshold."""
    return on_its_side(value, threshold, digits=4, write=short)


def decimals_for(lower: float, upper: float, estimate: float = 0.0, nulls: tuple[float, ...] = ()) -> int:
    """Give the decimals that show two to three significant digits of an interval's width.

    More are given where fewer would move an end onto or across one of the values of the null hypothesis.
    """
    ends = [end for end in (lower, upper) if math.isfinite(end)]
    width = max(ends) - min(ends) if len(ends) == 2 else abs(2 * ((ends or [0.0])[0] - estimate))
    decimals = min(10, max(0, 1 - _size(width / 3))) if width and math.isfinite(width) else 3
    while decimals < 10 and any(_crosses(end, null, decimals) for end in ends for null in nulls):
        decimals += 1
    return decimals


def _crosses(end: float, null: float, decimals: int) -> bool:
    return _moved(end, round(end, decimals), null)


def _moved(value: float, shown: float, null: float) -> bool:
    return (shown > null) - (shown < null) != (value > null) - (value < null)


def ratio(value: float, nulls: tuple[float, ...] = ()) -> str:
    """Write a ratio with three significant digits, with more where they would move it across a null value."""
    for digits in range(3, MOST_DIGITS):
        text = number(value, digits)
        if not math.isfinite(value) or not any(_moved(value, read(text), null) for null in nulls):
            return text
    return repr(value)


def interval(lower: float, upper: float, decimals: int) -> str:
    """Write an interval as "−3.2 to −1.1"."""
    return between(decimal(lower, decimals), decimal(upper, decimals))


def between(lower: str, upper: str) -> str:
    """Join two written ends as "−3.2 to −1.1", kept on one line."""
    if lower == upper == NOTHING:
        return NOTHING
    return f"{lower}{NO_BREAK}to{NO_BREAK}{upper}"


def percent(share: float, digits: int = 3) -> str:
    """Write a share as a percentage with so many significant digits: 2.5 %, 97.5 %, 99.58 %."""
    text = short(100 * share, digits)
    if 0.99 < share < 1:  # what matters near 100 % is what is missing from it
        missing = 100 * (1 - share)
        text = f"{100 * share:.{max(0, 2 - math.floor(math.log10(missing)) - 1)}f}".rstrip("0").rstrip(".")
    return f"{text}{THIN}%"


def with_unit(text: str, unit: str) -> str:
    """Set a unit behind a number that is already written."""
    return f"{text}{NO_BREAK}{unit}" if unit and text != NOTHING else text


def checksum(sha256: str, *, groups: int = 8) -> str:
    """Write a checksum in groups of eight digits, so that two can be compared by eye."""
    return " ".join(sha256[i : i + groups] for i in range(0, len(sha256), groups))
