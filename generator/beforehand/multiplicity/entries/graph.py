"""A graph of hypotheses: each is tested at its share of the level, and passes it on when it is rejected."""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from beforehand.multiplicity.contract import FWER, IMPLIED_BY_FWER, WHOLE, Ascending, Ranks, Steps, Vector, procedure
from beforehand.multiplicity.graph import Graph, walk


@procedure(
    title="Graph of weighted Bonferroni tests",
    controls=FWER,
    strong=True,
    valid_under="any dependence",
    intervals=None,
    no_intervals_because=(
        "Simultaneous intervals that match the decisions of a graph end at the null value for every rejected "
        "hypothesis unless all are rejected, so only the unadjusted interval is printed."
    ),
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    reference="Bretz, Maurer, Brannath & Posch (2009), Statistics in Medicine 28:586-604",
)
def graph(p: Ascending, *, weights: Vector, positions: Ranks, passes: ArrayLike) -> Steps:
    """Adjust p-values by a graph of weighted Bonferroni tests.

    Each hypothesis is rejected when its p meets the share of the level that it holds; it then leaves the graph and
    passes its share on along its arrows. This is a shortcut to closed testing with weighted Bonferroni tests, and keeps
    the family-wise error rate strongly under any dependence. In a spec the graph may span families: the study's scheme
    of the same name then adjusts all of them together.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.
    weights : ndarray, shape (m,)
        The shares of the level with which the hypotheses start, in the order of p; they sum to at most 1.
    positions : ndarray of int, shape (m,)
        The place of each hypothesis in the written order, from 0.
    passes : array_like, shape (m, m)
        The share that the hypothesis of the row passes to that of the column, both in the written order; the rows sum
        to at most 1.

    Returns
    -------
    Steps
        Per rank: factor 1 / (the share that it holds when its turn comes), product, adjusted p (the largest product so
        far in the order of the walk, capped at 1) and the rank it was taken from.

    References
    ----------
    Bretz, F., Maurer, W., Brannath, W. & Posch, M. (2009). A graphical approach to sequentially rejective multiple test
    procedures. Statistics in Medicine 28:586-604.
    """
    order = np.asarray(positions, dtype=np.intp)
    shares = np.asarray(passes, dtype=np.float64).reshape(order.size, order.size)
    walked = walk(Graph.of(weights, shares[np.ix_(order, order)]), p, passing=np.full(p.size, True))
    reached = walked.step > 0
    taken_from = np.arange(p.size)
    taken_from[reached] = np.array(walked.order, dtype=np.intp)[walked.taken_from[reached] - 1]
    return Steps.of(
        factor=1 / walked.weight,
        product=np.where(reached, walked.product, 1.0),
        taken_from=taken_from,
        arithmetic=["" if yes else "no share of the level reaches it" for yes in reached],
    )


def replay(
    p: list[float], level: float, weights: list[float], positions: list[int], passes: list[list[float]]
) -> dict[str, list[Any]]:
    """Reject in the order of the list by the update as it is printed; adjusted p by a level that rises from 0."""
    hypotheses = range(len(p))

    def fallen(top: float, rising: bool) -> dict[int, float]:
        w = list(weights)
        fell: dict[int, float] = {}
        g = [[float(passes[positions[i]][positions[k]]) for k in hypotheses] for i in hypotheses]
        while True:
            held = [i for i in hypotheses if i not in fell and w[i] > 0]
            met = [i for i in held if (p[i] / w[i] <= top if rising else p[i] <= w[i] * top * (1 + 1e-12))]
            if not met:
                if not rising or not held:
                    return fell
                top = min(p[i] / w[i] for i in held)
                continue
            i = met[0]
            fell[i] = top
            for k in hypotheses:
                w[k] += w[i] * g[i][k] if k not in fell else 0.0
            back = [1 - g[a][i] * g[i][a] for a in hypotheses]
            g = [
                [(g[a][k] + g[a][i] * g[i][k]) / back[a] if k != a and back[a] > 1e-14 else 0.0 for k in hypotheses]
                for a in hypotheses
            ]

    rejected, heights = fallen(level, False), fallen(0.0, True)
    return {
        "adjusted": [min(1.0, heights.get(i, 1.0)) for i in hypotheses],
        "rejected": [i in rejected for i in hypotheses],
    }
