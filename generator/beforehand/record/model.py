"""The results of record: what a run found, in words a report can print and columns a program can read.

Text and structure live in ``record.json``; the numbers of the tests live in ``tests.csv``, one row per hypothesis.
Nothing here depends on the machine, the clock or a path.
"""

from dataclasses import dataclass, field, fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from beforehand.terms import (
    AcrossFamilies,
    Alternative,
    ClaimDirection,
    Criterion,
    DescribedKind,
    Design,
    EnteredAs,
    EvidenceFrom,
    Intent,
    LevelIs,
    NullForm,
    OutcomeKind,
    Scale,
    Scope,
    Severity,
    State,
    SupportiveKind,
)

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]


@dataclass(frozen=True, kw_only=True)
class Results:
    """The table of record: one row per hypothesis, in the order of the spec; then one per supportive analysis.

    NaN and "" stand for "none". What supports is ``described``, with nothing in the columns of a decision.
    """

    id: tuple[str, ...]
    family: tuple[str, ...]
    test: tuple[str, ...]
    n: Integers
    """Analysed units (pairs, for paired tests), all groups together."""
    estimate: Floats
    lower: Floats
    """Lower end of the unadjusted interval at ``interval_level``."""
    upper: Floats
    statistic: Floats
    df: Floats
    p: Floats
    """Unadjusted p-value of the null and alternative as stated."""
    p_family: Floats
    """Adjusted p within the family's procedure."""
    p_study: Floats
    """Smallest study level at which the whole scheme rejects."""
    threshold: Floats
    """What the value that decides had to meet: the level."""
    state: tuple[State, ...]
    decides: tuple[str, ...]
    """Which column was compared with the threshold: p_study, p_family, or "" where nothing was."""
    side_agrees: tuple[str, ...]
    """"yes" or "no": whether the estimate lies on the side the claim needs; "" where the claim has no side."""
    p_entered: Floats
    """The p-value that entered the procedure: p after the reading of the level; 1 where there is no result."""
    entered_as: tuple[EnteredAs, ...]
    """How ``p_entered`` follows from p: "as it is", "doubled" (one side, against a level shared by both), "claim side"
    (the p of the claim's side of a two-sided test) or "no result"."""
    rank: Integers
    """Rank of ``p_entered`` within its family, counted from 1; the step of the walk where a graph adjusts it."""
    factor: Floats
    """By how much the procedure multiplied it."""
    product: Floats
    from_rank: Integers
    """The rank whose product became the adjusted p."""
    n_first: Integers
    n_second: Integers
    """Analysed units of the second group; 0 where there is one group, or pairs."""
    standard_error: Floats
    interval_level: Floats
    """Confidence of the unadjusted interval."""
    matching_lower: Floats
    """Lower end of the simultaneous interval that matches the decisions, where one exists."""
    matching_upper: Floats
    matching_level: Floats
    survives_up_to: Integers
    """Largest number of hypotheses in the family for which a rejection would stand (the others with p = 1); 0 where
    there is no rejection."""

    __pydantic_config__ = {"arbitrary_types_allowed": True}  # noqa: RUF012 -- read by pydantic, for the arrays

    def __len__(self) -> int:
        return len(self.id)

    def row(self, index: int) -> dict[str, Any]:
        """Give one hypothesis as a mapping from column to plain Python value."""
        values = {column.name: getattr(self, column.name)[index] for column in fields(self)}
        return {name: value.item() if isinstance(value, np.generic) else value for name, value in values.items()}


@dataclass(frozen=True, kw_only=True)
class StudyRecord:
    """What the spec says of the study."""

    title: str
    identifier: str
    intent: Intent
    prepared_by: tuple[str, ...] = ()
    dated: str = ""
    protocol: str = ""


@dataclass(frozen=True, kw_only=True)
class PromiseRecord:
    """One promise: the study's, or that of a family which stands alone."""

    criterion: Criterion
    level: float
    level_text: str
    """The level as the spec writes it: "0.025" or "1/40"."""
    level_is: LevelIs | None = None
    """None where no member has a side."""


