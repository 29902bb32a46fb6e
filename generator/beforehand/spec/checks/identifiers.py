"""Whether every id is given once, and every id that is named is there."""

from collections.abc import Iterator

from beforehand.spec.checks.data_sets import columns_of
from beforehand.spec.hints import nearest
from beforehand.spec.model import Document, EventOutcome, PairOutcome
from beforehand.spec.places import Finding, Path
from beforehand.terms import WARNING_NAMES


def _ids(document: Document) -> Iterator[tuple[str, str, Path]]:
    for number, data_set in enumerate(document.data):
        yield data_set.id, f"data set '{data_set.id}'", ("data", number)
        for place, entry in enumerate(data_set.analysis_sets):
            yield entry.id, f"analysis set '{entry.id}'", ("data", number, "analysis_sets", place)
    for number, family in enumerate(document.families):
        yield family.id, f"family '{family.id}'", ("families", number)
        for place, hypothesis in enumerate(family.hypotheses or ()):
            yield hypothesis.id, f"hypothesis '{hypothesis.id}'", ("families", number, "hypotheses", place)
    for key, noun in _BESIDE.items():
        for place, item in enumerate(getattr(document, key)):
            yield item.id, f"{noun} '{item.id}'", (key, place)


_BESIDE = {
    "looks": "plan of looks",
    "supportive": "supportive analysis",
    "describe": "description",
    "assume": "assumption",
}


def check_ids(document: Document) -> Iterator[Finding]:
    """Check that no id is given twice in the whole spec."""
    names: dict[str, str] = {}
    for id, name, path in _ids(document):
        if id in names:
            yield Finding((*path, "id"), f"the id of {name} is already that of {names[id]}. Choose another.")
        names.setdefault(id, name)


def check_answers(document: Document) -> Iterator[Finding]:
    """Check that an answer is about a warning and a thing that there are."""
    ids = ["study", *(id for id, _, _ in _ids(document))]
    families = tuple(f"{family.id}/" for family in document.families)
    for place, answer in enumerate(document.answers):
        path: Path = ("answers", place)
        if answer.warning not in WARNING_NAMES:
            yield Finding(
                (*path, "warning"),
                f"no warning rule is called '{answer.warning}'. {nearest(answer.warning, WARNING_NAMES, 'name')}",
            )
        if answer.about and answer.about not in ids and not answer.about.startswith(families):
            yield Finding(
                (*path, "about"),
                f"an answer is about '{answer.about}', and no family, hypothesis or data set has this id. "
                + nearest(answer.about, ids),
            )


def check_assumptions(document: Document) -> Iterator[Finding]:
    """Check that what is assumed is about outcomes and levels that there are."""
    outcomes = list(dict.fromkeys(_outcomes(document)))
    levels = [
        level for data_set in document.data for known in columns_of(data_set).values() for level in known.levels or ()
    ]
    for place, assumption in enumerate(document.assume):
        for outcome, expected in assumption.outcomes.items():
            path: Path = ("assume", place, outcome)
            if outcome not in outcomes:
                yield Finding(
                    path,
                    f"assumption '{assumption.id}' is about '{outcome}', which is the outcome of no hypothesis. "
                    + nearest(outcome, outcomes),
                )
            for key in ("means", "sd", "rates", "n_per_group"):
                value = getattr(expected, key)
                for level in value if isinstance(value, dict) else ():
                    if level not in levels:
                        yield Finding(
                            (*path, key, level),
                            f"assumption '{assumption.id}' names the group '{level}', which is the level of no "
                            f"column. {nearest(level, levels)}",
                        )


def _outcomes(document: Document) -> Iterator[str]:
    for family in document.families:
        for written in family.written:
            outcome = getattr(written, "outcome", None)
            if isinstance(outcome, EventOutcome):
                yield outcome.column
            elif isinstance(outcome, PairOutcome):
                yield from (outcome.first, outcome.second)
            elif outcome:
                yield outcome
            elif written.time:
                yield written.time.column
            yield from getattr(written, "outcomes", None) or ()
