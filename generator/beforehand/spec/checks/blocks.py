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
    known = known_columns(document)
    for entry, written in enumerate(family.written):
        if isinstance(written, WrittenHypothesis):
            path: Path = ("families", number, "hypotheses", entry)
            name = f"hypothesis '{written.id}'"
        else:
            key = "comparisons" if isinstance(written, Comparisons) else "hypotheses_from"
            path, name = ("families", number, key), f"'{key}' of family '{family.id}'"
        yield block_of(document, known, family, written, path=path, name=name)


def block_of(
    document: Document, known: dict[str, dict[str, Known]], family: Family, written: Written, *, path: Path, name: str
) -> Block:
    """Put what is written together with its data and its test; ``known`` are the columns of every data set."""
    data_set = data_set_of(document, written.data)
    return Block(
        path=path,
        name=name,
        written=written,
        family=family,
        data_set=data_set,
        columns=known.get(data_set.id, {}) if data_set else {},
        test=_test(written.test),
    )


def known_columns(document: Document) -> dict[str, dict[str, Known]]:
    """Give what is known of the columns of every data set, by its id."""
    return {data_set.id: columns_of(data_set) for data_set in document.data}


def _test(word: str) -> StatisticalTest[Any] | None:
    if word in STATISTICAL_TESTS:
        return STATISTICAL_TESTS[word]
    return None


def data_set_of(document: Document, named: str | None) -> DataSet | None:
    """Give the data set that is named, or the only one; None where it can't be told."""
    if named is None:
        return document.data[0] if len(document.data) == 1 else None
    return next((data_set for data_set in document.data if data_set.id == named), None)


def promise_of(document: Document, family: Family) -> Promise | StudyPromise:
    """Give the promise that applies to a family."""
    return family.promise or document.promise
