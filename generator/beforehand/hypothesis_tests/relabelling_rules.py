"""What both routes of a relabelling test share: when relabellings are listed or drawn, what counts as tied, remarks."""

import math
from dataclasses import dataclass

from beforehand import spelling
from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.location import Interval
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.ties import rounding
from beforehand.resampling.streams import Stream

LISTED = 100_000
FEWEST, MOST = 999, 1_000_000


@dataclass(frozen=True, kw_only=True)
class Chance:
    """How many relabellings are drawn, where they can't all be listed, and what the draws follow from.

    The rule looks at sizes and at the number of draws only, never at values.
    """

    name: str
    draws: int
    seed: int

    def lists(self, relabellings: int) -> bool:
        """Whether all relabellings are listed: 100 000 of them always, and more where more draws are asked for."""
        return relabellings <= max(LISTED, self.draws)

    def refuses(self) -> str | None:
        """Say that these draws can't be made, or None."""
        if not FEWEST <= self.draws <= MOST:
            bounds = f"{spelling.integer(FEWEST)} and {spelling.integer(MOST)}"
            return f"the number of draws lies between {bounds}; the option says {spelling.integer(self.draws)}"
        return f"a seed is a whole number from 0 on; the option says {self.seed}" if self.seed < 0 else None

    @property
    def stream(self) -> Stream:
        """The draws."""
        return Stream(seed=self.seed, name=self.name)

    def smallest(self, relabellings: int, as_extreme: int) -> float:
        """Give the smallest one-sided p when at least so many relabellings are as extreme as any can be."""
        return as_extreme / relabellings if self.lists(relabellings) else 1 / (self.draws + 1)

    def remarks(self, relabellings: int, p: float, interval: Interval, asked: Asked) -> tuple[str, ...]:
        """Say whether relabellings were listed or drawn, how sure p is, and which ends the interval lacks."""
        listed = self.lists(relabellings)
        few = "relabellings" if listed else "draws"
        ends = {"lower": interval.lower, "upper": interval.upper}
        lacking = " and no ".join(word for word, end in ends.items() if not math.isfinite(end))
        confidence = spelling.percent(asked.confidence)
        open_end = f"So few {few} allow no {lacking} end of an interval with a confidence of {confidence}."
        return (self._listed(relabellings) if listed else self._drawn(p, asked), *([open_end] if lacking else []))

    def _listed(self, relabellings: int) -> str:
        most = spelling.integer(max(LISTED, self.draws))
        return f"All {spelling.integer(relabellings)} relabellings are counted (the rule for up to {most})."

    def _drawn(self, p: float, asked: Asked) -> str:
        sides = 2 if asked.alternative == "two_sided" else 1
        share = p / sides
        error = sides * math.sqrt(share * (1 - share) / self.draws)
        return (
            f"{spelling.integer(self.draws)} relabellings are drawn with the seed {self.seed} and counted with the "
            f"observed one (the rule for more than {spelling.integer(max(LISTED, self.draws))}); by the draws alone p "
            f"has a standard error of {spelling.short(error, 2)}."
        )


def slack(*samples: Values) -> float:
    """Bound how far apart two equal sums of the values may be through rounding, in their unit.

    Each value may be off by two units of its rounding, and stands in one of the two sums at most.
    """
    return math.fsum(error for sample in samples for error in rounding(sample).tolist())


def slack_of_null(moved: int, null_value: float) -> float:
    """Bound the same for the null value, which is taken off so many values."""
    return moved * float(rounding(null_value))
