"""Two computations of one number: how far apart they are, and how far apart they may be."""

import math
from dataclasses import dataclass, field

from beforehand.errors import Disagreement, TwoComputationsDisagree
from beforehand.record.model import AgreementRecord

P_FLOOR = 1e-300
AT_THE_THRESHOLD = 1e-9
"""Nearer to its threshold than this, relatively, a value is held to the ordinary bound only."""
SHARE_OF_DISTANCE = 1 / 100
"""Further away, the two values may differ by no more than this share of the distance to the threshold."""


@dataclass(frozen=True)
class Comparison:
    """One number computed twice."""

    about: str
    quantity: str
    first: float
    second: float
    bound: float
    difference: float

    @property
    def agrees(self) -> bool:
        """Whether the two are as near as they have to be."""
        return self.difference <= self.bound


def relative_difference(x: float, y: float, *, floor: float) -> float:
    """Give |x - y| / max(|x|, |y|, floor); 0 when both are none, infinite when one is."""
    if x == y or (math.isnan(x) and math.isnan(y)):
        return 0.0
    if not (math.isfinite(x) and math.isfinite(y)):
        return math.inf
    return abs(x - y) / max(abs(x), abs(y), floor)


def bound_near(threshold: float, value: float, *, bound: float) -> float:
    """Tighten a bound where the distance from the threshold asks for it."""
    distance = relative_difference(value, threshold, floor=P_FLOOR)
    return min(bound, distance * SHARE_OF_DISTANCE) if distance > AT_THE_THRESHOLD else bound


@dataclass
class Agreement:
    """All numbers that a run computed twice."""

    compared: list[Comparison] = field(default_factory=list)
    different: list[Disagreement] = field(default_factory=list)
    """What had to be the same and is not."""

    def numbers(
        self, about: str, quantity: str, first: float, second: float, *, bound: float, floor: float = P_FLOOR
    ) -> None:
        """Compare two numbers; where neither computation has one there is nothing to compare."""
        if math.isnan(first) and math.isnan(second):
            return
        difference = relative_difference(first, second, floor=floor)
        self.compared.append(Comparison(about, quantity, first, second, bound, difference))

    def same(self, about: str, quantity: str, first: object, second: object) -> bool:
        """Compare what has to be the same: a count, a decision, whether there is a result."""
        if first != second:
            self.different.append(Disagreement(about, quantity, str(first), str(second), 0.0))
        return first == second

    def settle(self) -> tuple[AgreementRecord, ...]:
        """Give the largest disagreement of each quantity; raises when any is over its bound."""
        over = [
            Disagreement(c.about, c.quantity, repr(c.first), repr(c.second), c.bound)
            for c in self.compared
            if not c.agrees
        ]
        if over or self.different:
            raise TwoComputationsDisagree((*self.different, *over))
        quantities = dict.fromkeys(c.quantity for c in self.compared)
        return tuple(self._record(quantity) for quantity in quantities)

    def _record(self, quantity: str) -> AgreementRecord:
        those = [c for c in self.compared if c.quantity == quantity]
        worst = max(those, key=lambda c: c.difference)
        return AgreementRecord(
            quantity=quantity,
            compared=len(those),
            largest=worst.difference,
            bound=worst.bound,
            about=worst.about if worst.difference else "",
        )
