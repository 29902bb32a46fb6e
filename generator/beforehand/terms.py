"""The closed vocabularies: every word that a spec may use for a choice and that a record may hold for a state."""

from typing import Literal

Alternative = Literal["above", "below", "two_sided"]
NullForm = Literal["at", "at_most", "at_least", "outside", "inside"]
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

# How the p that enters a procedure follows from the p of the test.
EnteredAs = Literal["as it is", "doubled", "claim side", "no result"]

Severity = Literal["objection", "caution", "note"]
Scope = Literal["hypothesis", "family", "study"]
EvidenceFrom = Literal["record", "pattern"]

# How the values of a test reach it, and on which scale its estimate lives.
Design = Literal["one_sample", "two_groups", "contrast", "pairs", "association", "supplied"]
OutcomeKind = Literal["number", "count", "event", "supplied"]
Scale = Literal["difference", "ratio", "location", "probability", "correlation", "supplied"]

# CDISC Analysis Results Standard, controlled terms for the purpose and the reason of an analysis.
Purpose = Literal["PRIMARY OUTCOME MEASURE", "SECONDARY OUTCOME MEASURE", "EXPLORATORY OUTCOME MEASURE"]
Reason = Literal["SPECIFIED IN PROTOCOL", "SPECIFIED IN SAP", "DATA DRIVEN", "REQUESTED BY REGULATORY AGENCY"]

ColumnKind = Literal["number", "count", "category", "text", "date"]
ColumnRole = Literal[
    "outcome", "group", "covariate", "baseline", "exposure", "independent_unit",
    "cluster", "stratum", "time", "event", "identifier",
]  # fmt: skip

# What kind of analysis supports a hypothesis, and as what a column is described.
SupportiveKind = Literal["sensitivity", "supplementary", "subgroup"]
DescribedKind = Literal["number", "count", "category", "date"]

# What the value of an expression is, row by row.
ValueKind = Literal["number", "text", "date", "truth"]
MissingMethod = Literal["complete_cases", "fail", "worst_case", "best_case", "multiple_imputation"]

# Every word that a spec may answer to: the warning rules of snooping, built or not.
WARNING_NAMES: tuple[str, ...] = (
    "assumed_correlation_used", "baseline_tests", "cannot_reject", "claim_logic_mismatch",
    "contrast_fitted_to_means", "covariates_screened", "criterion_changed", "cut_point_searched", "decided_twice",
    "dependence_doubtful", "direction_changed", "exclusions_changed", "extreme_pair_picked", "families_regrouped",
    "flexible_outlier_rule", "fragile_decision", "history_gap", "hypothesis_added_after_seal",
    "intervals_not_adjusted", "looks_off_schedule", "margin_changed", "margin_without_basis",
    "missingness_differs_by_group", "no_difference_claimed", "not_sealed_before_data", "one_of_many_times",
    "one_sided_at_full_level", "order_or_graph_changed", "outcomes_edited_after_unblinding",
    "outcomes_without_hypothesis", "padded_family", "planned_test_without_result", "post_allocation_exclusion",
    "pretest_chooses_test", "protected_pairs", "repeated_units", "resampling_near_threshold",
    "same_rows_suggest_and_test", "sample_size_off_plan", "sealed_hypothesis_missing", "sealed_spec_changed",
    "sets_disagree", "several_corrected_versions", "significant_here_not_there", "sizing_without_multiplicity",
    "subgroup_without_interaction", "subset_of_discoveries", "tested_past_closed_gate",
    "unadjusted_in_confirmatory", "underpowered_selection", "undeclared_looks", "variants_tried", "weights_changed",
)  # fmt: skip

STATE_WORDS: dict[State, str] = {
    "rejected": "rejected",
    "rejected_against_claim": "rejected against the claim",
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
