"""Rows left out for a reason that became known after the groups were allocated."""

from collections.abc import Iterator

from beforehand.data.table import Excluded, Table
from beforehand.snooping.contract import Evidence, Finding, warning_rule
from beforehand.spelling import integer, percent


@warning_rule(
    title="Rows left out for a reason known only after allocation",
    severity="caution",
    scope="study",
    evidence="record",
    why=(
        "Allocation makes groups comparable; what happens afterwards may depend on the group, and leaving rows out by "
        "it can make groups differ that would not."
    ),
    basis="ICH E9 (1998), Statistical Principles for Clinical Trials, on the full analysis set",
    false_alarm_rate=0.0,
    measured_on="studies whose exclusions were all known before allocation; it rests on no chance",
)
def post_allocation_exclusion(evidence: Evidence) -> Iterator[Finding]:
    """Count the rows that rules with ``known_at: after_allocation`` took away, in each group.

    Parameters
    ----------
    evidence : Evidence
        The plan, the data, and what came of them.

    Yields
    ------
    Finding
        One about each data set in which such a rule took rows away.
    """
    for name, table in evidence.dataset.tables.items():
        late = [rule for rule in table.flow.exclusions if rule.known_at == "after_allocation" and rule.counts.rows]
        if not late:
            continue
        yield Finding(
            about=name,
            fact=" ".join(_fact(rule) for rule in late),
            number=_number(table, late),
            remedy=(
                "Analyse all allocated rows as the main analysis, or say why the reason cannot depend on the group; "
                "then show the result with these rows beside it."
            ),
            ordinary_explanation=(
                "Reasons that are found out late are often fixed early, such as a delivery date, or were judged by "
                "somebody who did not know the group."
            ),
        )


def _fact(rule: Excluded) -> str:
    rows = "1 row was" if rule.counts.rows == 1 else f"{integer(rule.counts.rows)} rows were"
    return f"{rows} left out because: {rule.because}. The plan says that this was known only after allocation."


def _number(table: Table, late: list[Excluded]) -> str:
    received = table.flow.received.by_group
    if not received:
        total = sum(rule.counts.rows for rule in late)
        return (
            f"{integer(total)} of {integer(table.flow.received.rows)} rows; the plan names no groups to count them in."
        )
    out = {group: sum(rule.counts.by_group.get(group, 0) for rule in late) for group in received}
    shares = {group: out[group] / count for group, count in received.items() if count}
    counts = ", ".join(f"{group} {integer(out[group])} of {integer(count)}" for group, count in received.items())
    return f"By group: {counts}; the shares differ by up to {percent(max(shares.values()) - min(shares.values()))}."
