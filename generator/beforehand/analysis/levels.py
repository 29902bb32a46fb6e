"""How a promise's level is read: per side, as a confidence, and which p enters the procedure."""

from dataclasses import dataclass

from beforehand.terms import ClaimDirection, EnteredAs, LevelIs


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

    def how_p_enters(self, *, one_sided: bool, direction: ClaimDirection | None) -> EnteredAs:
        """Say how the p of a test enters the procedure.

        A one-sided p is doubled before it meets a level that both sides share; a two-sided test meets a level of one
        side with the p of the side that its claim is about.
        """
        if one_sided and self.level_is == "two_sided":
            return "doubled"
        if not one_sided and self.level_is == "one_sided" and direction in ("above", "below"):
            return "claim side"
        return "as it is"
