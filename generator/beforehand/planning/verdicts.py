"""Where a family's success and what it lets others have are different things."""

from beforehand.analysis.families import order_of, scheme_of
from beforehand.spec.model import AtLeast
from beforehand.spec.planned import PlannedFamily, Spec


def verdicts(spec: Spec) -> tuple[str, ...]:
    """Say of each family whose spec words its success what it takes to let others have their turn, where that differs.

    Success words the verdict of a family alone; only the scheme across families decides gates.
    """
    worded = [family.id for family in spec.document.families if "success" in family.model_fields_set]
    found = []
    for name in worded:
        family = spec.family(name)
        needed, succeeds = _needed(spec, family), _succeeds(family)
        if needed and needed != succeeds:
            opens = "all of it" if needed == family.planned else "any of it"
            found.append(
                f"Family '{name}' succeeds with {succeeds} of {family.planned} rejections, and lets others have their "
                f"turn when {opens} is rejected."
            )
    return tuple(found)


def _succeeds(family: PlannedFamily) -> int:
    if isinstance(family.success, AtLeast):
        return family.success.at_least
    return family.planned if family.success == "all" else 1


def _needed(spec: Spec, family: PlannedFamily) -> int:
    """Give how many rejections it takes to let others have anything; 0 where none waits for the family."""
    scheme, graph = scheme_of(spec), spec.document.graph
    if scheme in ("serial", "parallel") and family.id in order_of(spec)[:-1]:
        return family.planned if scheme == "serial" else 1
    of_families = graph is not None and graph.nodes_are == "families"
    senders = {one.from_ for one in graph.pass_} if graph and of_families else set()
    return family.planned if family.id in senders else 0
