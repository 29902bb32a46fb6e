"""The second computation, from the typed columns on: rows, groups, direction and events by a short path of its own.

Shared with the first: the typed columns, and the evaluation of conditions. Not shared: how samples are taken
(``data.samples``), how a null hypothesis is put together from one-sided tests (``hypothesis_tests.nulls``), how a
level is read (``analysis.levels``), and the computation of the test (``second_route`` of its entry).
"""

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from beforehand.analysis.computed import EQUAL_SIDES
from beforehand.analysis.second_beside import complete_rows, taken_beside
from beforehand.data.evaluate import evaluated
from beforehand.data.table import Table
from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS, NotComputed, Outcome, Result, StatisticalTest
from beforehand.spec.model import Event, EventOutcome, Groups, HypothesesFrom, Hypothesis, PairOutcome
from beforehand.spec.planned import PlannedFamily

Ask = Callable[[float, str], Result]
"""The second route of one test on its samples: a null value and a side in, a result out."""


@dataclass(frozen=True)
class PlainTable:
    """One table as plain lists, each made when it is first asked for; None stands for a missing value."""

    table: Table
    columns: dict[str, list[Any]] = field(default_factory=dict)
    chosen: dict[tuple[str, ...], list[int]] = field(default_factory=dict)

    def column(self, name: str) -> list[Any]:
        """Give the values of one typed column."""
        if name not in self.columns:
            values = self.table.frame[name].astype(object)
            self.columns[name] = values.where(values.notna(), None).tolist()
        return self.columns[name]

    def rows(self, hypothesis: Hypothesis) -> list[int]:
        """Give the rows that a hypothesis is about."""
        sets = [rule.where for rule in self.table.declared.analysis_sets if rule.id == hypothesis.analysis_set]
        conditions = (*sets, *([hypothesis.where] if hypothesis.where else []))
        if conditions not in self.chosen:
            rows = list(range(len(self.table.lines)))
            for condition in conditions:
                true = self._true(condition)
                rows = [row for row in rows if true[row]]
            self.chosen[conditions] = rows
        return self.chosen[conditions]

    def _true(self, condition: str) -> list[bool]:
        table = self.table
        truth = evaluated(condition, table.columns, table.lines, what="a condition", path=table.declared.file)
        return [bool(value) and not missing for value, missing in zip(truth.values, truth.missing, strict=True)]


@dataclass(frozen=True, kw_only=True)
class SecondResult:
    """What the second computation found."""

    result: Result
    """With the estimate and interval of the hypothesis; its p is that of the first margin alone."""
    p: float
    p_entered: float
    side_agrees: str


def compute_again(
    family: PlannedFamily, hypothesis: Hypothesis, test: StatisticalTest[...], table: PlainTable, confidence: float
) -> SecondResult:
    """Compute one hypothesis again."""
    taken = _take(family, hypothesis, table)
    ask = _asking(test, taken.arrays, {**hypothesis.options, **taken.beside}, confidence)
    null, one_sided = hypothesis.null_hypothesis, {"at_most": "above", "at_least": "below"}
    side = one_sided.get(null.form) or hypothesis.alternative or "two_sided"
    result = ask(null.margins[0], side)
    if isinstance(result, NotComputed):
        return SecondResult(result=result, p=1.0, p_entered=1.0, side_agrees="")
    match null.form:
        case "outside":
            p, sides = max(_p(ask, null.margins[0], "above"), _p(ask, null.margins[1], "below")), 1
        case "inside":
            p, sides = 2 * min(_p(ask, null.margins[1], "above"), _p(ask, null.margins[0], "below")), 2
        case _:
            p, sides = result.p, 2 if side == "two_sided" else 1
    return SecondResult(
        result=result,
        p=min(1.0, p),
        p_entered=_entered(ask, family, hypothesis, min(1.0, p), sides),
        side_agrees=_side(ask, hypothesis) if sides == 2 and null.form == "at" else "",
    )


@dataclass(frozen=True)
class _Taken:
    """The samples of a hypothesis, and what its test takes beside them."""

    arrays: tuple[Any, ...]
    beside: dict[str, Any] = field(default_factory=dict)


