"""The one place that decides."""

from typing import overload

import numpy as np
from numpy.typing import NDArray

# A p-value that equals its threshold in exact arithmetic must be rejected although both carry rounding error.
TOLERANCE = 1e-12


@overload
def is_rejected(value: float, threshold: float) -> bool: ...
@overload
def is_rejected(value: NDArray[np.float64], threshold: float | NDArray[np.float64]) -> NDArray[np.bool_]: ...
def is_rejected(value: float | NDArray[np.float64], threshold: float | NDArray[np.float64]) -> bool | NDArray[np.bool_]:
    """Reject if and only if value <= threshold x (1 + 1e-12).

    Parameters
    ----------
    value : float or ndarray
        Adjusted p-values, or p-values where the scheme has no adjusted ones.
    threshold : float or ndarray
        The level, or the threshold that applied to each.

    Returns
    -------
    bool or ndarray of bool
        Whether each is rejected.
    """
    decided = np.asarray(value) <= np.asarray(threshold) * (1 + TOLERANCE)
    return bool(decided) if decided.ndim == 0 else decided
