"""What is asked of a test: one null value, one side, one confidence; and what they mean, in one place."""

import math
from dataclasses import dataclass

from beforehand.spelling import TOLERANCE
from beforehand.terms import Alternative

# 1 - 0.95 leaves 0.050000000000000044: fifteen decimals give back the level that was typed.
LEVEL_DECIMALS = 15


@dataclass(frozen=True, kw_only=True)
class Asked:
    """The settings that every test has.

    ``above`` asks whether first - second (or first / second) lies above the null value, ``below`` whether it lies
    below; ``two_sided`` doubles the smaller of these two p-values.

    Raises
    ------
    ValueError
        When the side is not one of the three, the confidence not between 0 and 1, or the null value not a number.
    """

    null_value: float
    alternative: Alternative
    confidence: float

    def __post_init__(self) -> None:
        if self.alternative not in ("above", "below", "two_sided"):
            raise ValueError(f"an alternative is above, below or two_sided; found {self.alternative!r}")
        if not 0 < self.confidence < 1 or self.tail == 0:
            raise ValueError(f"a confidence lies between 0 and 1; found {self.confidence!r}")
        if not math.isfinite(self.null_value):
            raise ValueError(f"a null value is a finite number; found {self.null_value!r}")

    @property
    def tail(self) -> float:
        """The level of each side of the two-sided interval: half of 1 - confidence."""
        return round(1 - self.confidence, LEVEL_DECIMALS) / 2

    def keeps(self, p: float) -> bool:
        """Whether a one-sided p leaves its null value inside the interval: it is not rejected at ``tail``."""
        return p > self.tail * (1 + TOLERANCE)

    def p(self, *, above: float, below: float) -> float:
        """Give the p-value of the side asked for from those of both sides."""
        match self.alternative:
            case "above":
                p = above
            case "below":
                p = below
            case "two_sided":
                p = 2 * min(above, below)
        return min(1.0, p)

    def rejects(self, p: float) -> bool:
        """Whether this p, of the side asked for, is rejected at the level that belongs to the interval."""
        sides = 2 if self.alternative == "two_sided" else 1
        return not self.keeps(p / sides)
