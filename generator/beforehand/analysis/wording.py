"""A hypothesis in words: what it is called in tables, and what its null and alternative say."""

from collections.abc import Sequence

from beforehand.hypothesis_tests.contract import StatisticalTest
from beforehand.spec.load import Spec
from beforehand.spec.model import DataSet, EventOutcome, Hypothesis, PairOutcome
from beforehand.spelling import MINUS, short, with_unit
from beforehand.terms import Alternative

ABOUT = {
    "ratio": ("over", " / "),
    "difference": ("minus", f" {MINUS} "),
    "location": ("minus", f" {MINUS} "),
    "probability": ("against", " against "),
    "correlation": ("and", " and "),
}


def outcome_name(hypothesis: Hypothesis) -> str:
    """Name the outcome: "energy", "frost = yes", "alarms per openings", "wear and age", "days until state = failed"."""
    outcome, time = hypothesis.outcome, hypothesis.time
    if time:
        return f"{time.column} until {time.event.column} = {' or '.join(time.event.values)}"
    if hypothesis.exposure:
        return f"{outcome} per {hypothesis.exposure}"
    if isinstance(outcome, EventOutcome):
        return f"{outcome.column} = {' or '.join(outcome.values)}"
    if isinstance(outcome, PairOutcome):
        return f"{outcome.first} and {outcome.second}"
    return outcome or hypothesis.feature or ""


def sides(hypothesis: Hypothesis) -> tuple[str, ...]:
    """Name first and second, in this order; nothing where there is one sample."""
    if hypothesis.groups:
        return (hypothesis.groups.first, hypothesis.groups.second)
    if isinstance(hypothesis.outcome, PairOutcome):
        return (hypothesis.outcome.first, hypothesis.outcome.second)
    return ()


def unit_of(spec: Spec, hypothesis: Hypothesis, test: StatisticalTest[...]) -> str:
    """Give the unit of the estimate: that of the outcome, "per day" for a rate, and none for a ratio."""
    if test.scale not in ("difference", "location"):
        return ""
    outcome = hypothesis.outcome
    name = outcome.first if isinstance(outcome, PairOutcome) else outcome
    if not isinstance(name, str):
        return ""
    data = spec.data_set(hypothesis.data)
    unit = _unit(data, name)
    if hypothesis.exposure:
        unit = f"{unit} per {_unit(data, hypothesis.exposure) or hypothesis.exposure}"
    return unit.strip()


def _unit(data: DataSet, name: str) -> str:
    declared = data.columns.get(name) or data.derive.get(name)
    return (declared.unit if declared else None) or ""


def labels(members: Sequence[Hypothesis], tests: Sequence[StatisticalTest[...]]) -> list[str]:
    """Give each member of a family a short name of its own: only what tells the members apart."""
    outcomes = [outcome_name(member) for member in members]
    pairs = [_pair(member, test) for member, test in zip(members, tests, strict=True)]
    same_pair, same_outcome = len(set(pairs)) == 1, len(set(outcomes)) == 1
    made = [
        _label(outcome, pair, same_outcome=same_outcome, same_pair=same_pair)
        for outcome, pair in zip(outcomes, pairs, strict=True)
    ]
    return [label if made.count(label) == 1 else member.id for label, member in zip(made, members, strict=True)]


def _pair(hypothesis: Hypothesis, test: StatisticalTest[...]) -> str:
    """Write what is compared; in an association this is the outcome itself."""
    return "" if test.design == "association" else ABOUT.get(test.scale, ABOUT["difference"])[1].join(sides(hypothesis))


def _label(outcome: str, pair: str, *, same_outcome: bool, same_pair: bool) -> str:
    if not pair or (same_pair and not same_outcome):
        return outcome
    return pair if same_outcome else f"{outcome}: {pair}"


def in_words(hypothesis: Hypothesis, test: StatisticalTest[...], unit: str) -> str:
    """Name the quantity that the hypothesis is about: "the difference in means of energy (brush minus standard)"."""
    names = sides(hypothesis)
    about = ABOUT.get(test.scale, ABOUT["difference"])[0]
    pair = f" ({f' {about} '.join(names)})" if names else ""
    if test.design == "association":
        return f"the {test.estimates} of {outcome_name(hypothesis)}"
    outcome = "" if isinstance(hypothesis.outcome, PairOutcome) else f" of {outcome_name(hypothesis)}"
    return f"the {test.estimates}{outcome}{pair}" if test.design != "supplied" else f"the effect{outcome}"


def beside_in_words(hypothesis: Hypothesis) -> tuple[str, ...]:
    """Say what the test takes beside the outcome: "adjusted for baseline and region", "stratified by site"."""
    named = {
        "events counted per": (hypothesis.exposure,) if hypothesis.exposure else (),
        "adjusted for": hypothesis.covariates or (),
        "stratified by": hypothesis.strata or (),
    }
    return tuple(f"{words} {' and '.join(names)}" for words, names in named.items() if names)


def null_in_words(hypothesis: Hypothesis, test: StatisticalTest[...], unit: str) -> str:
    """Say what the null hypothesis says."""
    quantity, margins = in_words(hypothesis, test, unit), _margins(hypothesis, unit)
    match hypothesis.null_hypothesis.form:
        case "outside":
            return f"{quantity} is {margins[0]} or less, or {margins[1]} or more"
        case "inside":
            return f"{quantity} lies between {margins[0]} and {margins[1]}"
        case _:
            bounds = {"above": "is at most", "below": "is at least", "two_sided": "is"}
            return f"{quantity} {bounds[hypothesis.side]} {margins[0]}"


def alternative_in_words(hypothesis: Hypothesis, test: StatisticalTest[...], unit: str) -> str:
    """Say what is concluded when the null hypothesis is rejected."""
    quantity, margins = in_words(hypothesis, test, unit), _margins(hypothesis, unit)
    match hypothesis.null_hypothesis.form:
        case "outside":
            return f"{quantity} lies between {margins[0]} and {margins[1]}"
        case "inside":
            return f"{quantity} is below {margins[0]} or above {margins[1]}"
        case _:
            bounds: dict[Alternative, str] = {"above": "is above", "below": "is below", "two_sided": "is not"}
            return f"{quantity} {bounds[hypothesis.side]} {margins[0]}"


def _margins(hypothesis: Hypothesis, unit: str) -> list[str]:
    return [with_unit(short(margin), unit) for margin in hypothesis.null_hypothesis.margins]
