"""Records of an invented study on seed drills, made to order: every number follows from the p-values handed in."""

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
import pytest

from beforehand.multiplicity.contract import each_alone, running_maximum, running_minimum
from beforehand.multiplicity.decision import is_rejected
from beforehand.record.model import (
    AgreementRecord,
    AnalysisSetRecord,
    ExclusionRecord,
    FamilyRecord,
    GroupSummary,
    HypothesisRecord,
    InputRecord,
    MethodRecord,
    MissingRecord,
    PromiseRecord,
    Record,
    Results,
    RowsRecord,
    StudyRecord,
    WarningRecord,
)

LEVEL = 0.025


@dataclass(frozen=True, kw_only=True)
class Plan:
    """What a test asks for of one family; None among the p-values is a missing result."""

    id: str
    p: Sequence[float | None]
    procedure: str = "holm"
    criterion: str = "familywise_error_rate"
    level: float = LEVEL
    level_is: str | None = "one_sided"
    scale: str = "difference"
    side: str = "below"
    entered_as: str = "as it is"
    under_study_promise: bool = True
    labels: Sequence[str] = ()
    claim: str = "{label}: emergence is slower"
    changes: dict[str, Any] = field(default_factory=dict)
    """Columns of the table of record to overwrite, by name."""


PROCEDURES = {
    "holm": ("Holm step-down", running_maximum, lambda m: np.arange(m, 0, -1.0)),
    "bonferroni": ("Bonferroni", each_alone, lambda m: np.full(m, float(m))),
    "benjamini_hochberg": ("Benjamini-Hochberg step-up", running_minimum, lambda m: m / np.arange(1.0, m + 1)),
    "unadjusted": ("No adjustment", each_alone, np.ones),
}
NUMBERS = ("estimate", "lower", "upper", "statistic", "df", "standard_error", "interval_level")


def _columns(plan: Plan, gate_open: bool, before: float) -> dict[str, list[Any]]:
    m = len(plan.p)
    given = np.array([math.nan if p is None else p for p in plan.p])
    entered = np.where(np.isnan(given), 1.0, given * 2 if plan.entered_as == "doubled" else given).clip(max=1.0)
    order = np.argsort(entered, kind="stable")
    rank = np.empty(m, dtype=int)
    rank[order] = np.arange(m)
    _, steps_of, factor_of = PROCEDURES[plan.procedure]
    steps = steps_of(entered[order], factor=factor_of(m))
    family = steps.adjusted[rank]
    study = np.maximum(family, before) if plan.under_study_promise else np.full(m, math.nan)
    deciding = study if plan.under_study_promise else family
    rows = np.arange(m)
    estimate = np.exp(-0.1 * (rows % 9 + 1)) if plan.scale == "ratio" else -1.25 * (rows % 9 + 1)
    half = 0.8 + 0.1 * (rows % 5)
    lower, upper = (
        (estimate / (1 + half), estimate * (1 + half)) if plan.scale == "ratio" else (estimate - half, estimate + half)
    )
    met = is_rejected(deciding, plan.level)
    decided = ["rejected" if one else "not_rejected" for one in met] if gate_open else ["not_tested"] * m
    states = ["no_result" if p is None else state for p, state in zip(plan.p, decided, strict=True)]
    columns: dict[str, Any] = {
        "id": [f"{plan.id}_{at + 1}" for at in rows], "family": [plan.id] * m, "test": ["welch_t"] * m,
        "n": np.full(m, 48), "estimate": estimate, "lower": lower, "upper": upper,
        "statistic": estimate / 0.5, "df": np.full(m, 45.6), "p": given,
        "p_family": family if gate_open else np.full(m, math.nan), "p_study": study,
        "threshold": np.full(m, plan.level), "state": states,
        "decides": ["p_study" if plan.under_study_promise else "p_family"] * m, "side_agrees": ["yes"] * m,
        "p_entered": entered, "entered_as": ["no result" if p is None else plan.entered_as for p in plan.p],
        "rank": rank + 1, "factor": steps.factor[rank], "product": steps.product[rank],
        "from_rank": steps.taken_from[rank] + 1, "n_first": np.full(m, 24), "n_second": np.full(m, 24),
        "standard_error": np.full(m, 0.5), "interval_level": np.full(m, 0.95),
        "matching_lower": np.full(m, math.nan), "matching_upper": np.full(m, math.nan),
        "matching_level": np.full(m, math.nan), "survives_up_to": np.where(met, m + 3, 0),
    }  # fmt: skip
    columns = {name: list(values) for name, values in columns.items()} | plan.changes
    for at in rows[np.isnan(given)]:
        for name in NUMBERS:
            columns[name][at] = math.nan
    return columns


