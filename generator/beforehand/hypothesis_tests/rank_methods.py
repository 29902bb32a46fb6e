"""When a rank test counts exactly and when it uses the normal distribution; and what it says about it."""

from dataclasses import dataclass
from typing import Literal

from beforehand.spelling import integer

Method = Literal["by_size", "exact", "normal"]


@dataclass(frozen=True)
class SizeRule:
    """Up to which size the exact distribution is used: a rule about sizes only, never about whether values are tied."""

    noun: str
    by_size: int
    """With ``by_size``: exact up to here, normal beyond."""
    at_most: int
    """With ``exact``: refused beyond, because counting would take minutes."""

    def exact(self, size: int, method: Method) -> bool:
        """Whether the exact distribution is used."""
        if method not in ("by_size", "exact", "normal"):
            raise ValueError(f"a method is by_size, exact or normal; found {method!r}")
        return method == "exact" or (method == "by_size" and size <= self.by_size)

    def refuses(self, size: int, method: Method) -> str | None:
        """Say that the exact distribution was asked for and is out of reach, or None."""
        if method != "exact" or size <= self.at_most:
            return None
        return (
            f"the exact distribution is counted for up to {integer(self.at_most)} {self.noun}; there are "
            f"{integer(size)}. Use method: normal"
        )

    def remark(self, size: int, method: Method, *, continuity: bool) -> str:
        """Say which distribution p is taken from, and by which rule."""
        rule = "as the spec asks"
        if method == "by_size":
            rule = f"the rule for up to {integer(self.by_size)} {self.noun}; here {integer(size)}"
        if self.exact(size, method):
            return f"Exact distribution, ties included ({rule})."
        if method == "by_size":
            rule = f"the rule for more than {integer(self.by_size)} {self.noun}; here {integer(size)}"
        correction = "with" if continuity else "without"
        return f"Normal approximation, variance corrected for ties, {correction} continuity correction ({rule})."
