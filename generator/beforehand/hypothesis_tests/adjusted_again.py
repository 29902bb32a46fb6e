"""The second route of the adjusted difference: the normal equations in whole numbers and fractions.

Nothing here is shared with ``adjusted`` but what is refused: no centring, no orthogonal columns, no rounding until the
coefficients are known; then 60-digit decimals.
"""

from dataclasses import dataclass
from decimal import Context, Decimal
from fractions import Fraction
from functools import cached_property

from beforehand.hypothesis_tests.beside import Covariates
from beforehand.hypothesis_tests.contract import Values

SIXTY = Context(prec=60, Emin=-(10**9), Emax=10**9)
Row = list[int]


@dataclass(frozen=True)
class Equations:
    """The rows of the model as whole numbers: difference of the groups, mean, covariates, outcome.

    Each column is multiplied by a power of two of its own; ``unit`` is that of the outcome.
    """

    rows: list[Row]
    unit: int

    @classmethod
    def of(cls, first: Values, second: Values, covariates: Covariates) -> "Equations":
        """Write every number as a whole one."""
        columns = [[1] * len(first) + [0] * len(second), [1] * (len(first) + len(second))]
        for name in covariates[0]:
            values = [value for group in covariates for value in group[name].tolist()]
            if isinstance(values[0], float):
                columns.append(_whole(values)[0])
            else:
                columns += [[int(value == level) for value in values] for level in sorted(set(values))[:-1]]
        outcome, unit = _whole([*first.tolist(), *second.tolist()])
        return cls([list(row) for row in zip(*columns, outcome, strict=True)], unit)

    @property
    def k(self) -> int:
        """The number of coefficients."""
        return len(self.rows[0]) - 1

    @cached_property
    def products(self) -> list[Row]:
        """The sums of products of all columns, the outcome last."""
        size = range(self.k + 1)
        return [[sum(row[i] * row[j] for row in self.rows) for j in size] for i in size]

    @cached_property
    def inverse(self) -> list[list[Fraction]]:
        """The inverse of the products of the columns of the model, by Gauss and Jordan's elimination."""
        k = self.k
        left = [[Fraction(x) for x in line[:k]] + [Fraction(int(i == j)) for j in range(k)]
                for i, line in enumerate(self.products[:k])]  # fmt: skip
        for at in range(k):
            pivot = next(i for i in range(at, k) if left[i][at])
            left[at], left[pivot] = left[pivot], left[at]
            left[at] = [x / left[at][at] for x in left[at]]
            for i in range(k):
                if i != at and left[i][at]:
                    times = left[i][at]
                    left[i] = [x - times * y for x, y in zip(left[i], left[at], strict=True)]
        return [line[k:] for line in left]

    @cached_property
    def coefficients(self) -> list[Fraction]:
        """The coefficients of the scaled columns; that of the groups first."""
        right = [line[-1] for line in self.products[: self.k]]
        return [sum((a * b for a, b in zip(line, right, strict=True)), Fraction(0)) for line in self.inverse]

    @property
    def difference(self) -> Fraction:
        """The adjusted difference in the unit of the outcome."""
        return self.coefficients[0] / self.unit

    def squared_error(self, errors: str) -> Fraction:
        """Give the squared standard error of the difference."""
        if errors == "classical":
            explained = sum(
                (c * line[-1] for c, line in zip(self.coefficients, self.products[: self.k], strict=True)), Fraction(0)
            )
            variance = (self.products[-1][-1] - explained) / (len(self.rows) - self.k)
            return variance * self.inverse[0][0] / self.unit**2
        inverse = [[_decimal(x) for x in line] for line in self.inverse]
        coefficients = [_decimal(c) for c in self.coefficients]
        total = Decimal(0)
        for *row, outcome in self.rows:
            weights = [_dot(line, row) for line in inverse]
            residual = SIXTY.subtract(Decimal(outcome), _dot(coefficients, row))
            left = SIXTY.subtract(Decimal(1), _dot(weights, row))
            part = SIXTY.divide(SIXTY.multiply(weights[0], residual), left)
            total = SIXTY.add(total, SIXTY.multiply(part, part))
        return Fraction(total) / self.unit**2


def _whole(values: list[float]) -> tuple[Row, int]:
    """Write doubles as whole numbers over one power of two."""
    fractions = [Fraction(value) for value in values]
    below = max(value.denominator for value in fractions)
    return [value.numerator * (below // value.denominator) for value in fractions], below


def _decimal(value: Fraction) -> Decimal:
    return SIXTY.divide(Decimal(value.numerator), Decimal(value.denominator))


def _dot(line: list[Decimal], row: Row) -> Decimal:
    found = Decimal(0)
    for x, y in zip(line, row, strict=True):
        found = SIXTY.add(found, SIXTY.multiply(x, Decimal(y)))
    return found
