"""Columns that look like outcomes and that no hypothesis is about."""

from collections.abc import Iterator

from beforehand.data.wording import listed
from beforehand.multiplicity.survival import LARGEST_TRIED
from beforehand.record.model import FamilyRecord
from beforehand.snooping.contract import STUDY, Evidence, Finding, warning_rule
from beforehand.snooping.unmentioned import Unmentioned, unmentioned_columns
from beforehand.spelling import integer

SHOWN = 10  # names of columns, and of rejections, in one sentence


@warning_rule(
    title="Columns that look like outcomes and that no hypothesis is about",
    severity="note",
    scope="study",
    evidence="record",
    why=(
        "How many outcomes could have been tested decides what a rejection is worth; the record holds only those that "
        "were declared."
    ),
    basis="Common practice, no single source: the number of outcomes measured belongs beside those reported.",
    false_alarm_rate=0.0,
    measured_on=(
        "studies whose plan uses every column of its files or gives it a role; it rests on no chance, and speaks "
        "wherever another column is there"
    ),
)
def outcomes_without_hypothesis(evidence: Evidence) -> Iterator[Finding]:
    """Count the columns that look like outcomes and that the plan does not use.

    Declared numbers, counts and categories without a role or with that of an outcome, and all columns of the files that
    the spec does not declare; texts and dates don't count. Beside the count stands, for each rejection, the largest
    number of hypotheses in its family with which it would stand when the further ones have p = 1.

    Parameters
    ----------
    evidence : Evidence
        The plan, the data, and what came of them.

    Yields
    ------
    Finding
        About the study; none where every column is used.
    """
    found = unmentioned_columns(evidence.spec, evidence.dataset)
    if not found:
        return
    count = sum(one.count for one in found)
    yield Finding(
        about=STUDY,
        fact=" ".join(_fact(one) for one in found),
        number=" ".join(_numbers(evidence, count)) or "No hypothesis is rejected, so that no claim rests on the count.",
        remedy=(
            "Give columns that are no outcomes their role in the spec, and say in the scope of the claims which "
            "outcomes were measured and not tested."
        ),
        ordinary_explanation=(
            "Files hold columns that were recorded for another purpose, and specs leave roles out. Nothing in the "
            "record says that any of these columns was tested."
        ),
    )


def _fact(one: Unmentioned) -> str:
    columns = "1 column" if one.count == 1 else f"{one.count} columns"
    parts = []
    if one.declared:
        parts.append(listed(_quoted(one.declared), shown=SHOWN))
    if one.undeclared:
        parts.append(f"not declared in the spec: {listed(_quoted(one.undeclared), shown=SHOWN)}")
    return (
        f"Data set '{one.data}' has {columns} that could hold an outcome and that no hypothesis is about: "
        f"{'; '.join(parts)}."
    )


def _quoted(names: tuple[str, ...]) -> list[str]:
    return [f"'{name}'" for name in names]


def _numbers(evidence: Evidence, count: int) -> Iterator[str]:
    for family in evidence.families:
        stands = _survival(evidence, family)
        if stands:
            yield _number(family, stands, count)


def _survival(evidence: Evidence, family: FamilyRecord) -> dict[str, int]:
    """Give the largest family size of every rejection, the smallest first."""
    sizes = {member: int(evidence.results.survives_up_to[evidence.row[member]]) for member in family.members}
    return dict(sorted(((member, size) for member, size in sizes.items() if size), key=lambda item: item[1]))


def _number(family: FamilyRecord, stands: dict[str, int], count: int) -> str:
    grown = family.planned + count
    kept = sum(size >= grown for size in stands.values())
    sizes = [f"{member} up to {_size(size)}" for member, size in stands.items()]
    columns = "the column" if count == 1 else f"each of the {count} columns"
    rejections = "rejection" if len(stands) == 1 else "rejections"
    return (
        f"Had {columns} been one more hypothesis with p = 1, family '{family.id}' would have {integer(grown)} "
        f"hypotheses instead of {integer(family.planned)}, and {integer(kept)} of its {integer(len(stands))} "
        f"{rejections} would stand. Hypotheses with which each stands: {listed(sizes, shown=SHOWN)}."
    )


def _size(size: int) -> str:
    return f"{integer(size)}{' or more' if size >= LARGEST_TRIED else ''}"
