"""What procedures share that refer every statistic of a family to the distribution of the largest one."""

from collections.abc import Callable

import numpy as np

from beforehand.multiplicity.contract import Ascending, Steps, Vector


def by_largest(
    p: Ascending, *, tails: Vector, arithmetic: Callable[[int], str], critical: Callable[[float], Vector]
) -> Steps:
    """Take the tail of the largest statistic as adjusted p, in a single step.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.
    tails : ndarray, shape (m,)
        By rank, the chance that the largest statistic is as large as this one; 1 where there is no result.
    arithmetic : callable
        Gives for a rank what its tail is, in words.
    critical : callable
        Gives for a level above 0 and below 1/2 the threshold of the p-value of each rank.

    Returns
    -------
    Steps
        No rank has a factor. The largest of several is at least as large as one of them: where rounding, or a family
        of one hypothesis, puts a tail below its p, p counts.
    """
    return Steps.of(
        factor=np.full(p.size, np.nan),
        product=np.maximum(tails, p),
        taken_from=np.arange(p.size),
        arithmetic=tuple(arithmetic(rank) for rank in range(p.size)),
        critical=lambda level: critical(level) if 0 < level < 0.5 else np.full(p.size, np.nan),
    )
