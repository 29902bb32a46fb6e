"""How families hang together, in words: levels that are shared and passed on, and success by several rejections."""

from collections.abc import Iterable

from beforehand.record.model import FamilyRecord, Record
from beforehand.report.view.criteria import SCHEMES
from beforehand.report.view.lines import Line
from beforehand.report.view.model import Fact
from beforehand.spelling import calculated, exact, integer, short

OF_FAMILIES = (
    "Each family holds a share of the level, at which its own procedure is run; when every hypothesis of it is "
    "rejected, it passes its share on along arrows fixed in the spec."
)
SERIAL = (
    "The adjusted p of the study is the largest of the family's own and those of the families that must be rejected "
    "before it."
)
SHARED = "The adjusted p of the study is the family's own, divided by the family's share of the level."
FREED = (
    "The adjusted p of the study is the smallest level of the study at which the family holds so much of it that the "
    "hypothesis is rejected."
)
WALKED = (
    "The level rises from 0; a hypothesis falls when its p meets the share of the level that it holds, and passes that "
    "share on. Its factor is 1 / this share, its rank the step at which it falls; where an earlier step gave a larger "
    "result, that one counts."
)
NOTES = {"serial": SERIAL, "shares": SHARED, "parallel": FREED, "graph": FREED}


def sentence(record: Record) -> str:
    """Say how the families share the level."""
    of_families = record.scheme == "graph" and (record.scheme_given or {}).get("nodes_are") == "families"
    return OF_FAMILIES if of_families else SCHEMES[record.scheme]


def gate(family: FamilyRecord) -> str:
    """Say whether a family was tested, and at which level where that is its own."""
    if family.tested:
        return "tested" if family.local_level is None else f"tested at {exact(family.local_level)}"
    if not family.closed_by:
        return "not tested"
    return f"not tested: the gate of {family.closed_by} stayed closed"


def facts(family: FamilyRecord) -> Iterable[Fact]:
    """State the level that the scheme gave a family, and what success of it takes."""
    local = family.local_level
    if local is not None:
        share = f"{exact(local)}, which is {_share(family)} of {exact(family.level)}"
        yield Fact("Level it was tested at", share if local else "none: no level was passed on to it")
    if family.success:
        yield Fact("Success", f"at least {_of(family)} null hypotheses shown to be false")


def _of(family: FamilyRecord) -> str:
    least = family.success.at_least if family.success else 1
    return f"{integer(least)} of its {integer(family.planned)}"


def verdict(family: FamilyRecord) -> str:
    """Say whether a family succeeded that needs several rejections together; "" where any one is enough."""
    found = family.success
    if found is None:
        return ""
    takes = f"Success takes at least {_of(family)} null hypotheses to be false:"
    if not found.level:
        return f"{takes} not reached, because the family was not tested."
    sign, reached = ("≤", "reached") if found.reached else (">", "not reached")
    return f"{takes} {reached}, joint p {calculated(found.p, found.level)} {sign} {exact(found.level)}."


def is_walked(line: Line) -> bool:
    """Whether the scheme itself adjusts the hypothesis, so that its rank is a step of one walk over all families."""
    return line.family.procedure == line.scheme


def of_the_study(line: Line) -> str:
    """Write how the adjusted p of the study comes from that of the family."""
    study = calculated(line.number("p_study"), line.threshold)
    if line.scheme == "shares":
        return f"divided by the share {_share(line.family)}: {study}"
    if line.scheme in ("parallel", "graph"):
        return f"enough is held from {study} on"
    return f"families before: {study}"


def _share(family: FamilyRecord) -> str:
    return "1" if family.local_level is None else short(family.local_level / family.level)


def waiting(line: Line) -> str:
    """Say why a hypothesis was not tested."""
    if line.hypothesis.waits_for:
        return f"no share of the level reached it from {' or '.join(line.hypothesis.waits_for)}"
    closed = line.family.closed_by
    return f"the gate of family {closed} stayed closed" if closed else "its gate stayed closed"
