"""One p-value for several hypotheses: that fewer than r nulls are false."""

from collections.abc import Callable
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

from beforehand.multiplicity.combination import Combined, bonferroni, checked, fisher, simes
from beforehand.multiplicity.contract import Ordered

COMBINE: dict[str, Callable[[Ordered], Combined]] = {"bonferroni": bonferroni, "simes": simes, "fisher": fisher}


def partial_conjunction(
    p: ArrayLike | Ordered, *, at_least: int, by: Literal["bonferroni", "simes", "fisher"] = "bonferroni"
) -> Combined:
    """Test that fewer than r of m nulls are false: a rejection says that at least r are.

    Whichever m - r + 1 nulls are true, the r - 1 smallest p-values can belong to false ones, so the m - r + 1 largest
    are combined.

    Parameters
    ----------
    p : array_like, shape (m,), or Ordered
        p-values, each uniform or larger under its null.
    at_least : int
        The number r of false nulls to be shown, from 1 to m.
    by : {"bonferroni", "simes", "fisher"}
        How the m - r + 1 largest are combined; ``bonferroni`` gives (m - r + 1) x p_(r).

    Returns
    -------
    Combined
        Valid under the same dependence as the combination.

    Raises
    ------
    ValueError
        When r isn't from 1 to m, or a p-value is outside 0 to 1.

    References
    ----------
    Benjamini, Y. & Heller, R. (2008). Screening for partial conjunction hypotheses. Biometrics 64:1215-1222.
    """
    ascending = checked(p)
    if not 1 <= at_least <= ascending.size:
        raise ValueError(
            f"of {ascending.size} null hypotheses from 1 to {ascending.size} can be false; found {at_least}"
        )
    largest = ascending[at_least - 1 :]
    combined = COMBINE[by](Ordered(largest, np.arange(largest.size)))
    return Combined(
        p=combined.p,
        statistic=combined.statistic,
        title=f"Partial conjunction of at least {at_least}, by {combined.title}",
        null=f"fewer than {at_least} of {ascending.size} null hypotheses are false",
        valid_under=combined.valid_under,
        reference=f"Benjamini & Heller (2008), Biometrics 64:1215-1222; {combined.reference}",
    )
