"""One hypothesis with its words, its family and its numbers; and which of many come first."""

import math
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

from beforehand.record.model import FamilyRecord, HypothesisRecord, Record
from beforehand.terms import AcrossFamilies, Intent, State

# How many hypotheses of one family the sections show in full; all of them stand in the appendix.
IN_FULL = 20

_FIRST: tuple[State, ...] = (
    "rejected_against_claim",
    "rejected",
    "continue",
    "not_rejected",
    "not_tested",
    "no_result",
    "described",
)


@dataclass(frozen=True)
class Line:
    """A hypothesis, its family, and its row of the table of record."""

    hypothesis: HypothesisRecord
    family: FamilyRecord
    intent: Intent
    values: dict[str, Any]
    scheme: AcrossFamilies = "separate"
    """How its family shares a level with others: separate, where it stands apart."""

    @property
    def id(self) -> str:
        """The hypothesis by its id."""
        return self.hypothesis.id

    @property
    def label(self) -> str:
        """The short name, or the id where there is none."""
        return self.hypothesis.label or self.hypothesis.id

    @property
    def state(self) -> State:
        """The decision."""
        state: State = self.values["state"]
        return state

    def number(self, column: str) -> float:
        """Give a number of the row; NaN where there is none."""
        return float(self.values[column])

    def count(self, column: str) -> int:
        """Give a count of the row."""
        return int(self.values[column])

    @property
    def threshold(self) -> float:
        """What the value that decides had to meet."""
        return self.number("threshold")

    @property
    def deciding(self) -> float:
        """The value that was compared with the threshold: an adjusted p, or p where there is none."""
        return self.number(self.values["decides"] or "p")


def lines_of(record: Record) -> tuple[Line, ...]:
    """Give every hypothesis with its family and numbers, in the order of the spec."""
    return _lines(record, record.hypotheses)


def supporting_lines(record: Record) -> tuple[Line, ...]:
    """Give every supportive analysis with the family of its hypothesis and its own numbers, in the same order."""
    return _lines(record, (one.hypothesis for one in record.supportive))


def _lines(record: Record, words: Iterable[HypothesisRecord]) -> tuple[Line, ...]:
    families = {family.id: family for family in record.families}
    places = {name: at for at, name in enumerate(record.results.id)}
    return tuple(
        Line(
            one,
            families[one.family],
            record.study.intent,
            record.results.row(places[one.id]),
            record.scheme if families[one.family].under_study_promise else "separate",
        )
        for one in words
    )


def foremost(lines: Iterable[Line], most: int) -> tuple[Line, ...]:
    """Give so many lines: all in their order where they fit, else rejections first, then the nearest misses."""
    lines = tuple(lines)
    return lines if len(lines) <= most else tuple(sorted(lines, key=_prominence)[:most])


def _prominence(line: Line) -> tuple[int, float]:
    nearest = line.deciding if not math.isnan(line.deciding) else line.number("p")
    return _FIRST.index(line.state), math.inf if math.isnan(nearest) else nearest
