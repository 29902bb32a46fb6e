"""Counts of the rows analysed: analysis sets, how they overlap, and missing values."""

from collections.abc import Mapping
from dataclasses import dataclass
from itertools import combinations

import numpy as np
from numpy.typing import NDArray

from beforehand.data.evaluate import evaluated, is_true
from beforehand.data.table import AnalysisRows, Counts, Grouping, Rows, Table
from beforehand.spec.expressions import Column
from beforehand.spec.model import DataSet, Description, PerHypothesis


@dataclass(frozen=True, kw_only=True)
class Overlap:
    """How many rows two analysis sets share."""

    first: str
    second: str
    both: Counts
    only_first: Counts
    only_second: Counts


@dataclass(frozen=True, kw_only=True)
class Missing:
    """Missing values of one column among the rows analysed."""

    column: str
    counts: Counts


@dataclass(frozen=True)
class Chosen:
    """The rows that a hypothesis, or a description, is about."""

    rows: Rows
    undecided: int
    """How many rows of its analysis set its condition has no value for: they are left out."""


def analysis_rows(
    columns: Mapping[str, Column], lines: NDArray[np.intp], grouping: Grouping, declared: DataSet
) -> tuple[AnalysisRows, ...]:
    """Find the rows of each declared analysis set: those where its condition is true."""
    found = []
    for rule in declared.analysis_sets:
        condition = evaluated(rule.where, columns, lines, what=f"the analysis set '{rule.id}'", path=declared.file)
        rows = is_true(condition)
        found.append(
            AnalysisRows(
                id=rule.id,
                where=rule.where,
                principle=rule.principle or "",
                rows=rows,
                counts=grouping.counts(rows),
                undecided=in_order(lines[condition.missing]),
            )
        )
    return tuple(found)


def rows_of(table: Table, asked: PerHypothesis | Description, *, what: str) -> Chosen:
    """Find the rows that something is about: those of its analysis set in which its condition is true."""
    rows = np.ones(table.lines.size, dtype=bool)
    if asked.analysis_set:
        rows = table.analysis_set(asked.analysis_set).rows
    if not asked.where:
        return Chosen(rows, 0)
    told = f"the condition of {what}"
    condition = evaluated(asked.where, table.columns, table.lines, what=told, path=table.declared.file)
    return Chosen(rows & is_true(condition), int((rows & condition.missing).sum()))


def overlaps(table: Table) -> tuple[Overlap, ...]:
    """Count what each two analysis sets share, and what only one of them has."""
    count = table.grouping.counts
    return tuple(
        Overlap(
            first=one.id,
            second=other.id,
            both=count(one.rows & other.rows),
            only_first=count(one.rows & ~other.rows),
            only_second=count(other.rows & ~one.rows),
        )
        for one, other in combinations(table.sets, 2)
    )


def missing_values(table: Table, *, by_group: bool) -> tuple[Missing, ...]:
    """Count the missing values of every column among the rows analysed.

    ``by_group`` joins missing outcomes with the groups, which `check` never does: it asks without.
    """
    grouping = table.grouping if by_group else Grouping((), table.grouping.codes)
    return tuple(Missing(column=name, counts=grouping.counts(column.missing)) for name, column in table.columns.items())


def in_order(lines: NDArray[np.intp]) -> tuple[int, ...]:
    """Give lines in the order of the file."""
    return tuple(sorted(lines.tolist()))
