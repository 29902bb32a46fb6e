"""From what was read and computed to the parts of the record."""

import math
from collections import Counter
from dataclasses import replace
from typing import Any

import numpy as np

from beforehand.analysis.computed import Computed
from beforehand.analysis.families import JudgedFamily
from beforehand.analysis.wording import (
    alternative_in_words,
    beside_in_words,
    labels,
    null_in_words,
    outcome_name,
    sides,
    unit_of,
)
from beforehand.data.dataset import Dataset
from beforehand.data.sets import missing_values, overlaps
from beforehand.data.table import Table
from beforehand.hypothesis_tests.contract import NotComputed, Outcome
from beforehand.hypothesis_tests.nulls import alternative_in_symbols, null_in_symbols
from beforehand.multiplicity.scheme import SCHEMES
from beforehand.record.canonical import results_column
from beforehand.record.model import (
    AnalysisSetRecord,
    ExclusionRecord,
    FamilyRecord,
    GroupSummary,
    HypothesisRecord,
    InputRecord,
    MethodRecord,
    MissingRecord,
    OverlapRecord,
    PromiseRecord,
    Results,
    RowsRecord,
    StudyRecord,
    SuccessRecord,
)
from beforehand.spec.model import Promise
from beforehand.spec.planned import PlannedFamily, Spec
from beforehand.terms import STATE_WORDS, AcrossFamilies

MISSING_NUMBER = math.nan
MOVING_LEVEL = (
    "The level of this family depends on what is found in others, so that no simultaneous interval has a confidence "
    "known beforehand; only the unadjusted interval is printed."
)
UNDECIDED: dict[str, Any] = {
    **dict.fromkeys(("p_family", "p_study", "threshold", "p_entered", "factor", "product"), MISSING_NUMBER),
    **dict.fromkeys(("matching_lower", "matching_upper", "matching_level"), MISSING_NUMBER),
    **dict.fromkeys(("decides", "side_agrees", "entered_as"), ""),
    **dict.fromkeys(("rank", "from_rank", "survives_up_to"), 0),
    "state": "described",
}
"""What the columns of a decision hold where nothing is decided."""


def study_record(spec: Spec) -> StudyRecord:
    """Say what the spec says of the study."""
    study = spec.study
    return StudyRecord(
        title=study.title,
        identifier=study.identifier,
        intent=study.intent,
        prepared_by=study.prepared_by,
        dated=study.dated or "",
        protocol=study.protocol or "",
    )


def promise_record(promise: Promise) -> PromiseRecord:
    """Say what is promised; the level both as a number and as it is written."""
    return PromiseRecord(
        criterion=promise.criterion,
        level=float(promise.level),
        level_text=str(promise.level.canonical()),
        level_is=promise.level_is,
    )


def input_records(spec: Spec, dataset: Dataset) -> tuple[InputRecord, ...]:
    """List every checksummed input."""
    return tuple(
        InputRecord(**vars(file), missing_codes=spec.data_set(file.id).missing_codes if file.columns else ())
        for file in dataset.inputs
    )


def rows_record(table: Table) -> RowsRecord:
    """Account for the rows of one data set."""
    declared, flow = table.declared, table.flow
    return RowsRecord(
        data=declared.id,
        one_row_is=declared.one_row_is or "",
        allocated_by=declared.allocated.by if declared.allocated else "",
        received=flow.received.rows,
        received_by_group=flow.received.by_group,
        exclusions=tuple(
            ExclusionRecord(
                where=rule.where,
                because=rule.because,
                known_at=rule.known_at,
                rows=rule.counts.rows,
                by_group=rule.counts.by_group,
                undecided=len(rule.undecided),
                undecided_lines=rule.undecided,
            )
            for rule in flow.exclusions
        ),
        analysed=flow.analysed.rows,
        analysed_by_group=flow.analysed.by_group,
        missing=tuple(
            MissingRecord(variable=missing.column, rows=missing.counts.rows, by_group=missing.counts.by_group)
            for missing in missing_values(table, by_group=True)
        ),
        analysis_sets=tuple(
            AnalysisSetRecord(
                id=one.id,
                where=one.where,
                principle=one.principle,
                rows=one.counts.rows,
                by_group=one.counts.by_group,
                undecided=len(one.undecided),
                undecided_lines=one.undecided,
            )
            for one in table.sets
        ),
        overlaps=tuple(
            OverlapRecord(
                first=one.first,
                second=one.second,
                both=one.both.rows,
                only_first=one.only_first.rows,
                only_second=one.only_second.rows,
            )
            for one in overlaps(table)
        ),
        derived={name: rule.is_ for name, rule in declared.derive.items()},
    )


