"""Which columns of a data file look like outcomes although no hypothesis, and nothing else in the plan, uses them."""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from beforehand.data.dataset import Dataset
from beforehand.spec.expressions import parse
from beforehand.spec.model import DataSet
from beforehand.spec.planned import Spec

MEASURED = ("number", "count", "category")
"""Kinds of column that can hold an outcome; texts and dates name things."""
OF_THE_DATA_SET = {"identified_by", "independent_unit", "allocated", "exclude", "analysis_sets"}


@dataclass(frozen=True)
class Unmentioned:
    """The columns of one data set that look like outcomes and that the plan does not use."""

    data: str
    declared: tuple[str, ...]
    undeclared: tuple[str, ...]
    """Columns of the file that the spec does not declare: what they hold is not known."""

    @property
    def count(self) -> int:
        """How many there are."""
        return len(self.declared) + len(self.undeclared)


def unmentioned_columns(spec: Spec, dataset: Dataset) -> tuple[Unmentioned, ...]:
    """Give the data sets that hold such columns.

    A declared column counts when it is a number, a count or a category, has no role or that of an outcome, and is used
    neither by a hypothesis or what supports one, nor to name rows, units or groups, nor by an exclusion, an analysis
    set or a derived column that is used. A column of the file that is not declared always counts.

    Parameters
    ----------
    spec : Spec
        The plan.
    dataset : Dataset
        The data that were read for it.

    Returns
    -------
    tuple of Unmentioned
        In the order of the spec; none for a data set without such columns.
    """
    extra = {file.id: file.extra_columns for file in dataset.inputs if file.columns}
    found = [Unmentioned(one.id, tuple(_unused(spec, one)), extra[one.id]) for one in spec.data]
    return tuple(one for one in found if one.count)


def _unused(spec: Spec, declared: DataSet) -> Iterator[str]:
    used = _used(spec, declared)
    for name, column in declared.columns.items():
        if column.kind in MEASURED and column.role in (None, "outcome") and name not in used:
            yield name


def _used(spec: Spec, declared: DataSet) -> set[str]:
    """Collect every text of the plan that could name a column of a data set.

    A column that is called like a level, or like a word of the language, passes as used wherever that stands.
    """
    used = set(_texts(declared.model_dump(include=OF_THE_DATA_SET)))
    for family in spec.document.families:
        for written in family.written:
            if written.data in (None, declared.id):
                used.update(_texts(written.model_dump()))
    for asked in spec.document.supportive:
        if asked.change.data in (None, declared.id):
            used.update(_texts(asked.change.model_dump()))
    for name, derived in reversed(declared.derive.items()):  # each uses only columns that stand above it
        if name in used:
            used.update(parse(derived.is_).names)
    return used


def _texts(value: Any) -> Iterator[str]:
    if isinstance(value, str):
        yield value
    elif isinstance(value, dict):
        for key, item in value.items():
            yield from parse(item).names if key == "where" and item else _texts(item)
    elif isinstance(value, (list, tuple)):
        for item in value:
            yield from _texts(item)
