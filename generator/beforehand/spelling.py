"""How a number, a p-value, an interval or a checksum is written: the one place.

The rules are printed in every report. Full precision stays in the record.
"""

import math

MINUS = "\N{MINUS SIGN}"
THIN = "\N{THIN SPACE}"
SUPERSCRIPTS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
SMALLEST = 1e-300
NOTHING = "\N{EN DASH}"

P_RULE = (
    "p-values are written with three decimals from 0.001 on and with two significant digits below, with more digits "
    "where fewer would put them on the wrong side of their threshold, and as < 10⁻³⁰⁰ where they are too small to hold."
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
    return f"{mantissa} × 10{str(int(exponent)).translate(SUPERSCRIPTS)}".replace("-", MINUS)


def number(value: float, digits: int = 4) -> str:
    """Write a number with so many significant digits, in scientific form where it is very large or small."""
    if math.isnan(value) or math.isinf(value) or value == 0:
        return decimal(value, 0)
    size = math.floor(math.log10(abs(value)))
    if size < -4 or size >= 7:
        return scientific(value, digits)
    return decimal(value, max(0, digits - 1 - size))


def exact(value: float) -> str:
    """Write a level or a threshold with as many digits as it has: 0.025, 0.0083333."""
    if value == 0 or abs(value) >= 1e-4:
        return f"{value:.6g}".replace("-", MINUS)
    return scientific(value, 4).replace(".000 ×", " ×")


def _plain_p(p: float, digits: int) -> str:
    if p < 10**-digits or (p < 0.001 and digits <= 3):
        return scientific(p, max(2, digits - 1))
    return f"{p:.{digits}f}"


def p_value(p: float, threshold: float = math.nan) -> str:
    """Write a p-value by ``P_RULE``; with a threshold, never on the wrong side of it."""
    if math.isnan(p):
        return NOTHING
    if p < SMALLEST:
        return "< 10⁻³⁰⁰"
    if p > 0.9995:
        return "1" if p == 1 else "> 0.999"
    digits = 3
    while not math.isnan(threshold) and p != threshold and digits < 15 and _misleads(p, digits, threshold):
        digits += 1
    return _plain_p(p, digits)


def _misleads(p: float, digits: int, threshold: float) -> bool:
    shown = float(f"{p:.{max(2, digits - 1) - 1}e}") if p < 0.001 else round(p, digits)
    return (shown <= threshold) != (p <= threshold) or (p > threshold and shown == threshold)


def decimals_for(lower: float, upper: float, estimate: float = 0.0) -> int:
    """Give the decimals that show about three significant digits of an interval's width."""
    ends = [end for end in (lower, upper) if math.isfinite(end)]
    width = max(ends) - min(ends) if len(ends) == 2 else abs(2 * ((ends or [0.0])[0] - estimate))
    if not width or not math.isfinite(width):
        return 3
    return min(10, max(0, 2 - math.floor(math.log10(width))))


def interval(lower: float, upper: float, decimals: int) -> str:
    """Write an interval as "−3.2 to −1.1"."""
    if math.isnan(lower) and math.isnan(upper):
        return NOTHING
    return f"{decimal(lower, decimals)} to {decimal(upper, decimals)}"


def percent(share: float, digits: int = 3) -> str:
    """Write a share as a percentage with so many significant digits: 2.5 %, 97.5 %, 99.583 %."""
    text = f"{100 * share:.{digits}g}"
    if 0.99 < share < 1:  # what matters near 100 % is what is missing from it
        missing = 100 * (1 - share)
        text = f"{100 * share:.{max(0, 2 - math.floor(math.log10(missing)) - 1)}f}".rstrip("0").rstrip(".")
    return f"{text}{THIN}%"


def with_unit(text: str, unit: str) -> str:
    """Set a unit behind a number that is already written."""
    return f"{text} {unit}" if unit and text != NOTHING else text


def checksum(sha256: str, *, groups: int = 8) -> str:
    """Write a checksum in groups of eight digits, so that two can be compared by eye."""
    return " ".join(sha256[i : i + groups] for i in range(0, len(sha256), groups))
