"""The tested pair of groups is the one that lies furthest apart."""

import math
from collections.abc import Iterator

from beforehand.record.model import FamilyRecord
from beforehand.snooping.contract import Evidence, Finding, warning_rule
from beforehand.snooping.extremes import among_all_pairs, level_of_extreme_pair
from beforehand.snooping.pairs import AmongGroups, chosen_pairs
from beforehand.spelling import number, p_value, percent, with_unit

REJECTED = ("rejected", "rejected_against_claim")


@warning_rule(
    title="The tested pair of groups is the one that lies furthest apart",
    severity="caution",
    scope="hypothesis",
    evidence="pattern",
    why=(
        "A pair that is chosen because it lies furthest apart is the largest of many differences: its unadjusted p "
        "and interval look better than they are, and the family counts one hypothesis where many were open."
    ),
    basis=(
        "Tukey (1953), The problem of multiple comparisons, Princeton University; Scheffé (1953), Biometrika "
        "40:87-104. The base rate follows from exchangeable groups."
    ),
    false_alarm_rate=0.167,
    measured_on=(
        "studies of four groups without differences and one planned two-sided pair, where it speaks most often (with a "
        "rejection, and so as a caution, in 3.3 %); with fewer groups, or all pairs of the column, it never speaks"
    ),
)
def extreme_pair_picked(evidence: Evidence) -> Iterator[Finding]:
    """Find tested pairs with the largest and the smallest of four or more observed groups.

    Groups are ordered by what the test compares: means, medians for rank tests, shares of events; on the rows that the
    hypothesis is about. The rule is silent where the family tests all pairs of the column for that outcome, or all
    pairs with one group. A pair counts as extreme when no other lies as far apart and the difference lies on a side on
    which the test rejects, so that a pair planned beforehand is extreme in at most 2 of k (k - 1) studies without
    differences (half of that for one side). It is a caution where the hypothesis is rejected and a note otherwise.

    The level of the unadjusted test comes from the studentized range; p among all pairs from Tukey-Kramer, Bonferroni
    and Scheffé, with the variance of all groups pooled (normal values, equal variances), for differences in means, and
    from Bonferroni alone for everything else.

    Parameters
    ----------
    evidence : Evidence
        The plan, the data, and what came of them.

    Yields
    ------
    Finding
        About the first hypothesis that rests on the pair, one for each outcome and pair.

    References
    ----------
    Tukey (1953), The problem of multiple comparisons, Princeton University. Kramer (1956), Biometrics 12:307-310.
    Scheffé (1953), Biometrika 40:87-104.
    """
    for family in evidence.families:
        choices = tuple(chosen_pairs(evidence.spec, evidence.spec.family(family.id), evidence.dataset))
        by_chance = min(1.0, sum(choice.by_chance for choice in choices))
        for choice in choices:
            extreme = [one for one in choice.hypotheses if _has_result(evidence, one) and one.is_extreme]
            if extreme:
                ordinary = _ordinary(extreme[0], len(choices), by_chance)
                yield _finding(evidence, family, extreme, tested=choice.tested, ordinary=ordinary)


def _has_result(evidence: Evidence, one: AmongGroups) -> bool:
    """Whether both groups of the pair were observed, and its test gave a p."""
    return not math.isnan(evidence.results.p[evidence.row[one.hypothesis.id]])


def _finding(
    evidence: Evidence, family: FamilyRecord, extreme: list[AmongGroups], *, tested: int, ordinary: str
) -> Finding:
    one = extreme[0]
    states = [evidence.results.state[evidence.row[other.hypothesis.id]] for other in extreme]
    return Finding(
        about=one.hypothesis.id,
        fact=_fact(evidence, family, extreme, tested),
        number=f"{_level(evidence, family, one)} {_among_all(evidence, family, one)}",
        remedy=(
            "Test all pairs of the column (pairs: all), or name the pair in a plan that is sealed before the data are "
            "seen; until then, read the p-values among all pairs beside the decision."
        ),
        ordinary_explanation=ordinary,
        severity=None if any(state in REJECTED for state in states) else "note",
    )


