"""A small record whose texts hold everything that is hard to draw or tempting to obey."""

import pytest

from beforehand.record.canonical import results_column
from beforehand.record.model import (
    AgreementRecord,
    FamilyRecord,
    GroupSummary,
    HypothesisRecord,
    InputRecord,
    Integers,
    MethodRecord,
    PromiseRecord,
    Record,
    Results,
    RowsRecord,
    StudyRecord,
    WarningRecord,
)

HOSTILE = "<script>alert(1)</script> $\\frac{1}{0}$ {{ 7*7 }} \" ' & 冷 -> ₂"
IDS = ("steam", "boiler")


@pytest.fixture(scope="session")
def record() -> Record:
    promise = PromiseRecord(criterion="familywise_error_rate", level=0.05, level_text="0.05", level_is="two_sided")
    return Record(
        study=StudyRecord(
            title=f"Two kettles {HOSTILE}",
            identifier="K-1",
            intent="confirmatory",
            prepared_by=("Žofie Ω. Łukasz",),
            dated="2031-03-02",
            protocol=HOSTILE,
        ),
        promise=promise,
        scheme="serial",
        inputs=(InputRecord(id="kettles", file="data/kettles.csv", bytes=9, sha256="3f" * 32, rows=20, columns=3),),
        rows=(_rows(),),
        families=(_family(promise),),
        hypotheses=tuple(map(_hypothesis, IDS)),
        warnings=(_warning(),),
        unneeded_answers=(),
        agreement=(AgreementRecord(quantity="p", compared=2, largest=0.0, bound=1e-9, about=""),),
        methods=(
            MethodRecord(
                kind="statistical test",
                name="welch_t",
                title="Welch t-test",
                reference="Welch (1947), Biometrika 34:28-35",
                assumes=("independent units",),
                p_is="approximate",
                second_route="exact sums",
            ),
        ),
        drawn=_drawn(),
        plan_sha256="0c" * 32,
        particulars_sha256="9e" * 32,
        data_sha256="5d" * 32,
        appendix_rows=1000,
        results=_results(),
    )


def _rows() -> RowsRecord:
    counts = {"冷": 10, HOSTILE: 10}
    return RowsRecord(
        data="kettles",
        one_row_is=f"one kettle {HOSTILE}",
        allocated_by="kettle",
        received=20,
        received_by_group=counts,
        exclusions=(),
        analysed=20,
        analysed_by_group=counts,
        missing=(),
        analysis_sets=(),
    )


def _family(promise: PromiseRecord) -> FamilyRecord:
    return FamilyRecord(
        id="speed",
        question=f"Which is quicker? {HOSTILE}",
        purpose="",
        promise=promise,
        under_study_promise=True,
        procedure="holm",
        procedure_title="Holm step-down",
        procedure_options={},
        level=0.05,
        strong=True,
        valid_under="any dependence",
        no_intervals_because="none are known",
        planned=2,
        computed=2,
        members=IDS,
        tested=True,
        closed_by="",
        states={"rejected": 1, "not_rejected": 1},
    )


def _hypothesis(identifier: str) -> HypothesisRecord:
    return HypothesisRecord(
        id=identifier,
        family="speed",
        label=f"{identifier} {HOSTILE}",
        claim=f"{identifier} is quicker {HOSTILE}",
        null="μ₁ − μ₂ = 0",
        alternative="μ₁ − μ₂ ≠ 0",
        null_in_words="the means are equal",
        alternative_in_words="the means differ",
        side="two_sided",
        claim_direction="below",
        null_values=(0.0,),
        test="welch_t",
        test_title="Welch t-test",
        design="two_groups",
        outcome_kind="number",
        scale="difference",
        estimates="difference in means",
        parameter="μ₁ − μ₂",
        statistic_name="t",
        outcome="seconds",
        unit="s 冷",
        first="冷",
        second=HOSTILE,
        data="kettles",
        analysis_set="full",
        where="",
        missing_method="complete_cases",
        missing_mechanism="",
        options={},
        summaries=tuple(GroupSummary(group=group, n=10, missing=0, mean=90.0, sd=3.0) for group in ("冷", HOSTILE)),
        remarks=(HOSTILE,),
        no_result_because="",
    )


def _warning() -> WarningRecord:
    return WarningRecord(
        rule="outcomes_without_hypothesis",
        severity="note",
        scope="study",
        evidence="record",
        about="study",
        fact=HOSTILE,
        number="m would be 3.",
        why="Readers can't tell.",
        remedy="Say so.",
        ordinary_explanation="Others need it.",
        answer=HOSTILE,
    )


def _results() -> Results:
    """Fill the columns that matter here; the others are empty."""
    columns = {
        "id": IDS, "family": ("speed", "speed"), "test": ("welch_t", "welch_t"),
        "state": ("rejected", "not_rejected"), "decides": ("p_study", "p_study"), "side_agrees": ("yes", "no"),
        "entered_as": ("as it is", "as it is"), "n": (20, 20), "n_first": (10, 10), "n_second": (10, 10),
        "estimate": (-9.0, 1.0), "lower": (-12.0, -2.0), "upper": (-6.0, 4.0), "statistic": (-6.0, 0.7),
        "standard_error": (1.5, 1.5), "interval_level": (0.95, 0.95), "df": (17.5, 17.5), "p": (0.00001, 0.49),
        "p_entered": (0.00001, 0.49), "p_family": (0.00002, 0.49), "p_study": (0.00002, 0.49),
        "threshold": (0.05, 0.05), "rank": (1, 2), "factor": (2.0, 1.0), "product": (0.00002, 0.49),
        "from_rank": (1, 2), "survives_up_to": (2500, 0),
    }  # fmt: skip
    kinds = Results.__annotations__
    empty = {name: (0, 0) if kind is Integers else ("", "") for name, kind in kinds.items()}
    return Results(**{name: results_column(name, columns.get(name, empty[name])) for name in kinds})


def _drawn() -> dict:
    label = f"x {HOSTILE}"
    estimates = [
        {
            "id": identifier, "label": label, "estimate": estimate, "lower": estimate - 3, "upper": estimate + 3,
            "matching_lower": None, "matching_upper": None, "null_values": [0.0], "scale": "difference",
            "estimates": "difference in means", "unit": "s 冷", "state": state, "interval_level": 0.95,
        }
        for identifier, estimate, state in (("steam", -9.0, "rejected"), ("boiler", 1.0, "not_rejected"))
    ]  # fmt: skip
    points = [
        {"id": "steam", "label": label, "rank": 1, "p": 0.00001, "threshold": 0.025, "state": "rejected"},
        {"id": "boiler", "label": label, "rank": 2, "p": 0.49, "threshold": 0.05, "state": "not_rejected"},
    ]
    staircase = {"procedure": "holm", "procedure_title": "Holm step-down", "level": 0.05, "points": points}
    error = {
        "level": 0.05, "m": [1, 2, 3], "independent": [0.05, 0.0975, 0.142625], "at_most": [0.05, 0.1, 0.15],
        "this_m": 2, "this_independent": 0.0975, "this_at_most": 0.1,
    }  # fmt: skip
    return {"estimates": {"speed": estimates}, "staircase": {"speed": staircase}, "error_by_m": error}
