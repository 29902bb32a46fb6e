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
    """Adjusted p within the family, or the unadjusted p where the scheme itself adjusts; a member without result has
    entered with p = 1."""
    has_result: Truths
    against_claim: Truths
    """Whether the estimate lies on the other side than the claim needs; False where the claim has no side."""
    level: float
    """The level of the promise that covers the family."""
    members: tuple[str, ...] = ()
    """The ids of its members, for schemes that name them."""

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
class Falls:
    """How the members of one family fall in the walk of a graph; all arrays have shape (m,)."""

    step: NDArray[np.int64]
    """The step of the walk, from 1, over all families; 0 where no share of the level ever reaches the member."""
    factor: Vector
    """1 / the share that it holds at its step; NaN where it has none."""
    product: Vector
    """factor x p; 1 where it has no step."""
    from_step: NDArray[np.int64]
    """The step whose product became the adjusted p; 0 where it has none."""
    waits_for: tuple[tuple[str, ...], ...]
    """For a member that holds no share at the level: the nodes that would have to pass theirs on."""


@dataclass(frozen=True, kw_only=True)
class FamilyDecision:
    """What a scheme decided in one family; all arrays have shape (m,). NaN and "" stand for "none"."""

    id: str
    closed_by: str
    """The family whose gate stayed closed, or several of a graph with commas; "" where the family was tested."""
    local_level: float
    """The level at which the family's own procedure was run; 0 behind a closed gate of a scheme that passes levels on,
    NaN where each member has its own."""
    p_family: Vector
    """NaN where the family was not tested, or where its members have no adjusted p of the family's own."""
    p_study: Vector
    """Smallest study level at which the whole scheme rejects; kept where the family was not tested."""
    threshold: Vector
    """The level, where something was compared with it."""
    decides: tuple[Decides | Literal[""], ...]
    """Which of the two was compared with the threshold; "" where nothing was."""
    states: tuple[State, ...]
    falls: Falls | None = None
    """How the members fall, where a graph of hypotheses adjusts them."""

    @property
    def tested(self) -> bool:
        """Whether the family was tested."""
        return not self.closed_by


def decide(
    family: FamilyResult,
    *,
    decides: Decides,
    p_study: Vector,
    local_level: float,
    closed_by: str = "",
    reached: Truths | None = None,
) -> FamilyDecision:
    """Compare one family with its level, unless a gate before it stayed closed.

    Parameters
    ----------
    family : FamilyResult
        The family as its procedure left it.
    decides : {"p_study", "p_family"}
        Which adjusted p is compared with the level.
    p_study : ndarray, shape (m,)
        Smallest study level at which the whole scheme rejects each member; NaN where there is no study level.
    local_level : float
        The level at which the family's own procedure was run.
    closed_by : str
        The family whose gate stayed closed; "" where the family is tested.
    reached : ndarray of bool, shape (m,), optional
        Whether each member is tested; all of them, or none behind a closed gate, where it isn't given.

    Returns
    -------
    FamilyDecision
        Members without a result are never compared, and are no_result whether or not they are tested.
    """
    tested = np.full(family.p_family.shape, not closed_by) if reached is None else reached
    compared = family.has_result & tested
    rejected = is_rejected(p_study if decides == "p_study" else family.p_family, family.level)
    return FamilyDecision(
        id=family.id,
        closed_by=closed_by,
        local_level=local_level,
        p_family=np.full_like(family.p_family, np.nan) if closed_by else family.p_family,
        p_study=p_study,
        threshold=np.where(compared, family.level, np.nan),
        decides=tuple(decides if yes else "" for yes in compared),
        states=tuple(
            _state(family, member, tested=bool(tested[member]), rejected=yes) for member, yes in enumerate(rejected)
        ),
    )


def _state(family: FamilyResult, member: int, *, tested: bool, rejected: bool) -> State:
    if not family.has_result[member]:
        return "no_result"
    if not tested:
        return "not_tested"
    if not rejected:
        return "not_rejected"
    return "rejected_against_claim" if family.against_claim[member] else "rejected"


Families = Sequence[FamilyResult]
Decisions = tuple[FamilyDecision, ...]
Plain = dict[str, Any]
"""One family for a replay: ``id``, ``members``, ``level``, ``p`` as it enters, ``may_open``, and ``judge``, which gives
``{"adjusted": [...], "rejected": [...]}`` of the family's own procedure at a level."""
Again = dict[str, Any]
"""One family as a replay decides it: ``closed_by``, ``local_level``, and for each member ``p_family``, ``p_study``,
``tested`` and ``rejected``; None stands for "none"."""


def one_level(families: Families) -> float:
    """Give the level that all families share.

    Raises
    ------
    ValueError
        When they don't share one.
    """
    levels = {family.level for family in families}
    if len(levels) > 1:
        raise ValueError("families under one promise share its level; found several levels")
    return levels.pop() if levels else 0.0


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

    def __call__(self, families: Families, **given: Any) -> Decisions:
        """Decide every family.

        Parameters
        ----------
        families : sequence of FamilyResult
            The families that the scheme covers, in the order of the promise.
        **given
            What the plan says of the scheme: shares, truncations, a graph.

        Returns
        -------
        tuple of FamilyDecision
            One for each, in the same order.
        """
        return self.across(families, **given)

    def replay(self, families: list[Plain], **given: Any) -> list[Again]:
        """Decide again on plain values, another way round.

        The text of this function in the entry's file is also what recheck.py is made of.
        """
        again: list[Again] = SCHEMES.module(self.name).replay(families, **given)
        return again


def scheme(
    *, title: str, keeps: str, decides: Decides, replays: str, reference: str
) -> Callable[[Callable[..., Decisions]], Scheme]:
    """Enter a function on families in the catalogue of schemes with what it declares."""

    def enter(across: Callable[..., Decisions]) -> Scheme:
        return Scheme(title=title, keeps=keeps, decides=decides, replays=replays, reference=reference, across=across)

    return enter


SCHEMES: Catalogue[Scheme] = Catalogue("beforehand.multiplicity.across", kind="scheme across families")
"""Schemes: what the families of a study share, and which family is tested when."""
