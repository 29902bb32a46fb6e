"""Spec and data checked together, before any test is computed and without joining an outcome with a group."""

from dataclasses import dataclass
from pathlib import Path
from typing import Any

from beforehand.data.dataset import Dataset, read_data, with_members
from beforehand.data.samples import unlabelled
from beforehand.data.sets import rows_of as chosen_rows
from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
from beforehand.hypothesis_tests.nulls import Null, alternative_in_symbols, null_in_symbols
from beforehand.multiplicity.decision import is_rejected
from beforehand.planning.reaching import first_thresholds
from beforehand.planning.verdicts import verdicts
from beforehand.spec.model import Description, Hypothesis
from beforehand.spec.planned import PlannedFamily, Spec


@dataclass(frozen=True, kw_only=True)
class PlannedHypothesis:
    """One hypothesis as the spec expands it."""

    id: str
    family: str
    test: str
    null: str
    alternative: str
    sizes: tuple[int, ...]
    """Units with an outcome in each group, or pairs; empty where no data are there yet."""
    smallest_p: float | None
    """The smallest p that could enter the procedure with these sizes; None where no data are there yet."""
    first_threshold: float
    """The first threshold of its family's procedure: what the smallest p of the family has to meet."""

    @property
    def can_be_rejected(self) -> bool:
        """Whether any data of these sizes could reject it."""
        return self.smallest_p is None or is_rejected(self.smallest_p, self.first_threshold)


@dataclass(frozen=True, kw_only=True)
class PlannedBeside:
    """A supportive analysis, or a description: what decides nothing."""

    id: str
    what: str
    """What kind of analysis it is, and of which hypothesis; or the columns that are described."""
    sizes: tuple[int, ...]
    """Units with an outcome in each group, or the rows described; empty where no data are there yet."""


@dataclass(frozen=True, kw_only=True)
class Checked:
    """A sound spec with what it plans, and the rows that it finds."""

    spec: Spec
    dataset: Dataset | None
    """None where no data file is there yet."""
    hypotheses: tuple[PlannedHypothesis, ...]
    beside: tuple[PlannedBeside, ...]

    @property
    def out_of_reach(self) -> tuple[PlannedHypothesis, ...]:
        """The hypotheses that no data of these sizes could reject."""
        return tuple(hypothesis for hypothesis in self.hypotheses if not hypothesis.can_be_rejected)

    @property
    def verdicts(self) -> tuple[str, ...]:
        """Where success of a family, and what it takes to let others have their turn, are different things."""
        return verdicts(self.spec)

    def summary(self) -> dict[str, Any]:
        """Give it as plain values."""
        return {
            "plan": self.spec.plan_checksum,
            "families": [
                {"id": f.id, "procedure": f.procedure, "planned": f.planned, "members": [h.id for h in f.members]}
                for f in self.spec.families
            ],
            "hypotheses": [vars(hypothesis) for hypothesis in self.hypotheses],
            "beside": [vars(one) for one in self.beside],
            "verdicts": list(self.verdicts),
            "rows": {name: rows_of(self.dataset, name) for name in self.dataset.tables} if self.dataset else None,
        }


def check(spec: Spec, *, data_root: Path | None = None) -> Checked:
    """Check a spec with its data; where none of its files is there yet, the spec alone."""
    if not any((base / one.file).exists() for base in (spec.folder, data_root) if base for one in spec.data):
        return Checked(spec=spec, dataset=None, hypotheses=_planned(spec, None), beside=_beside(spec, None))
    dataset = read_data(spec, data_root=data_root)
    whole = with_members(spec, dataset)
    planned, beside = _planned(whole, dataset), _beside(whole, dataset)
    return Checked(spec=whole, dataset=dataset, hypotheses=planned, beside=beside)


def rows_of(dataset: Dataset, name: str) -> dict[str, Any]:
    """Give the row accounting of one data set as plain values."""
    flow = dataset.tables[name].flow
    return {
        "received": flow.received.rows,
        "excluded": [{"because": rule.because, "rows": rule.counts.rows} for rule in flow.exclusions],
        "analysed": flow.analysed.rows,
        "analysed_by_group": flow.analysed.by_group,
    }


def _planned(spec: Spec, dataset: Dataset | None) -> tuple[PlannedHypothesis, ...]:
    thresholds = first_thresholds(spec)
    return tuple(
        _one(family, member, dataset, thresholds[member.id]) for family in spec.families for member in family.members
    )


def _beside(spec: Spec, dataset: Dataset | None) -> tuple[PlannedBeside, ...]:
    """List what decides nothing; its rows are found, so that what is wrong with them is found too."""
    supportive = (
        PlannedBeside(
            id=one.id,
            what=f"{one.analysis} analysis of {one.of}",
            sizes=unlabelled(dataset, one.hypothesis).sizes if dataset else (),
        )
        for one in spec.supportive
    )
    described = (
        PlannedBeside(id=one.id, what=f"description of {', '.join(one.columns)}", sizes=_described(spec, one, dataset))
        for one in spec.document.describe
    )
    return (*supportive, *described)


def _described(spec: Spec, asked: Description, dataset: Dataset | None) -> tuple[int, ...]:
    if dataset is None:
        return ()
    table = dataset.tables[asked.data or spec.data[0].id]
    return (int(chosen_rows(table, asked, what=f"description '{asked.id}'").rows.sum()),)


def _one(
    family: PlannedFamily, hypothesis: Hypothesis, dataset: Dataset | None, first_threshold: float
) -> PlannedHypothesis:
    test, written = STATISTICAL_TESTS[hypothesis.test], hypothesis.null_hypothesis
    null = Null(written.form, tuple(float(margin) for margin in written.margins))
    known = unlabelled(dataset, hypothesis) if dataset else None
    smallest = None
    if known and known.sizes:
        smallest = test.smallest_p(
            known.sizes,
            None,  # values of the outcomes stay unread
            alternative=hypothesis.side,
            null_value=null.values[0] if len(null.values) == 1 else None,
            **hypothesis.options,
            **known.beside,
        )
        one_sided = hypothesis.side != "two_sided" or written.form == "outside"
        smallest = min(1.0, smallest * _reading(family, one_sided=one_sided))
    if known and 0 in known.sizes:
        smallest = 1.0  # a group without a unit gives no result, which counts as p = 1
    return PlannedHypothesis(
        id=hypothesis.id,
        family=family.id,
        test=hypothesis.test,
        null=null_in_symbols(test, null, hypothesis.side),
        alternative=alternative_in_symbols(test, null, hypothesis.side),
        sizes=known.sizes if known else (),
        smallest_p=smallest,
        first_threshold=first_threshold,
    )


def _reading(family: PlannedFamily, *, one_sided: bool) -> float:
    """Give by how much a p is multiplied when its level is read: twice, half, or not at all."""
    match (family.promise.level_is, one_sided):
        case ("two_sided", True):
            return 2.0
        case ("one_sided", False):
            return 0.5
    return 1.0
