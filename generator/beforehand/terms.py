"""The closed vocabularies: every word that a spec may use for a choice and that a record may hold for a state."""

from typing import Literal

Alternative = Literal["above", "below", "two_sided"]
ClaimDirection = Literal["above", "below", "either"]
LevelIs = Literal["one_sided", "two_sided"]
Intent = Literal["confirmatory", "exploratory"]

Criterion = Literal[
    "familywise_error_rate",
    "k_familywise_error_rate",
    "per_family_error_rate",
    "per_comparison_error_rate",
    "false_discovery_rate",
    "false_discovery_exceedance",
]
AcrossFamilies = Literal["serial", "parallel", "shares", "graph", "separate"]

State = Literal[
    "rejected",
    "rejected_against_claim",
    "not_rejected",
    "not_tested",
    "no_result",
    "described",
    "continue",
]

Severity = Literal["objection", "caution", "note"]
Scope = Literal["hypothesis", "family", "study"]
EvidenceFrom = Literal["record", "pattern"]

# How the values of a test reach it, and on which scale its estimate lives.
Design = Literal["one_sample", "two_groups", "pairs", "supplied"]
OutcomeKind = Literal["number", "event", "supplied"]
Scale = Literal["difference", "ratio", "location", "supplied"]

# CDISC Analysis Results Standard, controlled terms for the purpose and the reason of an analysis.
Purpose = Literal["PRIMARY OUTCOME MEASURE", "SECONDARY OUTCOME MEASURE", "EXPLORATORY OUTCOME MEASURE"]
Reason = Literal["SPECIFIED IN PROTOCOL", "SPECIFIED IN SAP", "DATA DRIVEN", "REQUESTED BY REGULATORY AGENCY"]

ColumnKind = Literal["number", "count", "category", "text", "date"]
ColumnRole = Literal[
    "outcome", "group", "covariate", "baseline", "exposure", "independent_unit",
    "cluster", "stratum", "time", "event", "identifier",
]  # fmt: skip

STATE_WORDS: dict[State, str] = {
    "rejected": "rejected",
    "rejected_against_claim": "rejected, against the claim",
    "not_rejected": "not rejected",
    "not_tested": "not tested",
    "no_result": "no result",
    "described": "described only",
    "continue": "continue",
}

CRITERION_WORDS: dict[Criterion, str] = {
    "familywise_error_rate": "family-wise error rate",
    "k_familywise_error_rate": "k-family-wise error rate",
    "per_family_error_rate": "per-family error rate",
    "per_comparison_error_rate": "per-comparison error rate",
    "false_discovery_rate": "false discovery rate",
    "false_discovery_exceedance": "false discovery proportion exceedance",
}
