"""What a spec is once it is read: the document, the families with all their members, and where everything stands."""

import hashlib
from dataclasses import dataclass, field
from pathlib import Path

from beforehand.errors import Fault
from beforehand.spec.model import (
    Answer,
    AtLeast,
    DataSet,
    Document,
    HypothesesFrom,
    Hypothesis,
    Promise,
    Setting,
    Study,
    StudyPromise,
)
from beforehand.spec.places import Path as Place
from beforehand.spec.places import Places
from beforehand.terms import SupportiveKind


@dataclass(frozen=True)
class PlannedFamily:
    """One family with all its members; without them where they come from the data."""

    id: str
    question: str
    purpose: str | None
    procedure: str
    procedure_options: dict[str, Setting]
    promise: Promise
    """The promise that applies: the family's own, or the study's."""
    success: str | AtLeast
    members: tuple[Hypothesis, ...]
    planned: int
    """How many hypotheses the spec plans (m as planned)."""
    from_data: HypothesesFrom | None = None
    """The short form, where one row of the data makes one hypothesis."""
    stands_apart: bool = False
    """Whether the family has its own promise, so that the study's does not cover it."""
    sure_share: float | None = 1.0
    """The share of the promise's level at which the family is tested if it is; None where that depends on others."""


@dataclass(frozen=True)
class PlannedSupportive:
    """One supportive analysis: the hypothesis whose question it asks, and what is computed instead."""

    id: str
    """The written id, or `id/member` where it is of a whole family."""
    asked: str
    """The id that is written in the spec."""
    of: str
    """The hypothesis whose question it is."""
    analysis: SupportiveKind
    because: str
    hypothesis: Hypothesis
    """What is computed: the hypothesis under this id, with the change made and every default filled in."""


@dataclass(frozen=True)
class Spec:
    """A spec: read, sound, and expanded as far as it can be without the data."""

    path: Path
    source: bytes = field(repr=False)
    """The bytes of the file."""
    document: Document
    families: tuple[PlannedFamily, ...]
    plan: bytes = field(repr=False)
    """What is sealed, in the form of RFC 8785."""
    particulars: bytes = field(repr=False)
    """What is printed and never a departure, in the same form."""
    places: Places = field(repr=False)
    supportive: tuple[PlannedSupportive, ...] = ()
    """Analyses that support a hypothesis and decide nothing, in the order of the spec."""

    @property
    def folder(self) -> Path:
        """The folder that the paths of data files are relative to."""
        return self.path.parent

    @property
    def study(self) -> Study:
        """What the study is."""
        return self.document.study

    @property
    def data(self) -> tuple[DataSet, ...]:
        """The data sets."""
        return self.document.data

    @property
    def promise(self) -> StudyPromise:
        """The promise of the study."""
        return self.document.promise

    @property
    def answers(self) -> tuple[Answer, ...]:
        """The author's answers to warnings."""
        return self.document.answers

    @property
    def hypotheses(self) -> tuple[Hypothesis, ...]:
        """All members of all families, in the order of the spec."""
        return tuple(member for family in self.families for member in family.members)

    @property
    def plan_checksum(self) -> str:
        """The SHA-256 of the plan."""
        return hashlib.sha256(self.plan).hexdigest()

    def data_set(self, id: str) -> DataSet:
        """Give a data set by its id."""
        return next(data_set for data_set in self.data if data_set.id == id)

    def family(self, id: str) -> PlannedFamily:
        """Give a family by its id."""
        return next(family for family in self.families if family.id == id)

    def place_of(self, id: str) -> Place:
        """Give the place where something with an id is written; of a made hypothesis, that of its short form."""
        for number, data_set in enumerate(self.data):
            if data_set.id == id:
                return "data", number
        for number, family in enumerate(self.document.families):
            if id == family.id:
                return "families", number
            if id.startswith(f"{family.id}/"):
                return "families", number, "comparisons" if family.comparisons else "hypotheses_from"
            for entry, hypothesis in enumerate(family.hypotheses or ()):
                if hypothesis.id == id:
                    return "families", number, "hypotheses", entry
        for number, supportive in enumerate(self.document.supportive):
            if id == supportive.id or id.startswith(f"{supportive.id}/"):
                return "supportive", number
        return ()

    def fault(self, path: Place, text: str) -> Fault:
        """Make a fault at a place of the file: ``("data", 0, "columns", "energy")``."""
        return self.places.fault(path, text)
