"""The one place that drops missing values: from a table and a hypothesis to the clean arrays of its test."""

from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from beforehand.data.beside import beside, missing_beside, refuse_out_of_range, without
from beforehand.data.dataset import Dataset
from beforehand.data.sets import in_order, rows_of
from beforehand.data.table import Table
from beforehand.data.wording import capped, line_list, quoted
from beforehand.errors import DataFault, Fault
from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
from beforehand.spec.expressions import Column
from beforehand.spec.model import EventOutcome, Hypothesis, PairOutcome

Positions = NDArray[np.intp]


@dataclass(frozen=True, kw_only=True)
class Samples:
    """What a test gets, and how it came about."""

    arrays: tuple[NDArray[Any], ...]
    """As the test takes them: the values; first, second (groups, or pairs in the order of their key); for a contrast
    every other group of the column too; or p, estimate, lower, upper of one row, NaN where one is not supplied. Events
    are booleans."""
    n: tuple[int, ...]
    """Units in each group, first group first; for pairs, the number of pairs; () where the numbers are supplied."""
    rows_considered: int
    """Rows of the analysis set, the condition and the groups, before any is dropped."""
    missing: tuple[int, ...]
    """Rows dropped for a missing value, in each group; for pairs, the pairs dropped."""
    undecided: int
    """Rows not considered because the condition of the hypothesis has no value for them."""
    beside: dict[str, Any] = field(default_factory=dict)
    """What the test takes beside the outcome, by its word, in the shape of the arrays."""


@dataclass(frozen=True, kw_only=True)
class Unlabelled:
    """What may be known of a hypothesis before its outcomes meet its groups: no value of an outcome."""

    sizes: tuple[int, ...]
    """Units with an outcome in each group; for pairs, the number of complete pairs."""
    beside: dict[str, Any] = field(default_factory=dict)
    """What the test takes beside the outcome, group by group: nothing of it is an outcome."""


@dataclass(frozen=True)
class _Sides:
    """The rows of a hypothesis before any is dropped: of one sample, or of first and second (and the others)."""

    positions: tuple[Positions, ...]
    columns: tuple[Column, ...]
    """The column of the outcome on each side."""
    paired: bool
    """Whether the sides stand in the same order, a pair at each place."""
    undecided: int
    without: tuple[NDArray[np.bool_], ...]
    """The rows of each side that lack what the test takes beside the outcome."""

    @property
    def missing(self) -> tuple[NDArray[np.bool_], ...]:
        sides = zip(self.columns, self.positions, self.without, strict=True)
        gone = [column.missing[rows] | without for column, rows, without in sides]
        return (gone[0] | gone[1],) * 2 if self.paired else tuple(gone)

    @property
    def rows(self) -> tuple[Positions, ...]:
        """The complete rows of each side."""
        return tuple(rows[~gone] for rows, gone in zip(self.positions, self.missing, strict=True))

    @property
    def complete(self) -> tuple[NDArray[Any], ...]:
        return tuple(column.values[rows] for column, rows in zip(self.columns, self.rows, strict=True))


def take(dataset: Dataset, hypothesis: Hypothesis) -> Samples:
    """Give a hypothesis its samples.

    Raises DataFault where pairs don't match, where units repeat under a test that takes them as independent, and
    where a value is missing although the hypothesis allows none.
    """
    table = dataset.tables[hypothesis.data]
    if STATISTICAL_TESTS[hypothesis.test].design == "supplied":
        return _supplied(dataset, table, hypothesis)
    sides = _sides(table, hypothesis)
    if hypothesis.missing_values.method == "fail":
        _refuse_missing(table, sides, hypothesis)
    groups = slice(1) if sides.paired else slice(None)
    arrays = sides.complete
    return Samples(
        arrays=arrays,
        n=tuple(array.size for array in arrays[groups]),
        rows_considered=np.unique(np.concatenate(sides.positions)).size,
        missing=tuple(int(gone.sum()) for gone in sides.missing[groups]),
        undecided=sides.undecided,
        beside=beside(table, hypothesis, sides.rows),
    )


