"""Šidák's adjustment: an equal share of the level, for tests that are independent or normal and two-sided."""

import numpy as np

from beforehand.multiplicity.contract import FWER, IMPLIED_BY_FWER, WHOLE, Ascending, Steps, procedure
from beforehand.multiplicity.independent import VALID_UNDER, steps_of


@procedure(
    title="Šidák",
    controls=FWER,
    strong=True,
    valid_under=VALID_UNDER,
    intervals=None,
    no_intervals_because=(
        "Intervals at confidence (1 − level)^(1/m) each would match Šidák's decisions; this version prints only the "
        "unadjusted interval."
    ),
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    reference="Šidák (1967), Journal of the American Statistical Association 62:626-633",
)
def sidak(p: Ascending) -> Steps:
    """Adjust p-values by Šidák's single step: 1 - (1 - p)^m.

    Keeps the family-wise error rate strongly when the tests of true nulls are independent, where it is exact, and for
    two-sided tests of normal statistics with any correlation (Šidák 1967). Under other dependence it can err more
    often than the level; Bonferroni's adjustment needs no assumption and is hardly stricter.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.

    Returns
    -------
    Steps
        Per rank: no factor, product 1 - (1 - p)^m, adjusted p (the product).

    References
    ----------
    Šidák, Z. (1967). Rectangular confidence regions for the means of multivariate normal distributions. Journal of the
    American Statistical Association 62:626-633.
    """
    return steps_of(p, np.full(p.size, float(p.size)), taken=lambda product: np.arange(product.size))


def replay(p: list[float], level: float) -> dict[str, list[float] | list[bool]]:
    """Sidak by doubling: of j + k independent tests one errs with a + b - ab, where a and b belong to j and to k tests.

    Decisions compare the probability for all m tests with the level.
    """

    def at_least_one(value: float, tests: int) -> float:
        probability = 0.0
        while tests:
            if tests % 2:
                probability += value * (1 - probability)
            value += value * (1 - value)
            tests //= 2
        return min(1.0, probability)

    adjusted = [at_least_one(value, len(p)) for value in p]
    return {"adjusted": adjusted, "rejected": [value <= level * (1 + 1e-12) for value in adjusted]}
