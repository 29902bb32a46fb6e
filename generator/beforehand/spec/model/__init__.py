"""Every key of a spec, with what it means: the JSON Schema and the key reference are made from here."""

from beforehand.spec.model.data import (
    Allocated,
    AnalysisSet,
    ColumnSpec,
    DataSet,
    Derived,
    Exclusion,
    Samples,
)  # fmt: skip
from beforehand.spec.model.document import (
    Answer,
    Assumption,
    Change,
    Description,
    Document,
    Expected,
    Resampling,
    Study,
    Supportive,
)  # fmt: skip
from beforehand.spec.model.families import (
    AtLeast,
    Comparisons,
    Dependence,
    EachWith,
    Family,
    HypothesesFrom,
    Keep,
    Promise,
    StudyPromise,
)  # fmt: skip
from beforehand.spec.model.hypotheses import (
    Estimand,
    Event,
    EventOutcome,
    Groups,
    Hypothesis,
    Intervals,
    MarginBasis,
    MissingValues,
    NonDetect,
    NullHypothesis,
    Outcome,
    PairOutcome,
    PerHypothesis,
    RandomEffects,
    Setting,
    Time,
    WrittenHypothesis,
)  # fmt: skip
from beforehand.spec.model.scheme import (
    Efficacy,
    EventCount,
    Futility,
    Graph,
    InverseVariance,
    Looks,
    Passing,
)  # fmt: skip
from beforehand.spec.model.words import PARTICULAR, Exact, Keys

__all__ = [
    "PARTICULAR", "Allocated", "AnalysisSet", "Answer", "Assumption", "AtLeast", "Change", "ColumnSpec", "Comparisons",
    "DataSet", "Dependence", "Derived", "Description", "Document", "EachWith", "Efficacy", "Estimand", "Event",
    "EventCount", "EventOutcome", "Exact", "Exclusion", "Expected", "Family", "Futility", "Graph", "Groups",
    "HypothesesFrom", "Hypothesis", "Intervals", "InverseVariance", "Keep", "Keys", "Looks", "MarginBasis",
    "MissingValues", "NonDetect", "NullHypothesis", "Outcome", "PairOutcome", "Passing", "PerHypothesis", "Promise",
    "RandomEffects", "Resampling", "Samples", "Setting", "Study", "StudyPromise", "Supportive", "Time",
    "WrittenHypothesis",
]  # fmt: skip
