"""Storey's q-values: Benjamini and Hochberg's adjustment times an estimate of the share of true nulls."""

import numpy as np

from beforehand.multiplicity.contract import (
    FDR,
    WHOLE,
    Ascending,
    Steps,
    Words,
    procedure,
    smallest_from_here,
)
from beforehand.multiplicity.true_nulls import Way, share_of_true_nulls


@procedure(
    title="Storey's q-values",
    controls=FDR,
    strong=True,
    valid_under=(
        "independence or weak dependence and many hypotheses, for the control is asymptotic; with null_share: "
        "from_half, independence and any number"
    ),
    intervals=None,
    no_intervals_because=(
        "A false discovery rate has no simultaneous intervals; the unadjusted interval is printed, and it is not "
        "adjusted for having been selected."
    ),
    replays=WHOLE,
    monotone=False,
    reference="Storey (2002), Journal of the Royal Statistical Society B 64:479-498",
)
def storey_q(p: Ascending, *, null_share: Way = "smoother") -> Steps:
    """Adjust p-values by Storey's q-values: the Benjamini-Hochberg adjustment times the estimated share of true nulls.

    Keeps the false discovery rate asymptotically, for many hypotheses that are independent or weakly dependent (Storey,
    Taylor & Siegmund 2004); below about a hundred the estimate is too uncertain for a promise. ``from_half`` keeps it
    for any number of independent hypotheses: it rejects none with p above 0.5, and its estimate can be above 1, where
    it asks for more than Benjamini and Hochberg's procedure. A q-value can be smaller than p; and because the share is
    estimated, raising one p can lower the q-value of another.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.
    null_share : {"smoother", "bootstrap", "from_half"}
        How the share of true nulls is estimated: smoothed over 19 points and read at 0.95; at the one of these points
        with the smallest mean squared error; or from the p-values above 0.5, and one more. All three are fixed
        functions of p.

    Returns
    -------
    Steps
        Per rank: factor (share of true nulls) x m / i, product, adjusted p (running minimum from the largest rank,
        capped at 1) and the rank it was taken from.

    References
    ----------
    Storey, J. D. (2002). A direct approach to false discovery rates. Journal of the Royal Statistical Society B
    64:479-498.
    Storey, J. D. & Tibshirani, R. (2003). Statistical significance for genomewide studies. Proceedings of the National
    Academy of Sciences 100:9440-9445.
    Storey, J. D., Taylor, J. E. & Siegmund, D. (2004). Strong control, conservative point estimation and simultaneous
    conservative consistency of false discovery rates. Journal of the Royal Statistical Society B 66:187-205.
    """
    factor = share_of_true_nulls(p, null_share) * (p.size / np.arange(1.0, p.size + 1))
    if null_share == "from_half":
        factor[p > 0.5] = np.nan
    product = np.where(np.isnan(factor), 1.0, factor * p)
    return Steps.of(
        factor=factor,
        product=product,
        taken_from=smallest_from_here(product),
        arithmetic=Words(factor, lambda _: "above 0.5, so not rejected at any level"),
        critical=lambda level: np.where(np.isnan(factor), 0.0, level / factor),
    )


def replay(p: list[float], level: float, null_share: str = "smoother") -> dict[str, list[float] | list[bool]]:
    """Storey by definition: m0 x q / (number of values up to q), the smallest over all q from p on; m0 estimated again.

    The smoothing spline by Reinsch's equations. Decisions walk up the staircase of thresholds level x rank / m0.
    """
    m, ascending = len(p), sorted(p)
    points = [k / 20 for k in range(1, 20)]
    beyond = [sum(value >= point for value in p) for point in points]
    counts = [n / (1 - point) for n, point in zip(beyond, points)]  # noqa: B905 -- read by Python 3.8 too
    if null_share == "from_half":
        m0 = 2.0 * (sum(value > 0.5 for value in p) + 1)
    elif null_share == "bootstrap":
        in_order = sorted(counts)
        tenth = in_order[1] + 0.8 * (in_order[2] - in_order[1])  # the tenth percentile of 19 values
        error = [
            n / (1 - point) ** 2 * (1 - n / max(m, 1)) + (count - tenth) ** 2
            for n, point, count in zip(beyond, points, counts)  # noqa: B905
        ]
        m0 = counts[error.index(min(error))]
    else:
        # (R + w Q'Q) g = Q'y, and the fitted end is y - w g: w is the weight at which the trace of the smoother is 3
        w, size = 125.76032706841322, 17
        rows = [[0.0] * size + [counts[i] - 2 * counts[i + 1] + counts[i + 2]] for i in range(size)]
        for i in range(size):
            for j, entry in ((i, 2 / 3 + 6 * w), (i + 1, 1 / 6 - 4 * w), (i + 2, w)):
                if j < size:
                    rows[i][j] = rows[j][i] = entry
        for i in range(size):
            for j in range(i + 1, min(i + 3, size)):
                times = rows[j][i] / rows[i][i]
                rows[j] = [a - times * b for a, b in zip(rows[j], rows[i])]  # noqa: B905
        m0 = counts[-1] - w * rows[-1][-1] / rows[-1][-2]
    if null_share != "from_half":  # which may be above m, and has to be left there
        m0 = min(max(m0, 1.0), float(m))

    highest = 0.5 if null_share == "from_half" else 1.0
    adjusted, smallest = {}, 1.0
    for i in range(m - 1, -1, -1):
        if ascending[i] <= highest:
            smallest = min(smallest, m0 * ascending[i] / (i + 1))
        adjusted[ascending[i]] = smallest
    met = [ascending[i] for i in range(m) if ascending[i] <= min(highest, level * (i + 1) / m0 * (1 + 1e-12))]
    largest = met[-1] if met else -1.0
    return {"adjusted": [adjusted[value] for value in p], "rejected": [value <= largest for value in p]}
