"""A hypothesis, or a short form of many, with what has to be known to check it."""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS, StatisticalTest
from beforehand.spec.checks.data_sets import columns_of
from beforehand.spec.expressions import Known
from beforehand.spec.model import (
    Comparisons,
    DataSet,
    Document,
    Family,
    HypothesesFrom,
    NullHypothesis,
    Promise,
    StudyPromise,
    WrittenHypothesis,
)
from beforehand.spec.places import Path

Written = WrittenHypothesis | Comparisons | HypothesesFrom


@dataclass(frozen=True)
class Block:
    """What is written, where, and about which data with which test."""

    path: Path
    name: str
    """How messages call it: ``hypothesis 'frost'``."""
    written: Written
    family: Family
    data_set: DataSet | None
    """None where the data set can't be told."""
    columns: dict[str, Known]
    """The columns of the file and the derived ones."""
    test: StatisticalTest[Any] | None
    """None where the test is not built yet."""

    @property
    def null(self) -> NullHypothesis:
        """The null hypothesis, written or not."""
        return self.written.null_hypothesis or NullHypothesis(at=self.test.null_default if self.test else 0.0)

    @property
    def supplied(self) -> bool:
        """Whether p-values are supplied instead of computed."""
        return self.written.test == "supplied_p"

    @property
    def two_sided(self) -> bool:
        """Whether the test can reject on either side of what it claims."""
        return self.null.form == "inside" or (
            self.null.form == "at"
            and (self.written.alternative == "two_sided" or (self.supplied and self.written.alternative is None))
        )


def blocks_of(document: Document, number: int) -> Iterator[Block]:
    """Give what is written in one family."""
    family = document.families[number]
    known = {data_set.id: columns_of(data_set) for data_set in document.data}
    for entry, written in enumerate(family.written):
        if isinstance(written, WrittenHypothesis):
            path: Path = ("families", number, "hypotheses", entry)
            name = f"hypothesis '{written.id}'"
        else:
            key = "comparisons" if isinstance(written, Comparisons) else "hypotheses_from"
            path, name = ("families", number, key), f"'{key}' of family '{family.id}'"
        data_set = _data_set(document, written)
        yield Block(
            path=path,
            name=name,
            written=written,
            family=family,
            data_set=data_set,
            columns=known.get(data_set.id, {}) if data_set else {},
            test=_test(written.test),
        )


def _test(word: str) -> StatisticalTest[Any] | None:
    if word in STATISTICAL_TESTS:
        return STATISTICAL_TESTS[word]
    return None


def _data_set(document: Document, written: Written) -> DataSet | None:
    if written.data is None:
        return document.data[0] if len(document.data) == 1 else None
    return next((data_set for data_set in document.data if data_set.id == written.data), None)


def promise_of(document: Document, family: Family) -> Promise | StudyPromise:
    """Give the promise that applies to a family."""
    return family.promise or document.promise
