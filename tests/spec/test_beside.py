"""Faults of the keys that hand a test more of a row than its outcome, as whole messages."""

from pathlib import Path

import pytest
from filter_study import GROUPS, HEAD

from beforehand.errors import SpecFault
from beforehand.spec.load import read_spec

RATE = f"- {{id: leaks, test: rate_ratio, outcome: leaks, exposure: hours, {GROUPS}, alternative: below}}"
WELCH = f"- {{id: flow, test: welch_t, outcome: flow, {GROUPS}, alternative: above}}"
STAINED = 'outcome: {column: stained, values: ["yes"]}'
CMH = f"- {{id: stained, test: cochran_mantel_haenszel, {STAINED}, strata: [line], {GROUPS}, alternative: below}}"
LOG_RANK = (
    "- {id: bursts, test: log_rank, time: {column: days, event: {column: state, values: [burst]}}, "
    f"{GROUPS}, alternative: below}}"
)
LINE = HEAD.count("\n") + 1


def message(hypothesis: str) -> str:
    with pytest.raises(SpecFault) as caught:
        read_spec(f"{HEAD}      {hypothesis}\n".encode(), Path("filters.yaml"))
    return "\n".join(fault.text for fault in caught.value.faults)


@pytest.mark.parametrize(
    ("hypothesis", "said"),
    [
        (
            WELCH.replace("outcome", "exposure: hours, outcome"),
            "hypothesis 'flow' has 'exposure', and the test 'welch_t' uses no 'exposure'. Take it out.",
        ),
        (
            WELCH.replace("outcome", "strata: [line], covariates: [before], outcome"),
            "hypothesis 'flow' has 'strata', and the test 'welch_t' uses no 'strata'. Take it out.\n"
            "hypothesis 'flow' has 'covariates', and the test 'welch_t' uses no 'covariates'. Take it out.",
        ),
        (
            WELCH.replace("outcome", "time: {column: days, event: {column: state, values: [burst]}}, outcome"),
            "hypothesis 'flow' has 'time', and the test 'welch_t' uses no 'time'. Take it out.",
        ),
        (
            RATE.replace(" exposure: hours,", ""),
            "hypothesis 'leaks' needs the key 'exposure': the column that holds for how long, or over how much, the "
            "events of a row were counted.",
        ),
        (
            RATE.replace("hours", "hour"),
            "hypothesis 'leaks' names the column 'hour', which is not declared. The nearest is 'hours'.",
        ),
        (
            RATE.replace("hours", "water"),
            "hypothesis 'leaks' needs a number or a count where column 'water' stands, which is a category.",
        ),
        (
            RATE.replace("hours", "leaks"),
            "hypothesis 'leaks' has the column 'leaks' twice: here and as its 'outcome'.",
        ),
        (
            RATE.replace("outcome: leaks", "outcome: flow"),
            "hypothesis 'leaks' needs counts, and column 'flow' is not declared as {kind: count}: whole numbers from 0 "
            "on, of a column of the file.",
        ),
        (
            CMH.replace("line", "flow, line"),
            "hypothesis 'stained' needs a category with its levels where column 'flow' stands, which is a number.",
        ),
        (
            CMH.replace("line", "line, line"),
            "the 'strata' of hypothesis 'stained' names 'line' twice.",
        ),
        (
            CMH.replace("line", "make, stained"),
            "hypothesis 'stained' has the column 'make' twice: here and as its 'groups'.\n"
            "hypothesis 'stained' has the column 'stained' twice: here and as its 'outcome'.",
        ),
        (
            WELCH.replace("welch_t, outcome", "analysis_of_covariance, covariates: [filter, nowhere], outcome"),
            "hypothesis 'flow' needs a number or a count or a category with its levels where column 'filter' stands, "
            "which is a text.\n"
            "hypothesis 'flow' names the column 'nowhere', which is not declared. The nearest is 'water'.",
        ),
        (
            LOG_RANK.replace("time", "outcome: flow, time"),
            "hypothesis 'bursts' has an outcome and a time: its outcome is the time until the event. Take 'outcome' "
            "out.",
        ),
        (
            LOG_RANK.replace("values: [burst]", "values: [bursts]"),
            "column 'state' has no level 'bursts' to count. The nearest is 'burst'.",
        ),
        (
            LOG_RANK.replace("values: [burst]", "values: [burst, running]"),
            "hypothesis 'bursts' counts every level of column 'state', so every time is that of an event.",
        ),
        (
            LOG_RANK.replace("column: days", "column: water").replace("column: state", "column: hours"),
            "hypothesis 'bursts' needs a number or a count where column 'water' stands, which is a category.\n"
            "hypothesis 'bursts' needs a category with its levels or a text where column 'hours' stands, which is a "
            "number.",
        ),
        (
            LOG_RANK.replace("}}", "}, ties: exact}"),
            "'exact' for 'ties' is not available yet.",
        ),
        (
            "- {id: bursts, test: log_rank, outcome: days, alternative: below, "
            "groups: {column: make, first: mesh, second: felt}}",
            "hypothesis 'bursts' needs the key 'time': the time until the event, as {column, event: {column, values}}.",
        ),
        (
            "- {id: flow, test: pearson_correlation, outcome: flow, alternative: above}",
            "hypothesis 'flow' does not say which two columns it relates. Write outcome: {first, second} in "
            "'hypotheses'.",
        ),
        (
            f"- {{id: flow, test: kendall_correlation, outcome: {{first: flow, second: flow}}, {GROUPS}, "
            "alternative: above}",
            "hypothesis 'flow' relates column 'flow' to itself.\n"
            "hypothesis 'flow' has 'groups', and the test 'kendall_correlation' relates two columns of one row.",
        ),
        (
            "- {id: flow, test: spearman_correlation, outcome: {first: flow, second: water}, alternative: above}",
            "hypothesis 'flow' needs a number or a count where column 'water' stands, which is a text.",
        ),
        (
            "- {id: a, test: pearson_correlation, outcome: {first: flow, second: before}, alternative: above}\n"
            "      - {id: b, test: pearson_correlation, outcome: {first: before, second: flow}, alternative: above}",
            "hypothesis 'b' asks what 'a' asks, and would count twice. Take one of them out.",
        ),
        (
            "- {id: a, test: pearson_correlation, outcome: {first: flow, second: before}, alternative: above,"
            " null_hypothesis: {at: 1.5}}",
            "hypothesis 'a': the null values of the test 'pearson_correlation' lie between -1 and 1.",
        ),
    ],
)
def test_message(hypothesis: str, said: str) -> None:
    assert message(hypothesis) == said


