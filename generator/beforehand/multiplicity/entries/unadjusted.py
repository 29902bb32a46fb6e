"""NO ADJUSTMENT: p-values as they are, for families that promise nothing together."""

import numpy as np

from beforehand.multiplicity.contract import PER_COMPARISON, WHOLE, Ascending, Steps, each_alone, procedure


@procedure(
    title="NOT ADJUSTED for multiplicity: only each comparison by itself keeps its error rate",
    controls=PER_COMPARISON,
    strong=True,
    valid_under="any dependence",
    intervals=None,
    no_intervals_because="Nothing is adjusted: the unadjusted interval matches each decision by itself.",
    replays=WHOLE,
    reference="Rothman (1990), Epidemiology 1:43-46",
)
def unadjusted(p: Ascending) -> Steps:
    """Leave every p-value as it is: NOTHING IS ADJUSTED.

    ONLY THE PER-COMPARISON ERROR RATE IS KEPT: each true null by itself is rejected with probability at most the
    level. The family is not: with m independent true nulls the probability of at least one error is 1 - (1 - level)^m
    (``unadjusted_error``), and about m x level errors are to be expected.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.

    Returns
    -------
    Steps
        Per rank: factor 1; product and adjusted p are p itself.

    References
    ----------
    Rothman, K. J. (1990). No adjustments are needed for multiple comparisons. Epidemiology 1:43-46.
    """
    return each_alone(p, factor=np.ones(p.size))


def replay(p: list[float], level: float) -> dict[str, list[float] | list[bool]]:
    """Nothing is adjusted: each p by itself meets the level or not."""
    return {"adjusted": list(p), "rejected": [value <= level * (1 + 1e-12) for value in p]}