def _take(family: PlannedFamily, hypothesis: Hypothesis, table: PlainTable) -> _Taken:
    outcome, groups, rows = hypothesis.outcome, hypothesis.groups, table.rows(hypothesis)
    if family.from_data:
        return _Taken(_supplied(family.from_data, hypothesis, table, rows))
    if isinstance(outcome, PairOutcome):
        one, other = table.column(outcome.first), table.column(outcome.second)
        return _Taken(_aligned([(one[row], other[row]) for row in rows]))
    values = _outcome(hypothesis.time.event if hypothesis.time else outcome, table)
    if groups is not None and hypothesis.matched_by:
        return _Taken(_aligned(_pairs(hypothesis, table, rows, values)))
    rows = complete_rows(hypothesis, values, table.column, rows)
    group = table.column(groups.column) if groups else []
    levels = _levels(groups, hypothesis, table) if groups else ()
    sides = [[row for row in rows if group[row] == level] for level in levels] or [rows]
    samples = tuple(_array([values[row] for row in side]) for side in sides)
    return _Taken(samples, taken_beside(hypothesis, table.column, sides))


def _levels(groups: Groups, hypothesis: Hypothesis, table: PlainTable) -> list[str]:
    """Name the groups in the order in which the test takes them."""
    levels = [groups.first, groups.second]
    if STATISTICAL_TESTS[hypothesis.test].design == "contrast":
        data = table.table.declared
        column = data.derive.get(groups.column) or data.columns[groups.column]
        levels += [level for level in column.levels or () if level not in levels]
    return levels


def _pairs(hypothesis: Hypothesis, table: PlainTable, rows: list[int], values: list[Any]) -> list[tuple[Any, Any]]:
    groups = hypothesis.groups
    assert groups is not None
    group, key = table.column(groups.column), table.column(str(hypothesis.matched_by))
    first, second = ([row for row in rows if group[row] == level] for level in (groups.first, groups.second))
    partner = {key[row]: values[row] for row in second}
    return [(values[row], partner[key[row]]) for row in sorted(first, key=key.__getitem__)]


def _outcome(outcome: str | EventOutcome | Event | None, table: PlainTable) -> list[Any]:
    if isinstance(outcome, EventOutcome | Event):
        return [None if status is None else status in outcome.values for status in table.column(outcome.column)]
    return table.column(str(outcome))


def _aligned(pairs: list[tuple[Any, Any]]) -> tuple[Any, ...]:
    complete = [(one, other) for one, other in pairs if one is not None and other is not None]
    return _array([one for one, _ in complete]), _array([other for _, other in complete])


def _array(values: list[Any]) -> Any:
    present = [value for value in values if value is not None]
    return np.array(present, dtype=bool if present and isinstance(present[0], bool) else np.float64)


def _supplied(form: HypothesesFrom, hypothesis: Hypothesis, table: PlainTable, rows: list[int]) -> tuple[Any, ...]:
    label = table.column(form.each)
    row = next(row for row in rows if str(label[row]) == hypothesis.feature)
    numbers = (table.column(name)[row] if name else None for name in (form.p, form.estimate, form.lower, form.upper))
    return tuple(float("nan") if value is None else float(value) for value in numbers)


def _asking(test: StatisticalTest[...], samples: tuple[Any, ...], options: dict[str, Any], confidence: float) -> Ask:
    return lambda null_value, side: test.again(
        *samples, null_value=null_value, alternative=side, confidence=confidence, **options
    )


def _p(ask: Ask, null_value: float, side: str) -> float:
    result = ask(null_value, side)
    return result.p if isinstance(result, Outcome) else 1.0


def _entered(ask: Ask, family: PlannedFamily, hypothesis: Hypothesis, p: float, sides: int) -> float:
    """Give the p that enters: of one side doubled against a level of both, of the claim's side against one of one."""
    match (family.promise.level_is, sides):
        case ("two_sided", 1):
            return 2 * p if p < 1 / 2 else 1.0
        case ("one_sided", 2) if hypothesis.claim_direction in ("above", "below"):
            margin = 0 if hypothesis.claim_direction == "below" else -1
            return _p(ask, hypothesis.null_hypothesis.margins[margin], hypothesis.claim_direction)
    return p


def _side(ask: Ask, hypothesis: Hypothesis) -> str:
    """Say whether the data lean to the side of the claim; at its null value an estimate leans to neither."""
    if hypothesis.claim_direction not in ("above", "below"):
        return ""
    null_value = hypothesis.null_hypothesis.margins[0]
    above, below = _p(ask, null_value, "above"), _p(ask, null_value, "below")
    if abs(above - below) <= EQUAL_SIDES * min(above, below):
        return "yes"
    return "yes" if (above < below) == (hypothesis.claim_direction == "above") else "no"
