"""Bonferroni's adjustment: every hypothesis gets an equal share of the level."""

import numpy as np

from beforehand.multiplicity.contract import FWER, IMPLIED_BY_FWER, WHOLE, Ascending, Steps, each_alone, procedure


@procedure(
    title="Bonferroni",
    controls=FWER,
    strong=True,
    valid_under="any dependence",
    intervals="bonferroni",
    replays=WHOLE,
    implies=("per_family_error_rate", *IMPLIED_BY_FWER),
    reference="Dunn (1961), Journal of the American Statistical Association 56:52-64",
)
def bonferroni(p: Ascending) -> Steps:
    """Adjust p-values by Bonferroni's single step: m times p.

    Keeps the family-wise error rate strongly, and the expected number of errors, under any dependence (Boole's
    inequality).

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.

    Returns
    -------
    Steps
        Per rank: factor m, product, adjusted p (the product, capped at 1).

    References
    ----------
    Dunn, O. J. (1961). Multiple comparisons among means. Journal of the American Statistical Association 56:52-64.
    """
    return each_alone(p, factor=np.full(p.size, float(p.size)))


def replay(p: list[float], level: float) -> dict[str, list[float] | list[bool]]:
    """Bonferroni by shares: each of the m hypotheses has the share 1/m of the level."""
    share = 1 / len(p) if p else 1.0
    return {
        "adjusted": [min(1.0, value / share) for value in p],
        "rejected": [value <= level * share * (1 + 1e-12) for value in p],
    }