def _hypotheses(plan: Plan, columns: dict[str, list[Any]]) -> list[HypothesisRecord]:
    ratio = plan.scale == "ratio"
    sign = {"below": "≥", "above": "≤", "two_sided": "="}[plan.side]
    found = []
    for at, name in enumerate(columns["id"]):
        label = plan.labels[at] if at < len(plan.labels) else f"drill {at + 1} − hand"
        summaries = tuple(
            GroupSummary(group=group, n=24, missing=1, mean=12.5, sd=2.25, median=12.2, lower_quartile=11.0,
                         upper_quartile=14.0)
            for group in (f"drill {at + 1}", "hand")
        )  # fmt: skip
        found.append(
            HypothesisRecord(
                id=name, family=plan.id, label=label, claim=plan.claim.format(label=label),
                null=f"μ₁ − μ₂ {sign} 0", alternative="μ₁ − μ₂ < 0", null_in_words="the mean is at least that by hand",
                alternative_in_words="the mean is below that by hand", side=plan.side, claim_direction=None,
                null_values=(1.0 if ratio else 0.0,), test="welch_t", test_title="Welch's t-test", design="two_groups",
                outcome_kind="number", scale=plan.scale, estimates="ratio of means" if ratio else "difference in means",
                parameter="μ₁ − μ₂", statistic_name="t", outcome="emergence", unit="" if ratio else "d",
                first=f"drill {at + 1}", second="hand", data="plots", analysis_set="full", where="",
                missing_method="complete_cases", missing_mechanism="", options={}, summaries=summaries,
                remarks=("each plot once",),
                no_result_because="no plot emerged" if columns["state"][at] == "no_result" else "",
            )
        )  # fmt: skip
    return found


def _drawn(plan: Plan, columns: dict[str, list[Any]], hypotheses: list[HypothesisRecord]) -> tuple[list[Any], Any]:
    def drawable(value: float) -> float | str | None:
        if math.isinf(value):
            return "infinity" if value > 0 else "-infinity"
        return None if math.isnan(value) else float(value)

    names = ("estimate", "lower", "upper", "matching_lower", "matching_upper", "interval_level", "matching_level")
    estimates = [
        {"id": h.id, "label": h.label, "scale": h.scale, "estimates": h.estimates, "unit": h.unit,
         "null_values": list(h.null_values), "state": columns["state"][at]}
        | {name: drawable(columns[name][at]) for name in names}
        for at, h in enumerate(hypotheses)
    ]  # fmt: skip
    order = np.argsort(columns["rank"])
    points = [
        {"id": hypotheses[at].id, "label": hypotheses[at].label, "rank": int(columns["rank"][at]),
         "p": float(columns["p_entered"][at]), "threshold": float(plan.level / columns["factor"][at]),
         "state": columns["state"][at]}
        for at in order
    ]  # fmt: skip
    title = PROCEDURES[plan.procedure][0]
    return estimates, {"procedure": plan.procedure, "procedure_title": title, "level": plan.level, "points": points}


def _family(plan: Plan, columns: dict[str, list[Any]], gate_open: bool, closed_by: str) -> FamilyRecord:
    states = columns["state"]
    promise = PromiseRecord(
        criterion=plan.criterion, level=plan.level, level_text=str(plan.level), level_is=plan.level_is
    )
    return FamilyRecord(
        id=plan.id, question="Which drill is better?", purpose="PRIMARY OUTCOME MEASURE", promise=promise,
        under_study_promise=plan.under_study_promise, procedure=plan.procedure,
        procedure_title=PROCEDURES[plan.procedure][0], procedure_options={}, level=plan.level, strong=True,
        valid_under="any dependence", no_intervals_because="No matching interval is in general use.",
        planned=len(states), computed=sum(p is not None for p in plan.p), members=tuple(columns["id"]),
        tested=gate_open, closed_by=closed_by, states={state: states.count(state) for state in dict.fromkeys(states)},
    )  # fmt: skip


