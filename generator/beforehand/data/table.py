"""The rows of one data set: those analysed, and what became of the others."""

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from beforehand.spec.expressions import Column
from beforehand.spec.model import DataSet

Rows = NDArray[np.bool_]

NO_GROUP = "(no group)"
"""Stands among the groups of a count for the rows whose group is missing."""


@dataclass(frozen=True)
class Counts:
    """Rows in all, and in each group of the allocation (no groups where the spec declares no allocation)."""

    rows: int
    by_group: dict[str, int]


@dataclass(frozen=True)
class Grouping:
    """The group of each row; -1 where it is missing."""

    labels: tuple[str, ...]
    codes: NDArray[np.intp]

    def counts(self, rows: Rows) -> Counts:
        """Count the rows that are true."""
        chosen = self.codes[rows]
        by_group = {label: int((chosen == code).sum()) for code, label in enumerate(self.labels)}
        if self.labels and (self.codes == -1).any():
            by_group[NO_GROUP] = int((chosen == -1).sum())
        return Counts(int(rows.sum()), by_group)


@dataclass(frozen=True, kw_only=True)
class Excluded:
    """One exclusion rule and what it took away."""

    where: str
    because: str
    known_at: str
    uses: tuple[str, ...]
    """The columns in its condition."""
    counts: Counts
    undecided: tuple[int, ...]
    """Lines of the rows that were kept because the condition has no value for them."""


@dataclass(frozen=True, kw_only=True)
class Flow:
    """Rows received, excluded in the order of the rules, and analysed."""

    received: Counts
    exclusions: tuple[Excluded, ...]
    analysed: Counts


@dataclass(frozen=True, kw_only=True)
class AnalysisRows:
    """One analysis set: the analysed rows that belong to it."""

    id: str
    where: str
    principle: str
    rows: Rows
    counts: Counts
    undecided: tuple[int, ...]
    """Lines of the rows that do not belong because the condition has no value for them."""


@dataclass(frozen=True, kw_only=True)
class Table:
    """One data set after exclusions and derivations, sorted by what identifies its rows; nothing missing is dropped."""

    declared: DataSet
    columns: dict[str, Column]
    """Declared and derived columns."""
    lines: NDArray[np.intp]
    """The line of the file on which each row stands."""
    grouping: Grouping
    """The allocated group of each row; no labels where the spec declares no allocation."""
    flow: Flow
    sets: tuple[AnalysisRows, ...]

    @cached_property
    def frame(self) -> pd.DataFrame:
        """The typed columns: numbers as float64, texts, categories and dates as str, conditions as boolean."""
        return pd.DataFrame({name: _series(column) for name, column in self.columns.items()})

    @cached_property
    def units(self) -> NDArray[np.intp]:
        """A number for each row, the same in the rows of one independent unit."""
        names = list(self.declared.unit_columns)
        if not names:
            return np.arange(self.lines.size, dtype=np.intp)
        numbers = self.frame.groupby(names, sort=False, dropna=False).ngroup()
        return np.asarray(numbers, dtype=np.intp)

    def analysis_set(self, name: str) -> AnalysisRows:
        """Give one analysis set by its id."""
        return next(rows for rows in self.sets if rows.id == name)


def _series(column: Column) -> "pd.Series[Any]":
    if column.kind == "number":
        return pd.Series(np.where(column.missing, np.nan, column.values), dtype="float64")
    kind = "boolean" if column.kind == "truth" else "str"
    return pd.Series(column.values, dtype=kind).mask(column.missing)
