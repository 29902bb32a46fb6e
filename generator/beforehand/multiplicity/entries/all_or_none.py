"""All or none: the one claim is that every hypothesis of the family is rejected."""

import numpy as np

from beforehand.multiplicity.contract import FWER, IMPLIED_BY_FWER, WHOLE, Ascending, Steps, procedure


@procedure(
    title="All or none: every hypothesis at the full level, and all must be rejected",
    controls=FWER,
    strong=True,
    valid_under="any dependence",
    intervals=None,
    no_intervals_because=(
        "The claim is about all hypotheses together; the unadjusted interval of each matches its own test at the full "
        "level."
    ),
    replays=WHOLE,
    implies=IMPLIED_BY_FWER,
    reference="Berger (1982), Technometrics 24:295-300",
)
def all_or_none(p: Ascending) -> Steps:
    """Reject all hypotheses when the largest p meets the level, otherwise none.

    The null is that at least one hypothesis of the family is true. If one is, all are rejected only when its own p
    meets the level, so that happens with probability at most the level, under any dependence and with nothing adjusted
    (Berger 1982). A member is never claimed alone: that would be an unadjusted test. The price is power, which falls
    with every further hypothesis.

    Parameters
    ----------
    p : ndarray, shape (m,)
        Unadjusted p-values of one family, ascending.

    Returns
    -------
    Steps
        Per rank: factor 1, product p, adjusted p (the largest of all) and the last rank, from which it was taken.

    References
    ----------
    Berger, R. L. (1982). Multiparameter hypothesis testing and acceptance sampling. Technometrics 24:295-300.
    """
    return Steps.of(factor=np.ones(p.size), product=p, taken_from=np.full(p.size, max(p.size - 1, 0)))


def replay(p: list[float], level: float) -> dict[str, list[float] | list[bool]]:
    """All are rejected as long as no p is above the level; the joint p is the largest."""
    above = [value for value in p if value > level * (1 + 1e-12)]
    return {"adjusted": [max(p)] * len(p) if p else [], "rejected": [not above] * len(p)}
