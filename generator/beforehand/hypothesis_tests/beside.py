"""What a test may need of each row beside its outcome: an exposure, covariates, strata, the time until an event.

Each stands in the shape of the samples: one entry for each group, aligned with its outcomes.
"""

from collections.abc import Mapping
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

Values = NDArray[np.float64]
Word = Literal["exposure", "covariates", "strata", "time"]

BESIDE: tuple[Word, ...] = ("exposure", "covariates", "strata", "time")

Exposure = tuple[Values, ...]
"""For how long, over how far, in how many: the amount in which the events of a row were counted; above 0."""
Covariates = tuple[Mapping[str, NDArray[Any]], ...]
"""By the name of their column: numbers, or the levels of a category as text; the same names for each group."""
Strata = tuple[NDArray[Any], ...]
"""The stratum of each row, as text or as a whole number."""
Time = tuple[Values, ...]
"""The time of the event, or the last time at which a row was seen without it; 0 or more."""


def checked_beside(word: Word, given: Any, sizes: tuple[int, ...]) -> Any:
    """Turn what is given beside the samples into aligned arrays.

    Raises
    ------
    ValueError
        When there is not one entry for each group, aligned with its outcomes; when a value is missing; when an
        exposure is not above 0 or a time below it.
    """
    if not isinstance(given, tuple | list) or len(given) != len(sizes):
        raise ValueError(
            f"{word} has one entry for each group, aligned with its outcomes; found {type(given).__name__}"
        )
    if word != "covariates":
        return tuple(_column(word, column, size) for column, size in zip(given, sizes, strict=True))
    if len({tuple(one) for one in given}) > 1:
        raise ValueError(f"every group has the same covariates; found {' and '.join(str(list(one)) for one in given)}")
    return tuple(
        {name: _column(word, column, size) for name, column in one.items()}
        for one, size in zip(given, sizes, strict=True)
    )


def _column(word: Word, column: Any, size: int) -> NDArray[Any]:
    array = np.asarray(column)
    if array.dtype.kind in "biuf" and word != "strata":
        array = array.astype(np.float64)
    elif word in ("exposure", "time") and size:
        raise ValueError(f"{word} is a number; found {array.dtype}")
    elif array.dtype.kind == "O":
        array = _text(word, array)
    if array.shape != (size,):
        raise ValueError(f"{word} has one value for each outcome; found the shape {array.shape} beside {size} outcomes")
    if array.dtype.kind == "f":
        _check_numbers(word, array)
    return array


def _text(word: Word, array: NDArray[Any]) -> NDArray[Any]:
    if not all(isinstance(value, str) for value in array.flat):
        raise ValueError(f"{word} holds texts or numbers, and no missing value")
    return array.astype(np.str_)


def _check_numbers(word: Word, array: Values) -> None:
    if not np.isfinite(array).all():
        raise ValueError(f"{word} holds finite numbers, and no missing value")
    if word == "exposure" and (array <= 0).any():
        raise ValueError(f"an exposure is above 0; found {array.min()!r}")
    if word == "time" and (array < 0).any():
        raise ValueError(f"a time is 0 or more; found {array.min()!r}")


def strata_numbers(strata: Strata) -> tuple[NDArray[np.intp], ...]:
    """Give the strata of all groups a common number each, from 0, in the order of their names."""
    _, numbers = np.unique(np.concatenate(strata), return_inverse=True)
    return tuple(np.split(numbers.astype(np.intp), np.cumsum([group.size for group in strata])[:-1]))
