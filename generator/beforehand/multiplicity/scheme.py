"""What a scheme across families takes, gives and declares, and the decorator that enters it in the catalogue."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from beforehand.catalogue import Catalogue
from beforehand.multiplicity.contract import Vector
from beforehand.multiplicity.decision import is_rejected
from beforehand.terms import State

Truths = NDArray[np.bool_]
Decides = Literal["p_study", "p_family"]


@dataclass(frozen=True, kw_only=True)
class FamilyResult:
    """One family as its procedure left it; all arrays have shape (m,), in the order of its members.

    Raises
    ------
    ValueError
        When the arrays differ in length, or an adjusted p-value is missing or outside 0 to 1.
    """

    id: str
    p_family: Vector
    """Adjusted p within the family; a member without result has entered the procedure with p = 1."""
    has_result: Truths
    against_claim: Truths
    """Whether the estimate lies on the other side than the claim needs; False where the claim has no side."""
    level: float
    """The level of the promise that covers the family."""

    def __post_init__(self) -> None:
        if not self.p_family.shape == self.has_result.shape == self.against_claim.shape:
            raise ValueError(f"family '{self.id}': p_family, has_result and against_claim differ in length")
        if not np.all((self.p_family >= 0) & (self.p_family <= 1)):
            raise ValueError(f"family '{self.id}': an adjusted p is not a number between 0 and 1")

    @property
    def may_open(self) -> Truths:
        """Whether each member could help to open a gate: with a result, and not against its claim."""
        return self.has_result & ~self.against_claim

    @property
    def opens_at(self) -> float:
        """The smallest level at which every member is rejected for its claim; 1 where that can't be."""
        values = np.where(self.may_open, self.p_family, 1.0)
        return float(values.max()) if values.size else 1.0


@dataclass(frozen=True, kw_only=True)
class FamilyDecision:
    """What a scheme decided in one family; all arrays have shape (m,). NaN and "" stand for "none"."""

    id: str
    closed_by: str
    """The family whose gate stayed closed; "" where the family was tested."""
    p_family: Vector
    """NaN where the family was not tested."""
    p_study: Vector
    """Smallest study level at which the whole scheme rejects; kept where the family was not tested."""
    threshold: Vector
    """The level, where something was compared with it."""
    decides: tuple[Decides | Literal[""], ...]
    """Which of the two was compared with the threshold; "" where nothing was."""
    states: tuple[State, ...]

    @property
    def tested(self) -> bool:
        """Whether the family was tested."""
        return not self.closed_by


def decide(family: FamilyResult, *, decides: Decides, p_study: Vector, closed_by: str = "") -> FamilyDecision:
    """Compare one family with its level, unless a gate before it stayed closed.

    Parameters
    ----------
    family : FamilyResult
        The family as its procedure left it.
    decides : {"p_study", "p_family"}
        Which adjusted p is compared with the level.
    p_study : ndarray, shape (m,)
        Smallest study level at which the whole scheme rejects each member; NaN where there is no study level.
    closed_by : str
        The family whose gate stayed closed; "" where the family is tested.

    Returns
    -------
    FamilyDecision
        Members without a result are never compared, and are no_result whether or not the family is tested.
    """
    value = p_study if decides == "p_study" else family.p_family
    compared = family.has_result & (not closed_by)
    rejected = is_rejected(value, family.level)
    return FamilyDecision(
        id=family.id,
        closed_by=closed_by,
        p_family=np.full_like(family.p_family, np.nan) if closed_by else family.p_family,
        p_study=p_study,
        threshold=np.where(compared, family.level, np.nan),
        decides=tuple(decides if yes else "" for yes in compared),
        states=tuple(
            _state(family, member, closed=bool(closed_by), rejected=yes) for member, yes in enumerate(rejected)
        ),
    )


def _state(family: FamilyResult, member: int, *, closed: bool, rejected: bool) -> State:
    if not family.has_result[member]:
        return "no_result"
    if closed:
        return "not_tested"
    if not rejected:
        return "not_rejected"
    return "rejected_against_claim" if family.against_claim[member] else "rejected"


Families = Sequence[FamilyResult]
Decisions = tuple[FamilyDecision, ...]


@dataclass(frozen=True, kw_only=True)
class Scheme:
    """One entry of the catalogue: what it declares, and the computation.

    Calling the entry decides all families in their order: ``serial([energy, secondary])``.
    """

    title: str
    keeps: str
    """What is kept, in one sentence for the report."""
    decides: Decides
    """Which adjusted p is compared with the level."""
    replays: str
    """``WHOLE``, or the ingredient that the replay takes as recorded."""
    reference: str
    across: Callable[..., Decisions] = field(repr=False)

    @property
    def name(self) -> str:
        """The word that a spec uses."""
        return self.across.__name__

    def __call__(self, families: Families, **options: Any) -> Decisions:
        """Decide every family.

        Parameters
        ----------
        families : sequence of FamilyResult
            The families that the scheme covers, in the order of the promise.

        Returns
        -------
        tuple of FamilyDecision
            One for each, in the same order.
        """
        return self.across(families, **options)

    def replay(
        self, ids: list[str], p_family: list[list[float]], may_open: list[list[bool]], rejected: list[list[bool]]
    ) -> list[dict[str, Any]]:
        """Decide again on plain lists: for each family ``{"closed_by": ..., "p_study": [...]}``.

        ``rejected`` are the decisions of each family's own procedure at its level. The text of this function in the
        entry's file is also what recheck.py is made of.
        """
        again: list[dict[str, Any]] = SCHEMES.module(self.name).replay(ids, p_family, may_open, rejected)
        return again


def scheme(
    *, title: str, keeps: str, decides: Decides, replays: str, reference: str
) -> Callable[[Callable[..., Decisions]], Scheme]:
    """Enter a function on families in the catalogue of schemes with what it declares."""

    def enter(across: Callable[..., Decisions]) -> Scheme:
        return Scheme(title=title, keeps=keeps, decides=decides, replays=replays, reference=reference, across=across)

    return enter


SCHEMES: Catalogue[Scheme] = Catalogue("beforehand.multiplicity.across", kind="scheme across families")