@dataclass(frozen=True, kw_only=True)
class InputRecord:
    """One checksummed input file."""

    id: str
    file: str
    """The path as the spec writes it."""
    bytes: int
    sha256: str
    rows: int = 0
    columns: int = 0
    content_sha256: str = ""
    """The content checksum: the same whatever the file format and the order of rows and columns; "" for scripts."""
    column_sha256: dict[str, str] = field(default_factory=dict)
    extra_columns: tuple[str, ...] = ()
    """Columns of the file that the spec does not declare."""
    missing_codes: tuple[str, ...] = ()


@dataclass(frozen=True, kw_only=True)
class ExclusionRecord:
    """One exclusion rule and what it took away."""

    where: str
    because: str
    known_at: str
    rows: int
    by_group: dict[str, int]
    undecided: int
    """Rows kept because the condition has no value for them."""
    undecided_lines: tuple[int, ...] = ()
    """The lines of the file on which they stand."""


@dataclass(frozen=True, kw_only=True)
class MissingRecord:
    """Missing values of one variable among the analysed rows."""

    variable: str
    rows: int
    by_group: dict[str, int]


@dataclass(frozen=True, kw_only=True)
class AnalysisSetRecord:
    """One analysis set."""

    id: str
    where: str
    principle: str
    rows: int
    by_group: dict[str, int]
    undecided: int = 0
    """Rows that do not belong because the condition has no value for them."""
    undecided_lines: tuple[int, ...] = ()
    """The lines of the file on which they stand."""


@dataclass(frozen=True, kw_only=True)
class OverlapRecord:
    """How many rows two analysis sets share."""

    first: str
    second: str
    both: int
    only_first: int
    only_second: int


@dataclass(frozen=True, kw_only=True)
class RowsRecord:
    """The flow of rows of one data set, by allocation group where one is declared."""

    data: str
    one_row_is: str
    allocated_by: str
    """The column whose groups the counts are by; "" where none is declared."""
    received: int
    received_by_group: dict[str, int]
    exclusions: tuple[ExclusionRecord, ...]
    analysed: int
    analysed_by_group: dict[str, int]
    missing: tuple[MissingRecord, ...]
    analysis_sets: tuple[AnalysisSetRecord, ...]
    overlaps: tuple[OverlapRecord, ...] = ()
    derived: dict[str, str] = field(default_factory=dict)
    """Derived columns and their expressions, as written."""


@dataclass(frozen=True, kw_only=True)
class SuccessRecord:
    """What a claim about several hypotheses of a family together came to."""

    at_least: int
    """How many null hypotheses have to be false for the family to succeed."""
    p: float
    """The joint p: (m - r + 1) x the r-th smallest p, where a member that can't count enters with p = 1."""
    level: float
    """The level at which the family was tested; 0 behind a closed gate."""
    reached: bool
    """Whether the joint p meets it."""


@dataclass(frozen=True, kw_only=True)
class FamilyRecord:
    """One family: what was promised, and what came of it."""

    id: str
    question: str
    purpose: str
    promise: PromiseRecord
    under_study_promise: bool
    """Whether the study's promise covers the family (otherwise its own does)."""
    procedure: str
    procedure_title: str
    procedure_options: dict[str, Any]
    given: dict[str, Any] = field(default_factory=dict)
    """What the procedure is replayed with beyond p and level: its options, and ingredients in the order of members."""
    multiples: bool = True
    """Whether every adjusted p comes from a multiple of a p-value."""
    level: float
    strong: bool
    valid_under: str
    no_intervals_because: str
    joint_intervals: bool = False
    """Whether the level of the simultaneous intervals is that of all of them together, not of each."""
    planned: int
    """m as planned."""
    computed: int
    """m as computed: members with a result."""
    members: tuple[str, ...]
    tested: bool
    closed_by: str
    """The family whose gate stayed closed; "" where the family was tested."""
    states: dict[State, int]
    """How many members are in each state; only states that occur."""
    success: SuccessRecord | None = None
    """What success of the family takes and came to; None where it is any rejection."""
    local_level: float | None = None
    """The level at which the family's procedure was run: 0 behind a closed gate; None where it is that of the promise,
    or where each member has its own."""


