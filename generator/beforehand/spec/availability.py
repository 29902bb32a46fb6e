"""What has its place in the spec language and is not built yet: the one list, and how it is refused."""

from collections.abc import Iterator
from typing import Any

from pydantic import BaseModel

from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
from beforehand.multiplicity.contract import PROCEDURES
from beforehand.spec.places import Finding, Path

TESTS = (
    "chi_square", "cluster_t", "crossover_ratio",
    "crossover_t", "interaction", "left_censored_rank", "mixed_model",
    "trend",
)  # fmt: skip
PROCEDURES_LATER = (
    "closed_testing", "local_false_discovery_rate", "max_t", "min_p",
    "online_false_discovery_rate", "romano_wolf", "step_down_dunnett",
)  # fmt: skip

KEYS: dict[str, frozenset[str]] = {
    "Document": frozenset({"looks"}),
    "DataSet": frozenset({"feature", "samples"}),
    "Family": frozenset({"exploratory_after_gate", "dependence"}),
    "Graph": frozenset({"dependence"}),
    "_Promised": frozenset({"false_rejections", "false_share"}),
    "PerHypothesis": frozenset({
        "switch_to_superiority", "cluster", "random", "non_detect", "period", "sequence", "subject", "modifier",
        "truth",
    }),
    "HypothesesFrom": frozenset({"planned_at_most", "keep", "levels_of"}),
    "MissingValues": frozenset({"imputations", "using", "shift"}),
}  # fmt: skip

TAKEN_LATER: dict[str, tuple[str, ...]] = {"t_contrast": ("covariates",)}
"""What a test that is built will take of each row beside its outcome, and doesn't yet."""

WORDS: dict[tuple[str, str], tuple[str, ...]] = {
    ("DataSet", "rows_are"): ("features",),
    ("Promise", "criterion"): (
        "k_familywise_error_rate", "per_family_error_rate", "false_discovery_exceedance",
    ),
    ("StudyPromise", "criterion"): (
        "k_familywise_error_rate", "per_family_error_rate", "false_discovery_exceedance",
    ),
    ("Time", "ties"): ("breslow", "exact"),
    ("MissingValues", "method"): ("worst_case", "best_case", "multiple_imputation"),
    ("Graph", "local"): ("simes", "parametric"),
}  # fmt: skip

SUFFIXES = (".csv", ".tsv", ".csv.gz", ".tsv.gz")
SUFFIXES_LATER = (".parquet", ".xlsx", ".xpt")


def refusals(document: BaseModel) -> Iterator[Finding]:
    """Find what a sound spec uses and is not built."""
    yield from _within(document, ())


def _within(model: BaseModel, path: Path) -> Iterator[Finding]:
    for name, field in type(model).model_fields.items():
        if name not in model.model_fields_set:
            continue
        key, value = field.alias or name, getattr(model, name)
        if is_later(type(model), key):
            if value is not False:  # the default, written out
                yield Finding((*path, key), f"'{key}' is not available yet", at_key=True)
            continue
        yield from _word(model, key, value, (*path, key))
        yield from _below(value, (*path, key))


def is_later(model: type[BaseModel], key: str) -> bool:
    """Whether a key has its place and is not built yet."""
    return any(key in KEYS.get(kind.__name__, ()) for kind in model.__mro__)


def _below(value: Any, path: Path) -> Iterator[Finding]:
    if isinstance(value, BaseModel):
        yield from _within(value, path)
    elif isinstance(value, tuple):
        for place, item in enumerate(value):
            yield from _below(item, (*path, place))
    elif isinstance(value, dict):
        for key, item in value.items():
            yield from _below(item, (*path, key))


def _word(model: BaseModel, key: str, value: Any, path: Path) -> Iterator[Finding]:
    later = WORDS.get((type(model).__name__, key), ())
    if isinstance(value, str) and value in later:
        yield Finding(path, f"'{value}' for '{key}' is not available yet")
    elif key == "test" and value not in STATISTICAL_TESTS:
        yield Finding(path, f"the test '{value}' is not available yet")
    elif key == "procedure" and value not in PROCEDURES:
        yield Finding(path, f"the procedure '{value}' is not available yet")
    elif key == "file" and value.endswith(SUFFIXES_LATER):
        yield Finding(path, f"files such as '{value}' are not available yet. Save the table as .csv or .tsv.")