def unlabelled(dataset: Dataset, hypothesis: Hypothesis) -> Unlabelled:
    """Give what `check` may know of a hypothesis; raises the faults of ``take`` that need no outcome.

    Of the outcomes it joins with the groups only whether they are missing, never a value: even pooled over the two
    groups of a pair, values would tell the groups of a third apart.
    """
    test, table = STATISTICAL_TESTS[hypothesis.test], dataset.tables[hypothesis.data]
    if test.design == "supplied":
        return Unlabelled(sizes=())
    sides = _sides(table, hypothesis)
    if sides.paired:
        return Unlabelled(sizes=(sides.rows[0].size,))
    taken = beside(table, hypothesis, sides.rows)
    taken.pop("time", None)  # it belongs to the outcome
    return Unlabelled(sizes=tuple(rows.size for rows in sides.rows), beside=taken)


def _sides(table: Table, hypothesis: Hypothesis) -> _Sides:
    """Find the rows of each side, pairs by their key, and check what the test needs of them."""
    chosen = rows_of(table, hypothesis, what=f"hypothesis '{hypothesis.id}'")
    rows, undecided = chosen.rows, chosen.undecided
    outcome, groups, paired = hypothesis.observed, hypothesis.groups, False
    if isinstance(outcome, PairOutcome):
        positions: tuple[Positions, ...] = (np.flatnonzero(rows),) * 2
        columns: tuple[Column, ...] = (table.columns[outcome.first], table.columns[outcome.second])
        paired = True
    elif groups is None:
        positions, columns = (np.flatnonzero(rows),), (_outcome(table, outcome),)
    else:
        group = table.columns[groups.column]
        labels = (groups.first, groups.second, *_other_groups(table, hypothesis))
        positions = tuple(np.flatnonzero(rows & (group.values == label) & ~group.missing) for label in labels)
        paired = hypothesis.matched_by is not None
        if paired:
            positions = _matched(table, positions[0], positions[1], hypothesis)
        columns = (_outcome(table, outcome),) * len(positions)
    for side in positions:
        refuse_out_of_range(table, hypothesis, side)
    lacking = tuple(without(table, hypothesis, side) for side in positions)
    sides = _Sides(positions, columns, paired=paired, undecided=undecided, without=lacking)
    if STATISTICAL_TESTS[hypothesis.test].independent_units:
        _refuse_repeated_units(table, sides, hypothesis)
    return sides


def _other_groups(table: Table, hypothesis: Hypothesis) -> tuple[str, ...]:
    """Name the other groups of the column, whose values a contrast takes too: observed or not, as they are declared."""
    groups = hypothesis.groups
    if groups is None or STATISTICAL_TESTS[hypothesis.test].design != "contrast":
        return ()
    declared = table.declared.columns.get(groups.column) or table.declared.derive[groups.column]
    return tuple(level for level in declared.levels or () if level not in (groups.first, groups.second))


def _outcome(table: Table, outcome: str | EventOutcome | None) -> Column:
    """Give the column of the outcome; an event whose status is missing is neither yes nor no."""
    if isinstance(outcome, EventOutcome):
        status = table.columns[outcome.column]
        return Column(np.isin(status.values, outcome.values), status.missing, "truth")
    return table.columns[str(outcome)]


def _matched(table: Table, first: Positions, second: Positions, hypothesis: Hypothesis) -> tuple[Positions, Positions]:
    """Bring both sides into the order of the key; each key stands exactly once on each side."""
    name = str(hypothesis.matched_by)
    key = table.columns[name]
    faults = _key_faults(table, key, first, second, hypothesis)
    if faults:
        raise DataFault(table.declared.file, capped(faults))
    by_key = [side[np.argsort(key.values[side], kind="stable")] for side in (first, second)]
    return by_key[0], by_key[1]


def _key_faults(table: Table, key: Column, first: Positions, second: Positions, hypothesis: Hypothesis) -> list[Fault]:
    """Find rows that have no partner, or more than one: their lines, for a key may be a person's."""
    told = f"hypothesis '{hypothesis.id}' matches rows by {quoted(str(hypothesis.matched_by))}, and"
    both = np.concatenate([first, second])
    lines = in_order(table.lines[both[key.missing[both]]])
    if lines:
        return [Fault(lines[0], 0, f"{told} it is missing on {line_list(lines)}.")]
    sides = [_by_key(key, side) for side in (first, second)]
    twice = [in_order(table.lines[rows]) for side in sides for rows in side.values() if len(rows) > 1]
    advice = "Keep one of them by 'where', or correct the file."
    faults = [
        Fault(lines[0], 0, f"{told} the same key stands twice in one group, on {line_list(lines)}. {advice}")
        for lines in twice
    ]
    alone = [rows[0] for one, other in (sides, sides[::-1]) for name, rows in one.items() if name not in other]
    if alone:
        lines = in_order(table.lines[alone])
        advice = "Leave out such rows by 'where' or 'exclude', or correct the file."
        told = f"{told} in the other group there is no partner for {line_list(lines)}. {advice}"
        faults.append(Fault(lines[0], 0, told))
    return faults