@dataclass(frozen=True, kw_only=True)
class GroupSummary:
    """A descriptive summary of one group of one test; statistics that don't apply are None."""

    group: str
    n: int
    missing: int
    mean: float | None = None
    sd: float | None = None
    median: float | None = None
    lower_quartile: float | None = None
    upper_quartile: float | None = None
    events: int | None = None
    exposure: float | None = None
    """The amount in which the events were counted, or the time until event or end of watching, in all."""


@dataclass(frozen=True, kw_only=True)
class HypothesisRecord:
    """One hypothesis in words; its numbers stand in the same row of ``tests.csv``."""

    id: str
    family: str
    label: str
    """A short name for figures and tables: "brush − standard"."""
    claim: str
    """The claim as the spec words it; "" where it has none."""
    null: str
    """The null hypothesis in symbols."""
    alternative: str
    """The alternative in symbols."""
    null_in_words: str
    alternative_in_words: str
    side: Alternative
    """Which side is judged, about first − second (or first / second): under a one-sided level the side of the claim."""
    claim_direction: ClaimDirection | None
    null_form: NullForm = "at"
    null_values: tuple[float, ...]
    """The value, or the two margins, of the null."""
    test: str
    test_title: str
    design: Design
    outcome_kind: OutcomeKind
    scale: Scale
    estimates: str
    """What the estimate is, in words: "difference in means"."""
    parameter: str
    """The same as a symbol, for the arithmetic: "μ₁ − μ₂"."""
    statistic_name: str
    outcome: str
    unit: str
    """Unit of the estimate; "" where it has none."""
    first: str
    second: str
    """Names of the groups; "" where there is none."""
    data: str
    analysis_set: str
    where: str
    missing_method: str
    missing_mechanism: str
    options: dict[str, Any]
    summaries: tuple[GroupSummary, ...]
    remarks: tuple[str, ...]
    no_result_because: str
    """Why there is no result; "" where there is one."""
    arithmetic: str = ""
    """Where the product of the decision trail comes from, in words, where it is no multiple of p."""
    undecided: int = 0
    """Rows not used because the condition of the hypothesis has no value for them."""
    origin: str = ""
    """Who computed a supplied result, with what."""
    margin_basis: str = ""
    waits_for: tuple[str, ...] | None = None
    """The nodes of a graph that would have to pass their share of the level on before the hypothesis is tested."""
    estimand: dict[str, str] = field(default_factory=dict)
    purpose: str = ""
    reason: str = ""
    beside: tuple[str, ...] = ()
    """What the test takes of each row beside the outcome, in words: "adjusted for baseline", "stratified by site"."""


@dataclass(frozen=True, kw_only=True)
class SupportiveRecord:
    """One analysis that supports a hypothesis and decides nothing; its numbers stand in its row of ``tests.csv``."""

    of: str
    """The hypothesis whose question it asks another way."""
    analysis: SupportiveKind
    because: str
    changes: tuple[str, ...]
    """What it does another way: "analysis set: per_protocol instead of full"."""
    hypothesis: HypothesisRecord
    """What was computed, in words; the id is that of the analysis."""
    p_read: float | None
    """Its unadjusted p as the level reads it, doubled or of the claim's side; None without a result."""
    read_as: EnteredAs
    """How ``p_read`` follows from p."""
    same_direction: bool | None
    """Whether both estimates lie on the same side of their null values; None where one of the two has no result."""
    same_side: bool | None
    """Whether both unadjusted p-values, as the level reads them, lie on the same side of the level."""


