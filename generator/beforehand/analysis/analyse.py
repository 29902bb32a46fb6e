"""One analysis in a straight line: from a spec and its data to the record."""

from collections.abc import Callable

import numpy as np
import threadpoolctl  # type: ignore[import-untyped]  # it ships no types

from beforehand.analysis.agreement import Agreement
from beforehand.analysis.computed import Computed
from beforehand.analysis.described import description_records
from beforehand.analysis.drawn import drawn
from beforehand.analysis.families import (
    EnteredFamily,
    JudgedFamily,
    covered,
    given_to_scheme,
    judge,
    order_of,
    scheme_of,
)
from beforehand.analysis.graphs import graph_drawn
from beforehand.analysis.ingredients import measured, measured_again
from beforehand.analysis.matching import with_simultaneous
from beforehand.analysis.records import (
    family_record,
    hypothesis_records,
    input_records,
    method_records,
    promise_record,
    results,
    rows_record,
    scheme_record,
    study_record,
)
from beforehand.analysis.supportive import supported, supportive_records
from beforehand.analysis.twice import Twice, TwoComputations
from beforehand.data.dataset import Dataset, with_members
from beforehand.hypothesis_tests.contract import Outcome
from beforehand.record.canonical import sha256
from beforehand.record.manifest import checksum_lines
from beforehand.record.model import PromiseRecord, Record, Results
from beforehand.snooping.contract import Evidence
from beforehand.snooping.warnings import warnings_for
from beforehand.spec.planned import PlannedFamily, Spec

EVERY = 250
"""Progress is told after so many hypotheses."""


def analyse(spec: Spec, dataset: Dataset, *, progress: Callable[[str], None] = lambda _: None) -> Record:
    """Test, adjust, decide, warn; everything computed twice.

    Raises TwoComputationsDisagree when the second computation gives another decision, or numbers over their bound.
    """
    spec = with_members(spec, dataset)
    agreement = Agreement()
    with threadpoolctl.threadpool_limits(1, user_api="blas"):  # the last bits depend on the number of threads
        compute = TwoComputations.of(dataset, agreement)
        computed, judged = _decide(spec, compute, progress)
        supporting = supported(spec, compute)
        table = results(judged, computed, supporting)
        families = tuple(family_record(one) for one in judged)
        hypotheses = tuple(
            words
            for one in judged
            for words in hypothesis_records(
                spec, one, tuple(computed[member.id] for member in one.entered.family.members)
            )
        )
        progress("looking for warnings")
        warned = warnings_for(
            Evidence(
                spec=spec,
                dataset=dataset,
                families=families,
                hypotheses=hypotheses,
                results=table,
                again=decisions,
            )
        )
    inputs = input_records(spec, dataset)
    given = given_to_scheme(spec, covered(spec, [one.entered for one in judged]))
    return Record(
        study=study_record(spec),
        promise=_study_promise(spec),
        scheme=scheme_of(spec),
        scheme_given=given or None,
        order=tuple(order_of(spec)),
        inputs=inputs,
        rows=tuple(rows_record(one) for one in dataset.tables.values()),
        families=families,
        hypotheses=hypotheses,
        supportive=supportive_records(spec, computed, supporting),
        descriptions=description_records(spec, dataset),
        warnings=warned.records,
        unneeded_answers=warned.unneeded_answers,
        agreement=agreement.settle(),
        methods=(
            *method_records(judged, (*computed.values(), *supporting)),
            *([scheme_record(scheme_of(spec))] if given else []),
        ),
        drawn=drawn(
            families,
            hypotheses,
            table,
            thresholds={name: threshold for one in judged for name, threshold in one.thresholds_by_id.items()},
            graph=graph_drawn(spec, judged, {one.id: one for one in hypotheses}),
        ),
        plan_sha256=sha256(spec.plan),
        particulars_sha256=sha256(spec.particulars),
        data_sha256=sha256(checksum_lines({file.file: file.sha256 for file in inputs})),
        appendix_rows=spec.document.appendix_rows,
        results=table,
    )


def _study_promise(spec: Spec) -> PromiseRecord | None:
    """Give the promise of the families that the study's covers; None where each family keeps its own."""
    covered = [family for family in spec.families if not family.stands_apart]
    return promise_record(covered[0].promise) if covered else None


def decisions(spec: Spec, dataset: Dataset) -> Results:
    """Give the table of record of another plan or of other rows: what a warning rule asks for."""
    spec = with_members(spec, dataset)
    computed, judged = _decide(spec, TwoComputations.of(dataset, Agreement()), lambda _: None)
    return results(judged, computed)


def _decide(
    spec: Spec, compute: TwoComputations, progress: Callable[[str], None]
) -> tuple[dict[str, Computed], tuple[JudgedFamily, ...]]:
    computed: dict[str, Computed] = {}
    entered = []
    m = sum(len(family.members) for family in spec.families)
    for family in spec.families:
        both = []
        for member in family.members:
            if len(computed) % EVERY == 0:
                progress(f"testing hypothesis {len(computed) + 1} of {m}, twice")
            both.append(compute(family, member))
            computed[member.id] = both[-1].first
        entered.append(_enter(family, both))
    progress("adjusting and deciding, twice")
    judged = judge(spec, tuple(entered), compute.agreement)
    return with_simultaneous(judged, computed), judged


def _enter(family: PlannedFamily, both: list[Twice]) -> EnteredFamily:
    return EnteredFamily(
        family=family,
        p=np.array([one.first.p_entered for one in both], dtype=np.float64),
        second_p=tuple(one.second.p_entered for one in both),
        has_result=np.array([isinstance(one.first.result, Outcome) for one in both], dtype=bool),
        against_claim=np.array([one.first.side_agrees == "no" for one in both], dtype=bool),
        measured=measured(family, [one.first for one in both]),
        second_measured=measured_again(family, [one.second for one in both]),
    )
