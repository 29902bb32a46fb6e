"""A difference between two groups, adjusted for covariates: least squares by orthogonal columns."""

import math
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests.beside import Covariates
from beforehand.hypothesis_tests.contract import LARGEST, NotComputed, Values
from beforehand.hypothesis_tests.refusals import first_reason, too_few

Extended = NDArray[np.longdouble]

NOTHING_LEFT = 1e-6
"""A column of which no more than this share is left, once the earlier ones are taken out, is determined by them."""
NO_SCATTER = 1e-9
ALONE = 1e-9
"""A row whose leverage is nearer to 1 than this decides a coefficient alone."""


@dataclass(frozen=True)
class Column:
    """One column of the model, centred and in a unit of its own, and the covariate it comes from."""

    covariate: str
    values: Values


def columns_of(covariates: Covariates) -> Iterator[Column]:
    """Give the columns of the covariates: numbers as they are, each level of a category but its first as 1 and 0."""
    for name in covariates[0]:
        values = np.concatenate([group[name] for group in covariates])
        if values.dtype.kind == "f":
            yield Column(name, _centred(values))
        else:
            levels = np.unique(values)
            # a category with one level gives a constant column, which is refused by its name
            for level in levels[1:] if levels.size > 1 else levels:
                yield Column(name, _centred((values == level).astype(np.float64)))


def _centred(values: Values) -> Values:
    """Take the median off, and divide by a power of two: neither changes the comparison of the groups."""
    away = values - np.median(values)
    largest = float(np.abs(away).max(initial=0.0))
    scaled: Values = away / math.ldexp(1.0, math.frexp(largest)[1]) if largest else away
    return scaled


@dataclass(frozen=True)
class Fit:
    """The least squares fit of an outcome to two groups and covariates."""

    outcome: Values
    """In a unit in which no square overflows, from its median on."""
    unit: float
    sizes: tuple[int, int]
    columns: tuple[Column, ...]

    @classmethod
    def of(cls, first: Values, second: Values, covariates: Covariates) -> "Fit":
        """Lay out the model."""
        outcome = np.concatenate([first, second])
        largest = float(np.abs(outcome - np.median(outcome)).max(initial=0.0))
        unit = math.ldexp(1.0, math.frexp(largest)[1]) if largest else 1.0
        return cls(_centred(outcome), unit, (first.size, second.size), tuple(columns_of(covariates)))

    @property
    def n(self) -> int:
        """Rows."""
        return self.outcome.size

    @property
    def df(self) -> int:
        """Rows less coefficients: a mean, the difference of the groups, and one for each column."""
        return self.n - 2 - len(self.columns)

    @property
    def constant(self) -> Values:
        """The column of the mean."""
        return np.ones(self.n)

    @property
    def group(self) -> Values:
        """1 in the first group, 0 in the second."""
        return np.repeat([1.0, 0.0], self.sizes)

    @cached_property
    def others(self) -> tuple[Extended, ...]:
        """The mean and the covariates as columns of length 1, each orthogonal to the earlier ones."""
        return orthogonal([self.constant, *(column.values for column in self.columns)])

    @cached_property
    def own(self) -> Extended:
        """What of the group is left, once the mean and the covariates are taken out."""
        return taken_out(self.group.astype(np.longdouble), self.others)

    @cached_property
    def difference(self) -> float:
        """The adjusted difference, in the scaled unit."""
        return float((self.own @ self.outcome.astype(np.longdouble)) / (self.own @ self.own))

    @cached_property
    def residuals(self) -> Extended:
        """What of the outcome is left."""
        length: Extended = self.own / np.sqrt(self.own @ self.own)
        return taken_out(self.outcome.astype(np.longdouble), (*self.others, length))

    @cached_property
    def leverages(self) -> Values:
        """The weight that each row has in its own fitted value."""
        squares = [column**2 for column in (*self.others, self.own / np.sqrt(self.own @ self.own))]
        found: Values = np.sum(squares, axis=0).astype(np.float64)
        return found

    def error(self, errors: str) -> float:
        """Give the standard error of the difference in the unit of the outcome."""
        squared = self.residuals**2
        if errors == "classical":
            found = np.sqrt(squared.sum() / self.df / (self.own @ self.own))
        else:
            found = np.sqrt((self.own**2 * squared / (1 - self.leverages) ** 2).sum()) / (self.own @ self.own)
        return float(found) * self.unit


def orthogonal(columns: list[Values]) -> tuple[Extended, ...]:
    """Make columns orthogonal and of length 1, in the order given."""
    found: list[Extended] = []
    for column in columns:
        left = taken_out(column.astype(np.longdouble), tuple(found))
        found.append(left / np.sqrt(left @ left))
    return tuple(found)


def taken_out(values: Extended, columns: tuple[Any, ...]) -> Extended:
    """Take orthogonal columns out of values; twice, so that what is left is orthogonal to the last digit."""
    for _ in range(2):
        for column in columns:
            values = values - (column @ values) * column
    return values


def fitted(first: Values, second: Values, covariates: Covariates, errors: str) -> Fit | NotComputed:
    """Fit the model, or say why it can't be fitted, or its error not be estimated. Both routes ask here."""
    n = (first.size, second.size)
    refused = first_reason(
        too_few(n[0], 1, noun="row", whose=" of the first group"),
        too_few(n[1], 1, noun="row", whose=" of the second group"),
        *(_too_large(name, covariates) for name in covariates[0]),
        n=n,
    )
    if refused:
        return refused
    fit = Fit.of(first, second, covariates)
    coefficients = fit.n - fit.df
    too_small = too_few(fit.n, coefficients + 1, noun="row") if fit.df < 1 else None
    reason = too_small and f"{too_small} (the model has {coefficients} coefficients)"
    reason = reason or _determined(fit) or _unscattered(fit) or _decided_alone(fit, errors)
    return NotComputed(reason, n) if reason else fit


def _too_large(name: str, covariates: Covariates) -> str | None:
    values = np.concatenate([group[name] for group in covariates])
    if values.dtype.kind != "f" or (np.abs(values) < LARGEST).all():
        return None
    return f"the covariate '{name}' has a value that is too large to compute with"


def _determined(fit: Fit) -> str | None:
    """Name the first covariate that tells nothing new."""
    earlier = orthogonal([fit.constant, fit.group])
    for column in fit.columns:
        if not np.ptp(column.values):
            return f"the covariate '{column.covariate}' has the same value in all rows"
        from_mean = taken_out(column.values.astype(np.longdouble), earlier[:1])
        left = taken_out(from_mean, earlier)
        if np.sqrt(left @ left) <= NOTHING_LEFT * np.sqrt(from_mean @ from_mean):
            return (
                f"the covariate '{column.covariate}' follows from the groups and the covariates named before it: its "
                "effect can't be told from theirs"
            )
        earlier = (*earlier, left / np.sqrt(left @ left))
    return None


def _unscattered(fit: Fit) -> str | None:
    centred = taken_out(fit.outcome.astype(np.longdouble), orthogonal([fit.constant]))
    if np.sqrt(fit.residuals @ fit.residuals) > NO_SCATTER * np.sqrt(centred @ centred):
        return None
    return "groups and covariates explain the outcome exactly, so that no scatter is left to compare with"


def _decided_alone(fit: Fit, errors: str) -> str | None:
    alone = int((fit.leverages > 1 - ALONE).sum())
    if errors == "classical" or not alone:
        return None
    rows = "1 row decides" if alone == 1 else f"{alone} rows decide"
    return f"{rows} a coefficient alone, and then errors of this kind don't exist. Use errors: classical"