def test_many_hypotheses_of_one_time() -> None:
    many = (
        "    hypotheses_from: {test: log_rank, each: outcome, outcomes: [leaks], alternative: below, "
        f"time: {{column: days, event: {{column: state, values: [burst]}}}}, {GROUPS}}}\n"
    )
    with pytest.raises(SpecFault) as caught:
        read_spec(HEAD.replace("    hypotheses:\n", many).encode(), Path("filters.yaml"))
    assert [fault.text for fault in caught.value.faults] == [
        "'hypotheses_from' of family 'main' has one time for all, so each would ask the same. Write them out under "
        "'hypotheses'."
    ]


def test_pairs_of_levels_may_have_a_time() -> None:
    pairs = (
        "    comparisons: {test: log_rank, groups: line, pairs: all, alternative: two_sided, "
        "time: {column: days, event: {column: state, values: [burst]}}}\n"
    )
    spec = read_spec(HEAD.replace("    hypotheses:\n", pairs).encode(), Path("filters.yaml"))
    assert [one.id for one in spec.hypotheses] == ["main/south-north", "main/east-north", "main/east-south"]
    assert all(one.observed is not None and one.outcome is None for one in spec.hypotheses)


def test_sound() -> None:
    spec = read_spec(f"{HEAD}      {RATE}\n".encode(), Path("filters.yaml"))
    assert spec.hypotheses[0].exposure == "hours"


def test_a_fault_stands_at_its_key() -> None:
    with pytest.raises(SpecFault) as caught:
        read_spec(f"{HEAD}      {WELCH.replace('outcome', 'exposure: hours, outcome')}\n".encode(), Path("x.yaml"))
    (fault,) = caught.value.faults
    assert (fault.line, fault.column) == (LINE, 7 + WELCH.index("outcome"))
