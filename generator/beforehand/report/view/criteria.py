"""Promises in words: the error rate, both readings of its level, its strength, and how families hang together."""

from beforehand.record.model import FamilyRecord, PromiseRecord, Record
from beforehand.spelling import percent
from beforehand.terms import CRITERION_WORDS, AcrossFamilies, Criterion

ABBREVIATIONS: dict[Criterion, str] = {"familywise_error_rate": "FWER", "false_discovery_rate": "FDR"}

MEANINGS: dict[Criterion, str] = {
    "familywise_error_rate": "the chance of one or more false rejections among all hypotheses that the promise covers",
    "k_familywise_error_rate": "the chance of k or more false rejections",
    "per_family_error_rate": "the number of false rejections to be expected",
    "per_comparison_error_rate": "the chance of a false rejection in each test by itself",
    "false_discovery_rate": "the share of false rejections to be expected among all rejections",
    "false_discovery_exceedance": "the chance that the share of false rejections is larger than the one stated",
}

SCHEMES: dict[AcrossFamilies, str] = {
    "serial": (
        "The families are tested in the order below, each at the full level. A family is tested only if every "
        "hypothesis of the one before it was rejected; a hypothesis without a result counts as not rejected."
    ),
    "parallel": (
        "The families are tested in the order below, each at the part of the level that the rejections in the "
        "families before it have set free."
    ),
    "shares": "The level is divided between the families in shares fixed in the spec.",
    "graph": (
        "Each hypothesis holds a share of the level; a rejected one passes its share on along arrows fixed in the spec."
    ),
    "separate": "Each family keeps its own promise; no level is shared or passed on between families.",
}


def level_readings(promise: PromiseRecord) -> str:
    """Write the level in both readings: "2.5 % one-sided = 5 % two-sided"."""
    level = promise.level
    if promise.level_is == "one_sided":
        return f"{percent(level)} one-sided = {percent(2 * level)} two-sided"
    if promise.level_is == "two_sided":
        return f"{percent(level)} two-sided = {percent(level / 2)} one-sided"
    return percent(level)


def criterion(promise: PromiseRecord) -> str:
    """Name an error rate with its abbreviation: "family-wise error rate (FWER)"."""
    words = CRITERION_WORDS[promise.criterion]
    short = ABBREVIATIONS.get(promise.criterion)
    return f"{words} ({short})" if short else words


def short_promise(promise: PromiseRecord) -> str:
    """Write a promise for a cell, after the abbreviation has been spelled out: "FWER ≤ 2.5 % one-sided"."""
    name = ABBREVIATIONS.get(promise.criterion, CRITERION_WORDS[promise.criterion])
    return f"{name} ≤ {level_readings(promise)}"


def promise_sentence(promise: PromiseRecord) -> str:
    """Write a promise as a sentence that spells out the error rate."""
    return f"The {criterion(promise)}, {MEANINGS[promise.criterion]}, is kept at or below {level_readings(promise)}."


def promises(record: Record) -> tuple[str, ...]:
    """Write each different promise of the study once, the study-wide one first."""
    own = [family.promise for family in record.families if not family.under_study_promise]
    all_promises = ([record.promise] if record.promise else []) + own
    return tuple(dict.fromkeys(promise_sentence(promise) for promise in all_promises))


def control(family: FamilyRecord) -> str:
    """Say under which null hypotheses the procedure keeps the error rate."""
    if is_unadjusted(family):
        return "of each test by itself, not over the family"
    if family.strong:
        return "strong: whichever nulls are true"
    return "weak: only if all nulls are true"


def is_unadjusted(family: FamilyRecord) -> bool:
    """Say whether the family's promise is about single tests, so that nothing is adjusted."""
    return family.promise.criterion == "per_comparison_error_rate"


def alarm(family: FamilyRecord) -> str:
    """Say loudly that nothing is adjusted, with the largest chance of a false rejection; "" where something is."""
    if not is_unadjusted(family):
        return ""
    largest = min(1.0, family.planned * family.level)
    return (
        f"Nothing is adjusted in this family. Each test runs a {percent(family.level)} chance of a false rejection by "
        f"itself; over its {family.planned} hypotheses the chance of at least one can reach {percent(largest)}."
    )