@dataclass(frozen=True, kw_only=True)
class DescribedGroup:
    """One column in one group; what does not apply, or is held back, is None or empty."""

    n: int
    """Values that are there."""
    missing: int
    mean: float | None = None
    sd: float | None = None
    median: float | None = None
    lower_quartile: float | None = None
    upper_quartile: float | None = None
    total: float | None = None
    """Of a count."""
    counts: tuple[int, ...] = ()
    """Of each level of a category, in the order of its levels."""
    earliest: str = ""
    """Of a date, where row values may be printed."""
    latest: str = ""


@dataclass(frozen=True, kw_only=True)
class DescribedColumn:
    """One described column."""

    column: str
    kind: DescribedKind
    unit: str
    levels: tuple[str, ...]
    groups: tuple[DescribedGroup, ...]
    """In the order of the groups of the table."""


@dataclass(frozen=True, kw_only=True)
class DescriptionRecord:
    """One table without any p-value."""

    id: str
    data: str
    analysis_set: str
    where: str
    undecided: int
    """Rows left out because the condition has no value for them."""
    by: str
    """The column of the groups; "" where there are none."""
    groups: tuple[str, ...]
    """The first, "", is all rows together."""
    rows: tuple[int, ...]
    """Rows in each group."""
    columns: tuple[DescribedColumn, ...]
    fewest: int
    """From how many values on a number is summarised: fewer could be worked out from the summary."""


@dataclass(frozen=True, kw_only=True)
class WarningRecord:
    """One finding of a warning rule."""

    rule: str
    severity: Severity
    scope: Scope
    evidence: EvidenceFrom
    about: str
    """The hypothesis, family or study it is about, by id."""
    fact: str
    number: str
    """What it costs, with the number."""
    why: str
    remedy: str
    ordinary_explanation: str
    answer: str = ""
    """The author's answer; "" where none was given."""


@dataclass(frozen=True, kw_only=True)
class AgreementRecord:
    """The largest disagreement of the two computations for one quantity."""

    quantity: str
    compared: int
    largest: float
    """Largest relative disagreement."""
    bound: float
    """What was accepted for the entry with the largest disagreement."""
    about: str
    """Where the largest disagreement stands; "" where there is none at all."""


@dataclass(frozen=True, kw_only=True)
class MethodRecord:
    """A test, a procedure or a scheme that the run used."""

    kind: str
    """"statistical test", "multiplicity procedure" or "scheme across families"."""
    name: str
    title: str
    reference: str
    assumes: tuple[str, ...]
    p_is: str
    """How its p is obtained; "" for procedures."""
    second_route: str
    """The second computation, and what it does not share with the first."""


@dataclass(frozen=True, kw_only=True)
class Record:
    """The whole record of one run; ``results`` is ``tests.csv``, everything else ``record.json``."""

    study: StudyRecord
    promise: PromiseRecord | None
    """The study-wide promise; None where each family keeps its own."""
    scheme: AcrossFamilies
    scheme_given: dict[str, Any] | None = None
    """What the plan says of the scheme: shares, truncations and weights, or a graph; None where it says nothing."""
    order: tuple[str, ...] = ()
    """The families that the study's promise covers, in the order in which they were tested."""
    inputs: tuple[InputRecord, ...]
    rows: tuple[RowsRecord, ...]
    families: tuple[FamilyRecord, ...]
    hypotheses: tuple[HypothesisRecord, ...]
    supportive: tuple[SupportiveRecord, ...] = ()
    """Analyses that support a hypothesis and decide nothing, in the order of the spec."""
    descriptions: tuple[DescriptionRecord, ...] = ()
    """Tables without any p-value."""
    warnings: tuple[WarningRecord, ...]
    unneeded_answers: tuple[str, ...]
    """Answers in the spec to warnings that did not fire."""
    agreement: tuple[AgreementRecord, ...]
    methods: tuple[MethodRecord, ...]
    drawn: dict[str, Any]
    """For each figure exactly the numbers it draws."""
    plan_sha256: str
    particulars_sha256: str
    data_sha256: str
    """SHA-256 of inputs-sha256.txt."""
    appendix_rows: int
    results: Results
