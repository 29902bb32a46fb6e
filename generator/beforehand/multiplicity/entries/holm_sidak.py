"""Holm's step-down procedure with Šidák's shares of the level."""

import numpy as np

from beforehand.multiplicity.contract import (
    FWER,
    IMPLIED_BY_FWER,
    WHOLE,
    Ascending,
    Steps,
    largest_so_far,
    procedure,
)
from beforehand.multiplicity.independent import VALID_UNDER, steps_of


@procedure(
    title="Holm-Šidák step-down",
    controls=FWER,
    strong=True,
    valid_under=VALID_UNDER,
    intervals=None,
    no_intervals_because=(
        "Simultaneous intervals that match step-down decisions end at the null value for every rejected hypothesis "
        "unless all are rejected, so only the unadjusted interval is printed."
    ),
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    reference="Holland & Copenhaver (1987), Biometrics 43:417-423",
)
def holm_sidak(p: Ascending) -> Steps:
    """Adjust p-values by the step-down procedure with Šidák's shares of the level.

    Keeps the family-wise error rate strongly where Šidák's inequality holds for every set of true nulls: for
    independent tests, and for two-sided tests of normal statistics with any correlation. Rejects whatever Holm's
    procedure and Šidák's adjustment do.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.

    Returns
    -------
    Steps
        Per rank: no factor, product 1 - (1 - p)^(m - i + 1), adjusted p (running maximum) and the rank it was taken
        from.

    References
    ----------
    Holland, B. S. & Copenhaver, M. D. (1987). An improved sequentially rejective Bonferroni test procedure. Biometrics
    43:417-423.
    """
    return steps_of(p, np.arange(p.size, 0, -1, dtype=np.float64), taken=largest_so_far)


def replay(p: list[float], level: float) -> dict[str, list[float] | list[bool]]:
    """Holm-Sidak by definition: the largest 1 - (1 - q)^(number of values not below q) over all values q up to p.

    The power by doubling: of j + k independent tests one errs with a + b - ab, where a and b belong to j and to k.
    Decisions walk up from the smallest p: that probability for all that are not yet rejected has to meet the level.
    """

    def at_least_one(value: float, tests: int) -> float:
        probability = 0.0
        while tests:
            if tests % 2:
                probability += value * (1 - probability)
            value += value * (1 - value)
            tests //= 2
        return min(1.0, probability)

    adjusted = {}
    not_below, largest = len(p), 0.0
    equal = dict.fromkeys(p, 0)
    for value in p:
        equal[value] += 1
    for value in sorted(equal):
        largest = max(largest, at_least_one(value, not_below))
        adjusted[value] = largest
        not_below -= equal[value]

    met = set()
    for step, value in enumerate(sorted(p)):
        if at_least_one(value, len(p) - step) > level * (1 + 1e-12):
            break
        met.add(value)
    return {"adjusted": [adjusted[value] for value in p], "rejected": [value in met for value in p]}