def _fact(evidence: Evidence, family: FamilyRecord, extreme: list[AmongGroups], tested: int) -> str:
    one = extreme[0]
    words = evidence.words[one.hypothesis.id]
    name = {"mean": "mean", "median": "median", "share": "share of events"}[one.measure]
    unit = words.unit if one.measure != "share" else ""
    high, low = sorted((one.pair.first, one.pair.second), key=one.centre, reverse=True)

    def written(group: str) -> str:
        value = one.centre(group)
        return percent(value) if one.measure == "share" else with_unit(number(value), unit)

    tests = " and ".join(other.hypothesis.id for other in extreme)
    return (
        f"Of the {len(one.groups)} observed groups of '{one.pair.column}', '{high}' has the largest {name} of "
        f"'{words.outcome}' ({written(high)}) and '{low}' the smallest ({written(low)}). This is the pair of {tests}; "
        f"family '{family.id}' tests {tested} of the {one.pairs} pairs for this outcome."
    )


def _per_side(family: FamilyRecord) -> float:
    return family.promise.level / (1 if family.promise.level_is == "one_sided" else 2)


def _level(evidence: Evidence, family: FamilyRecord, one: AmongGroups) -> str:
    """Say what level an unadjusted test has when it is made of the extreme pair."""
    per_side, k = _per_side(family), len(one.groups)
    df = float(evidence.results.df[evidence.row[one.hypothesis.id]])
    level = level_of_extreme_pair(k, per_side=per_side, df=math.inf if math.isnan(df) else df)
    nominal = f"two-sided test at {percent(2 * per_side)}"
    if one.side != "two_sided":
        nominal = f"one-sided test at {percent(per_side)}"
    same_n = one.measure == "mean" and len({values.size for values in one.groups.values()}) == 1
    return (
        f"An unadjusted {nominal} of whichever pair lies furthest apart rejects in {'' if same_n else 'up to '}about "
        f"{percent(level)} of studies in which the {k} groups don't differ."
    )


def _among_all(evidence: Evidence, family: FamilyRecord, one: AmongGroups) -> str:
    """Say what p is when every pair counts; two-sided throughout, for the side was open too."""
    threshold = 2 * _per_side(family)
    p = float(evidence.results.p[evidence.row[one.hypothesis.id]])
    if one.hypothesis.side != "two_sided":
        p = min(1.0, 2 * p)
    alone = f"Beside a two-sided level of {percent(threshold)}, p of this pair is {p_value(p, threshold)} by itself"
    bonferroni = f"{p_value(min(1.0, p * one.pairs), threshold)} (Bonferroni)"
    null = one.hypothesis.null_hypothesis
    if one.measure != "mean" or null.form == "inside" or p == 1:
        return f"{alone} and, among all {one.pairs} pairs, {bonferroni}."
    places = list(one.groups)
    adjusted = among_all_pairs(
        tuple(one.groups.values()),
        places.index(one.pair.first),
        places.index(one.pair.second),
        null_value=null.margins[0],
    )
    return (
        f"{alone}; among all {one.pairs} pairs {p_value(adjusted.tukey_kramer, threshold)} (Tukey-Kramer) or "
        f"{bonferroni}; among all contrasts {p_value(adjusted.scheffe, threshold)} (Scheffé)."
    )


def _ordinary(one: AmongGroups, choices: int, by_chance: float) -> str:
    side = "" if one.side == "two_sided" else ", on the side that is tested,"
    chance = f"in {percent(one.by_chance)} of studies (1 of {round(1 / one.by_chance)})"
    several = (
        f" The family rests on {choices} such choices; that at least one of them is extreme happens in up to "
        f"{percent(by_chance)}."
        if choices > 1
        else ""
    )
    return (
        f"The pair was planned and happens to lie furthest apart. When {len(one.groups)} groups don't differ, a pair "
        f"planned beforehand is the extreme one{side} {chance}; where the two planned groups are those that truly "
        f"differ most, it is so more often.{several}"
    )