def _by_key(key: Column, side: Positions) -> dict[Any, list[int]]:
    rows: dict[Any, list[int]] = {}
    for position, value in zip(side.tolist(), key.values[side].tolist(), strict=True):
        rows.setdefault(value, []).append(position)
    return rows


def _refuse_repeated_units(table: Table, sides: _Sides, hypothesis: Hypothesis) -> None:
    """Refuse a unit that stands in several rows, or in several pairs, of a test that takes each as independent."""
    names = table.declared.independent_unit
    if not names:
        return  # each row is one unit
    rows = np.concatenate(sides.positions)
    place = np.tile(np.arange(sides.positions[0].size), 2) if sides.paired else rows
    _refuse_unknown_units(table, rows, hypothesis)
    unit = table.units[rows]
    once = np.unique(np.stack([unit, place]), axis=1)  # a pair may hold its unit twice
    units, times = np.unique(once[0], return_counts=True)
    repeated = units[times > 1]
    if not repeated.size:
        return
    lines = in_order(table.lines[np.unique(rows[np.isin(unit, repeated)])])
    what = "pairs" if sides.paired else "rows"
    count = "1 unit stands" if repeated.size == 1 else f"{repeated.size:,} units stand"
    told = (
        f"hypothesis '{hypothesis.id}': the test '{hypothesis.test}' takes {what} as independent, and {count} in "
        f"several {what} (independent_unit: [{', '.join(names)}]): {line_list(lines)}. Keep one for each unit by "
        "'where', or summarise each unit before."
    )
    raise DataFault(table.declared.file, [Fault(lines[0], 0, told)])


def _refuse_unknown_units(table: Table, rows: Positions, hypothesis: Hypothesis) -> None:
    names = table.declared.independent_unit or ()
    unknown = np.any([table.columns[name].missing[rows] for name in names], axis=0)
    if unknown.any():
        lines = in_order(table.lines[np.unique(rows[unknown])])
        told = (
            f"hypothesis '{hypothesis.id}': independent_unit: [{', '.join(names)}] must name the unit of every "
            f"row, and is missing on {line_list(lines)}."
        )
        raise DataFault(table.declared.file, [Fault(lines[0], 0, told)])


def _refuse_missing(table: Table, sides: _Sides, hypothesis: Hypothesis) -> None:
    sides_gone = zip(sides.columns, sides.positions, strict=True)
    gone = np.unique(np.concatenate([rows[column.missing[rows]] for column, rows in sides_gone]))
    faults = list(missing_beside(table, hypothesis, np.unique(np.concatenate(sides.positions))))
    if gone.size:
        lines = in_order(table.lines[gone])
        told = f"hypothesis '{hypothesis.id}' allows no missing outcome (method: fail); it is missing on"
        faults.append(Fault(lines[0], 0, f"{told} {line_list(lines)}."))
    if faults:
        raise DataFault(table.declared.file, sorted(faults))


def _supplied(dataset: Dataset, table: Table, hypothesis: Hypothesis) -> Samples:
    """Give the supplied numbers of the row that carries the hypothesis' label."""
    form = dataset.from_rows[hypothesis.family]
    row = dataset.rows_by_label[hypothesis.family][str(hypothesis.feature)]
    names = (form.p, form.estimate, form.lower, form.upper)
    numbers = [np.array(table.columns[name].values[row] if name else np.nan) for name in names]
    missing = int(np.isnan(numbers[0]))
    if missing and hypothesis.missing_values.method == "fail":
        line = int(table.lines[row])
        told = f"hypothesis '{hypothesis.id}' allows no missing p-value (method: fail); it is missing on line {line}."
        raise DataFault(table.declared.file, [Fault(line, 0, told)])
    return Samples(arrays=tuple(numbers), n=(), rows_considered=1, missing=(missing,), undecided=0)
