"""One hypothesis computed twice, and the two compared number by number."""

from dataclasses import dataclass

import numpy as np

from beforehand.analysis.agreement import P_FLOOR, Agreement, bound_near
from beforehand.analysis.computed import Computed, compute
from beforehand.analysis.second import PlainTable, SecondResult, compute_again
from beforehand.data.dataset import Dataset
from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.spec.model import Hypothesis
from beforehand.spec.planned import PlannedFamily

STANDARD_ERRORS = 1e-8
"""Estimates and interval ends are compared down to this share of a standard error."""


@dataclass(frozen=True)
class Twice:
    """Both computations of one hypothesis."""

    first: Computed
    second: SecondResult


@dataclass(frozen=True)
class TwoComputations:
    """Computes hypotheses twice on the same data, and keeps account of how far the two agree."""

    dataset: Dataset
    plain: dict[str, PlainTable]
    """The same tables as plain lists, for the second computation."""
    agreement: Agreement

    @classmethod
    def of(cls, dataset: Dataset, agreement: Agreement) -> "TwoComputations":
        """Make the tables of the second computation once."""
        return cls(dataset, {name: PlainTable(table) for name, table in dataset.tables.items()}, agreement)

    def __call__(self, family: PlannedFamily, hypothesis: Hypothesis) -> Twice:
        """Compute one hypothesis under the promise of a family."""
        first = compute(family, hypothesis, self.dataset)
        second = compute_again(family, hypothesis, first.test, self.plain[hypothesis.data], first.confidence)
        _compare(first, second, float(family.promise.level), self.agreement)
        return Twice(first, second)


def _compare(one: Computed, second: SecondResult, level: float, agreement: Agreement) -> None:
    """Compare the two computations of one hypothesis, number by number."""
    about, first, again = one.hypothesis.id, one.result, second.result
    agreement.same(about, "analysed units", first.n, again.n)
    agreement.same(about, "whether there is a result", type(first).__name__, type(again).__name__)
    if isinstance(first, NotComputed) or isinstance(again, NotComputed):
        return
    agreement.same(about, "side of the claim", one.side_agrees, second.side_agrees)
    bound = one.test.bound
    scale = first.standard_error if first.standard_error > 0 else abs(first.upper - first.lower)
    floor = STANDARD_ERRORS * scale if np.isfinite(scale) else P_FLOOR
    for name in ("estimate", "lower", "upper"):
        agreement.numbers(about, name, getattr(first, name), getattr(again, name), bound=bound, floor=floor)
    for quantity, x, y in (("p", first.p, second.p), ("p as it enters", one.p_entered, second.p_entered)):
        agreement.numbers(about, quantity, x, y, bound=bound_near(level, x, bound=bound), floor=P_FLOOR)
