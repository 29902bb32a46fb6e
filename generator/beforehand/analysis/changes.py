"""What a supportive analysis does another way, in words."""

from collections.abc import Callable, Mapping

from beforehand.analysis.wording import outcome_name
from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
from beforehand.spec.model import Groups, Hypothesis, MissingValues, NullHypothesis, Setting
from beforehand.spelling import short


def changes_in_words(base: Hypothesis, changed: Hypothesis) -> tuple[str, ...]:
    """Name every change: "analysis set: per_protocol instead of full"."""
    said = {name: (say(base), say(changed)) for name, say in SAID.items()}
    found = [f"{name}: {after} instead of {before}" for name, (before, after) in said.items() if before != after]
    if base.test == changed.test and base.options != changed.options:
        found.append(f"options: {_options(changed.options)} instead of {_options(base.options)}")
    return tuple(found)


def _options(options: Mapping[str, Setting]) -> str:
    return ", ".join(f"{name} {value}".replace("_", " ") for name, value in sorted(options.items())) or "none"


def _groups(groups: Groups | None) -> str:
    return f"{groups.first} and {groups.second} of {groups.column}" if groups else "none"


def _null(null: NullHypothesis) -> str:
    return f"{null.form.replace('_', ' ')} {' to '.join(short(value) for value in null.margins)}"


def _missing(missing: MissingValues) -> str:
    said = missing.method.replace("_", " ")
    return f"{said} ({missing.mechanism})" if missing.mechanism else said


def _names(names: tuple[str, ...] | None) -> str:
    return ", ".join(names or ()) or "none"


SAID: dict[str, Callable[[Hypothesis], str]] = {
    "test": lambda one: STATISTICAL_TESTS[one.test].title,
    "data": lambda one: one.data,
    "analysis set": lambda one: one.analysis_set or "all rows",
    "rows": lambda one: one.where or "all",
    "outcome": outcome_name,
    "groups": lambda one: _groups(one.groups),
    "null hypothesis": lambda one: _null(one.null_hypothesis),
    "side": lambda one: one.side.replace("_", "-"),
    "missing values": lambda one: _missing(one.missing_values),
    "strata": lambda one: _names(one.strata),
    "covariates": lambda one: _names(one.covariates),
}