WARNING = WarningRecord(
    rule="post_allocation_exclusion", severity="caution", scope="study", evidence="record", about="plots",
    fact="2 plots were excluded after allocation.", number="At most 2 of 50 plots.", why="It can favour a group.",
    remedy="Analyse all plots.", ordinary_explanation="Flooding.",
)  # fmt: skip
BY_DRILL = {"hand": 25, "drill 1": 25}
ROWS = RowsRecord(
    data="plots", one_row_is="one plot", allocated_by="drill", received=50, received_by_group=BY_DRILL,
    exclusions=(ExclusionRecord(where="flooded == 'yes'", because="flooded", known_at="after_allocation", rows=2,
                                by_group={"hand": 1, "drill 1": 1}, undecided=1),),
    analysed=48, analysed_by_group={"hand": 24, "drill 1": 24},
    missing=(MissingRecord(variable="emergence", rows=2, by_group={"hand": 1, "drill 1": 1}),),
    analysis_sets=(AnalysisSetRecord(id="full", where="", principle="intention_to_treat", rows=48, by_group=BY_DRILL),),
    derived={"speed": "1 / emergence"},
)  # fmt: skip


def make_record(*plans: Plan, intent: str = "confirmatory", scheme: str = "serial", **changes: Any) -> Record:
    """Make the record of a study with these families, one gate after the other where the scheme is serial."""
    table: dict[str, list[Any]] = {}
    families, hypotheses = [], []
    drawn: dict[str, Any] = {"estimates": {}, "staircase": {}}
    gate_open, closed_by, before = True, "", 0.0
    for plan in plans:
        columns = _columns(plan, gate_open, before)
        words = _hypotheses(plan, columns)
        families.append(_family(plan, columns, gate_open, "" if gate_open else closed_by))
        drawn["estimates"][plan.id], drawn["staircase"][plan.id] = _drawn(plan, columns, words)
        hypotheses += words
        table = {name: table.get(name, []) + values for name, values in columns.items()}
        if scheme == "serial":
            before = max([before, *columns["p_study"]])
            if gate_open and any(state != "rejected" for state in columns["state"]):
                gate_open, closed_by = False, plan.id
    m = len(hypotheses)
    level = plans[0].level
    drawn["error_by_m"] = {
        "level": level, "level_is": plans[0].level_is, "m": list(range(1, 2 * m + 10)),
        "independent": [1 - (1 - level) ** k for k in range(1, 2 * m + 10)],
        "at_most": [min(1.0, level * k) for k in range(1, 2 * m + 10)],
        "this_m": m, "this_independent": 1 - (1 - level) ** m, "this_at_most": min(1.0, level * m),
    }  # fmt: skip
    record = Record(
        study=StudyRecord(title="Seed drills on heavy soil", identifier="SD-2032-04", intent=intent,
                          prepared_by=("the station",), dated="2032-04-01"),
        promise=families[0].promise if plans[0].under_study_promise else None, scheme=scheme,
        inputs=(InputRecord(id="plots", file="data/plots.csv", bytes=1234, sha256="ab" * 32, rows=50, columns=6,
                            content_sha256="cd" * 32, missing_codes=("", "NA")),),
        rows=(ROWS,), families=tuple(families), hypotheses=tuple(hypotheses), warnings=(WARNING,),
        unneeded_answers=(), drawn=drawn, plan_sha256="01" * 32, particulars_sha256="23" * 32,
        data_sha256="45" * 32, appendix_rows=1000,
        agreement=(AgreementRecord(quantity="p", compared=m, largest=2e-13, bound=1e-9, about=hypotheses[0].id),),
        methods=(MethodRecord(kind="statistical test", name="welch_t", title="Welch's t-test", reference="Welch (1947)",
                              assumes=("independent units",), p_is="approximate", second_route="exact sums"),),
        results=Results(**{name: _typed(name, values) for name, values in table.items()}),
    )  # fmt: skip
    return replace(record, **changes)


def _typed(name: str, values: list[Any]) -> Any:
    if name in ("id", "family", "test", "state", "decides", "side_agrees", "entered_as"):
        return tuple(str(value) for value in values)
    counts = ("n", "rank", "from_rank", "n_first", "n_second", "survives_up_to")
    return np.array(values, dtype=np.int64 if name in counts else np.float64)


@pytest.fixture
def plan() -> type[Plan]:
    return Plan


@pytest.fixture
def make() -> Callable[..., Record]:
    return make_record
