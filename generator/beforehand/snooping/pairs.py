"""A tested pair among all groups of its column: which were observed, and whether no other pair lies as far apart."""

from collections.abc import Callable, Hashable, Iterator
from dataclasses import dataclass
from typing import Literal

import numpy as np

from beforehand.data.dataset import Dataset
from beforehand.data.samples import take
from beforehand.errors import DataFault
from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
from beforehand.snooping.extremes import Values
from beforehand.spec.model import Groups, Hypothesis, MissingValues
from beforehand.spec.planned import PlannedFamily, Spec
from beforehand.terms import Alternative

FEWEST_GROUPS = 4
"""One planned pair of three is the extreme one in 33 % of studies without differences: too many to say anything."""

Measure = Literal["mean", "median", "share"]


@dataclass(frozen=True, kw_only=True)
class AmongGroups:
    """One hypothesis about two groups, beside the other groups of the same rows."""

    hypothesis: Hypothesis
    pair: Groups
    side: Alternative
    """The side on which first - second lies when the null hypothesis is rejected."""
    measure: Measure
    """What the groups are ordered by: what the test compares."""
    groups: dict[str, Values]
    """The values of every group that was observed, in the order of the declared levels."""

    @property
    def pairs(self) -> int:
        """How many pairs the observed groups form."""
        return len(self.groups) * (len(self.groups) - 1) // 2

    def centre(self, group: str) -> float:
        """Give the mean, the median or the share of events of one group."""
        values = self.groups[group]
        return float(np.median(values) if self.measure == "median" else np.mean(values))

    @property
    def is_extreme(self) -> bool:
        """Whether no other pair lies as far apart, and this one does so on a side on which its test rejects."""
        first, second = self.centre(self.pair.first), self.centre(self.pair.second)
        others = [self.centre(group) for group in self.groups if group not in (self.pair.first, self.pair.second)]
        above = second < min(others) and max(others) < first
        below = first < min(others) and max(others) < second
        return (above and self.side != "below") or (below and self.side != "above")

    @property
    def by_chance(self) -> float:
        """How often a pair planned beforehand is the extreme one, on its side, when no group differs."""
        return 1 / self.pairs if self.side == "two_sided" else 1 / (2 * self.pairs)


@dataclass(frozen=True, kw_only=True)
class Choice:
    """A pair of groups that a family tests for an outcome, where it could have tested others."""

    hypotheses: tuple[AmongGroups, ...]
    """All hypotheses that rest on it, at least one."""
    tested: int
    """How many pairs of the column the family tests for this outcome."""

    @property
    def by_chance(self) -> float:
        """How often a pair planned beforehand is the extreme one when no group differs."""
        return self.hypotheses[0].by_chance


def chosen_pairs(spec: Spec, family: PlannedFamily, dataset: Dataset) -> Iterator[Choice]:
    """Give every choice of a pair that a family makes.

    Nothing was chosen where there are fewer than four groups, where all pairs of the column are tested or all pairs
    with one group; and in a test of equivalence, for which the extreme pair is the hardest. Of a test that takes more
    of a row than its outcome (an exposure, covariates, strata, a time), outcomes alone don't tell how far apart groups
    lie: it is left out.

    Parameters
    ----------
    spec : Spec
        The plan, with the members that follow from the data.
    family : PlannedFamily
        One family of it.
    dataset : Dataset
        The data that were read for it.

    Yields
    ------
    Choice
        One for each outcome, column of groups and pair, in the order of the spec.
    """
    members = [member for member in family.members if _compares_two(member)]
    for same in _grouped(members, _outcome_of):
        tested = {_pair_of(member) for member in same}
        levels = _levels(spec, same[0])
        for beside in _grouped(same, _pair_of) if _is_choice(tested, levels) else ():
            among = [_among_groups(family, member, levels, dataset) for member in beside]
            resting = tuple(one for one in among if _is_choice(tested, tuple(one.groups)))
            if resting:
                yield Choice(hypotheses=resting, tested=len(tested))


def _grouped(members: list[Hypothesis], by: Callable[[Hypothesis], Hashable]) -> list[list[Hypothesis]]:
    groups: dict[Hashable, list[Hypothesis]] = {}
    for member in members:
        groups.setdefault(by(member), []).append(member)
    return list(groups.values())


def _compares_two(member: Hypothesis) -> bool:
    test = STATISTICAL_TESTS[member.test]
    compares = member.groups is not None and test.design in ("two_groups", "contrast") and not test.takes
    return compares and member.null_hypothesis.form != "outside"


def _groups_of(member: Hypothesis) -> Groups:
    assert member.groups is not None  # those without were left out at the beginning
    return member.groups


def _outcome_of(member: Hypothesis) -> Hashable:
    return (member.data, _groups_of(member).column, member.outcome)


def _pair_of(member: Hypothesis) -> frozenset[str]:
    return frozenset((_groups_of(member).first, _groups_of(member).second))


def _levels(spec: Spec, member: Hypothesis) -> tuple[str, ...]:
    declared, name = spec.data_set(member.data), _groups_of(member).column
    return (declared.columns.get(name) or declared.derive[name]).levels or ()


def _is_choice(tested: set[frozenset[str]], groups: tuple[str, ...]) -> bool:
    """Whether there are groups enough, and none of them is tested against every other one."""
    whole = any(all(frozenset((one, other)) in tested for other in groups if other != one) for one in groups)
    return len(groups) >= FEWEST_GROUPS and not whole


def _among_groups(family: PlannedFamily, member: Hypothesis, levels: tuple[str, ...], dataset: Dataset) -> AmongGroups:
    test = STATISTICAL_TESTS[member.test]
    return AmongGroups(
        hypothesis=member,
        pair=_groups_of(member),
        side=_side(family, member),
        measure="share" if test.outcome == "event" else "mean" if test.parameter.startswith("μ") else "median",
        groups=_observed(member, levels, dataset),
    )


def _side(family: PlannedFamily, member: Hypothesis) -> Alternative:
    """Give the side of a hypothesis; under a one-sided level a two-sided test enters with the side of its claim."""
    direction = member.claim_direction
    if member.side == "two_sided" and family.promise.level_is == "one_sided" and direction in ("above", "below"):
        return direction
    return member.side


def _observed(member: Hypothesis, levels: tuple[str, ...], dataset: Dataset) -> dict[str, Values]:
    """Take the values of every group from the rows that the hypothesis is about, incomplete ones left out.

    A group whose units repeat, or stand in the other group too, can't be set beside it and isn't counted.
    """
    pair = _groups_of(member)
    found = {}
    for level in levels:
        groups = Groups(column=pair.column, first=level, second=pair.first if level != pair.first else pair.second)
        asked = member.model_copy(update={"groups": groups, "missing_values": MissingValues()})
        try:
            values = take(dataset, asked).arrays[0]
        except DataFault:
            continue
        if values.size:
            found[level] = values.astype(np.float64)
    return found
