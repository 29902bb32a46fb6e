"""How a promise's level is read: per side, as a confidence, and which p enters the procedure."""

from dataclasses import dataclass

from beforehand.terms import LevelIs


@dataclass(frozen=True)
class Reading:
    """The level that a family's promise gives, and whose level it is."""

    level: float
    level_is: LevelIs | None

    @property
    def per_side(self) -> float:
        """The level of each side: the whole of a one-sided level, half of a two-sided one."""
        return self.level if self.level_is == "one_sided" else self.level / 2

    def confidence(self, shared_by: int = 1) -> float:
        """Give the confidence of the two-sided interval whose ends are bounds at the level per side.

        ``shared_by`` is the number of hypotheses that share the level equally.
        """
        return 1 - 2 * self.per_side / shared_by

    def enters(self, p: float, *, one_sided: bool, on_claim_side: float | None) -> float:
        """Give the p-value that enters the procedure.

        A one-sided p is doubled before it meets a two-sided level; a two-sided test meets a one-sided level with the
        one-sided p of its claim, ``on_claim_side``.
        """
        if one_sided and self.level_is == "two_sided":
            return min(1.0, 2 * p)
        if not one_sided and self.level_is == "one_sided" and on_claim_side is not None:
            return on_claim_side
        return p