def family_record(judged: JudgedFamily) -> FamilyRecord:
    """Say what a family promised, and what came of it."""
    family, procedure, decision = judged.entered.family, judged.entered.procedure, judged.decision
    counts = Counter(decision.states)
    states = {state: counts[state] for state in STATE_WORDS if counts[state]}
    local, level = decision.local_level, judged.entered.level
    return FamilyRecord(
        id=family.id,
        question=family.question,
        purpose=family.purpose or "",
        promise=promise_record(family.promise),
        under_study_promise=not family.stands_apart,
        procedure=procedure.name,
        procedure_title=procedure.title,
        procedure_options=dict(family.procedure_options),
        given=judged.entered.replayed_with,
        multiples=bool(np.isfinite(judged.factor).all()),
        level=level,
        local_level=None if math.isnan(local) or local == level else local,
        success=SuccessRecord(**vars(judged.success)) if judged.success else None,
        strong=procedure.strong,
        valid_under=procedure.valid_under,
        joint_intervals=procedure.intervals == "critical_value",
        no_intervals_because=procedure.no_intervals_because or ("" if family.sure_share else MOVING_LEVEL),
        planned=family.planned,
        computed=int(judged.entered.has_result.sum()),
        members=tuple(member.id for member in family.members),
        tested=decision.tested,
        closed_by=decision.closed_by,
        states=states,
    )


def hypothesis_records(
    spec: Spec, judged: JudgedFamily, computed: tuple[Computed, ...]
) -> tuple[HypothesisRecord, ...]:
    """Put the members of a family into words."""
    family = judged.entered.family
    names = labels(family.members, [one.test for one in computed])
    falls = judged.decision.falls
    waits_for = falls.waits_for if falls else [()] * len(computed)
    return tuple(
        hypothesis_record(spec, family, one, label=label, arithmetic=arithmetic, waits_for=waiting or None)
        for one, label, arithmetic, waiting in zip(computed, names, judged.arithmetic, waits_for, strict=True)
    )


def hypothesis_record(
    spec: Spec,
    family: PlannedFamily,
    computed: Computed,
    *,
    label: str,
    arithmetic: str = "",
    waits_for: tuple[str, ...] | None = None,
) -> HypothesisRecord:
    """Put one hypothesis, or a supportive analysis of one, into words."""
    hypothesis, test, result = computed.hypothesis, computed.test, computed.result
    unit = unit_of(spec, hypothesis, test)
    # under a one-sided level a two-sided test is judged on the side of its claim alone
    one_side = {"alternative": hypothesis.claim_direction} if computed.entered_as == "claim side" else {}
    judged = hypothesis.model_copy(update=one_side)
    pair = sides(hypothesis)
    missing, basis = hypothesis.missing_values, hypothesis.margin_basis
    return HypothesisRecord(
        id=hypothesis.id,
        family=family.id,
        label=label,
        claim=hypothesis.claim or "",
        null=null_in_symbols(test, computed.null, judged.side),
        alternative=alternative_in_symbols(test, computed.null, judged.side),
        null_in_words=null_in_words(judged, test, unit),
        alternative_in_words=alternative_in_words(judged, test, unit),
        side=judged.side,
        null_form=computed.null.form,
        claim_direction=hypothesis.claim_direction,
        null_values=computed.null.values,
        test=test.name,
        test_title=test.title,
        design=test.design,
        outcome_kind=test.outcome,
        scale=test.scale,
        estimates=test.estimates,
        parameter=test.parameter,
        statistic_name=test.statistic,
        outcome=outcome_name(hypothesis),
        unit=unit,
        first=pair[0] if pair else "",
        second=pair[1] if pair else "",
        data=hypothesis.data,
        analysis_set=hypothesis.analysis_set or "",
        where=hypothesis.where or "",
        missing_method=missing.method,
        missing_mechanism=missing.mechanism or "",
        options=dict(hypothesis.options),
        summaries=_summaries(computed),
        undecided=computed.samples.undecided,
        arithmetic=arithmetic,
        waits_for=waits_for,
        remarks=result.remarks if isinstance(result, Outcome) else (),
        no_result_because=result.reason if isinstance(result, NotComputed) else "",
        origin=(family.from_data.origin or "") if family.from_data else "",
        margin_basis=f"{basis.text} ({basis.source})" if basis else "",
        estimand=_estimand(computed),
        purpose=hypothesis.purpose or family.purpose or "",
        reason=hypothesis.reason or "",
        beside=beside_in_words(hypothesis),
    )


def _estimand(computed: Computed) -> dict[str, str]:
    estimand = computed.hypothesis.estimand
    if estimand is None:
        return {}
    events = "; ".join(f"{name}: {how.replace('_', ' ')}" for name, how in estimand.intercurrent.items())
    parts = {"treatment": estimand.treatment, "population": estimand.population, "variable": estimand.variable}
    return parts | ({"intercurrent events": events} if events else {}) | {"summary": estimand.summary}


def _summaries(computed: Computed) -> tuple[GroupSummary, ...]:
    """Describe each group by statistics that show no single row."""
    test, samples = computed.test, computed.samples
    if test.design == "supplied":
        return ()
    names = sides(computed.hypothesis) or ("all",)  # a contrast has other groups too, described where they are compared
    # a pair that lacks one of its values is missing on both sides
    gone = samples.missing if len(samples.missing) == len(samples.arrays) else samples.missing * len(samples.arrays)
    found = tuple(
        _summary(name, values, missing, events=test.outcome in ("event", "count"))
        for name, values, missing in zip(names, samples.arrays[: len(names)], gone[: len(names)], strict=True)
    )
    amounts = samples.beside.get("exposure") or samples.beside.get("time")
    if not amounts:
        return found
    return tuple(replace(one, exposure=float(amount.sum())) for one, amount in zip(found, amounts, strict=True))


def _held(value: Any) -> float | None:
    """Give a statistic as JSON can hold it."""
    return float(value) if math.isfinite(value) else None


def _summary(name: str, values: Any, missing: int, *, events: bool) -> GroupSummary:
    n = len(values)
    if events:
        return GroupSummary(group=name, n=n, missing=missing, events=int(values.sum()))
    if not n:
        return GroupSummary(group=name, n=0, missing=missing)
    with np.errstate(over="ignore", invalid="ignore"):  # of numbers near the largest, some statistics can't be held
        mean, sd, lower, median, upper = (
            _held(value)
            for value in (
                values.mean(),
                values.std(ddof=1) if n > 1 else math.nan,
                *np.quantile(values, [0.25, 0.5, 0.75]),
            )
        )
    return GroupSummary(
        group=name,
        n=n,
        missing=missing,
        mean=mean,
        sd=sd,
        median=median,
        lower_quartile=lower,
        upper_quartile=upper,
    )


def scheme_record(name: AcrossFamilies) -> MethodRecord:
    """Say what a scheme across families keeps."""
    scheme = SCHEMES[name]
    return MethodRecord(
        kind="scheme across families",
        name=name,
        title=scheme.title,
        reference=scheme.reference,
        assumes=(scheme.keeps,),
        p_is="",
        second_route=(
            "the procedures run again at the levels that come out, and the adjusted p of the study by a level that "
            "rises from 0, on plain lists"
        ),
    )


def method_records(judged: tuple[JudgedFamily, ...], computed: tuple[Computed, ...]) -> tuple[MethodRecord, ...]:
    """List the tests and procedures that the run used, each once."""
    tests = {one.test.name: one.test for one in computed}
    procedures = {one.entered.procedure.name: one.entered.procedure for one in judged}
    return tuple(
        MethodRecord(
            kind="statistical test",
            name=name,
            title=test.title,
            reference=test.reference,
            assumes=test.assumptions,
            p_is=test.p_is,
            second_route=test.second_route,
        )
        for name, test in sorted(tests.items())
    ) + tuple(
        MethodRecord(
            kind="multiplicity procedure",
            name=name,
            title=procedure.title,
            reference=procedure.reference,
            assumes=(procedure.valid_under,),
            p_is="",
            second_route="the adjustment by its definition and the decisions by walking the thresholds, on plain lists",
        )
        for name, procedure in sorted(procedures.items())
    )


def results(
    judged: tuple[JudgedFamily, ...], computed: dict[str, Computed], described: tuple[Computed, ...] = ()
) -> Results:
    """Put the table of record together: families in the order of the spec, members in the order of the family.

    What is described and decides nothing comes after them.
    """
    rows = [
        _row(one, index, computed[member.id])
        for one in judged
        for index, member in enumerate(one.entered.family.members)
    ]
    rows += [_computed(one) | UNDECIDED for one in described]
    columns = {name: [row[name] for row in rows] for name in rows[0]} if rows else {}
    return Results(**{name: results_column(name, values) for name, values in columns.items()})


def _row(judged: JudgedFamily, index: int, computed: Computed) -> dict[str, Any]:
    decision = judged.decision
    matching = computed.matching if decision.tested else None
    return _computed(computed) | {
        "p_family": float(decision.p_family[index]),
        "p_study": float(decision.p_study[index]),
        "threshold": float(decision.threshold[index]),
        "state": decision.states[index],
        "decides": decision.decides[index],
        "side_agrees": computed.side_agrees,
        "p_entered": computed.p_entered,
        "entered_as": computed.entered_as,
        "rank": int(judged.rank[index]),
        "factor": float(judged.factor[index]),
        "product": float(judged.product[index]),
        "from_rank": int(judged.from_rank[index]),
        "matching_lower": matching.lower if matching else MISSING_NUMBER,
        "matching_upper": matching.upper if matching else MISSING_NUMBER,
        "matching_level": computed.matching_confidence if matching else MISSING_NUMBER,
        "survives_up_to": int(judged.survives_up_to[index]),
    }


def _computed(computed: Computed) -> dict[str, Any]:
    """Give the columns that a test fills by itself, whatever is decided."""
    outcome = computed.result if isinstance(computed.result, Outcome) else None
    n, aligned = computed.result.n, computed.test.aligned
    number = dict.fromkeys(("estimate", "lower", "upper", "statistic", "df", "p", "standard_error"), MISSING_NUMBER)
    if outcome:
        number = {name: float(getattr(outcome, name)) for name in number}
    return {
        "id": computed.hypothesis.id,
        "family": computed.hypothesis.family,
        "test": computed.test.name,
        "n": sum(n),
        **number,
        "n_first": n[0] if n else 0,
        "n_second": n[1] if len(n) > 1 and not aligned else 0,
        "interval_level": computed.confidence if outcome else MISSING_NUMBER,
    }
