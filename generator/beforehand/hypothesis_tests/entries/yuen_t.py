"""Yuen's t-test: do the means of the middle values of two groups differ, whatever the variances."""

import math
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from beforehand.hypothesis_tests.contract import NotComputed, Result, Values, statistical_test
from beforehand.hypothesis_tests.refusals import count, first_reason, too_few, varies
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.student import moments, t_outcome
from beforehand.hypothesis_tests.student_again import exact_moments, t_outcome_again
from beforehand.terms import Alternative


@statistical_test(
    title="Yuen's t-test of trimmed means",
    design="two_groups",
    outcome="number",
    scale="difference",
    estimates="difference in trimmed means",
    parameter="μₜ₁ − μₜ₂",
    statistic="t",
    p_is="approximate",
    null="the difference in trimmed means (first - second) equals the null value",
    assumptions=(
        "the units are independent of each other",
        "the middle values of each group are so many that their mean is normally distributed",
    ),
    second_route=(
        "trimmed means, sums of squares and degrees of freedom in exact whole-number arithmetic on sorted lists, root "
        "with 50 digits, tail and quantile of Student's t by double exponential quadrature of its density; shares no "
        "formula and no special function with the first"
    ),
    bound=1e-9,
    reference="Yuen (1974), Biometrika 61:165-170",
)
def yuen_t(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    trim: float = 0.2,
) -> Result:
    """Test the difference between the trimmed means of two independent groups, each with its own variance.

    Parameters
    ----------
    first, second : ndarray, shapes (n1,) and (n2,)
        The outcome of the independent units of each group, same unit; at least two values of each stay.
    null_value : float
        The difference in trimmed means, first - second, under the null hypothesis, same unit.
    alternative : {"above", "below", "two_sided"}
        The side on which the difference is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    trim : float
        The share of values that is left out at each end of each group, from 0 to below 1/2, rounded down to a whole
        number of values. One fifth is the usual choice: it withstands that share of outliers at either end, and loses
        little where there are none. With 0 the test is Welch's.

    Returns
    -------
    Outcome or NotComputed
        The difference in trimmed means with its interval, t, the degrees of freedom (not rounded) and p. No result for
        too few values, a trim out of range, or when what stays of either group differs by no more than rounding.

    Notes
    -----
    Of n values g = ⌊trim n⌋ are left out at each end, h = n - 2 g stay. With s² the variance (divisor n - 1) of all n
    values after the lowest g have been set to the lowest that stays, and the highest g to the highest that stays, and
    d = (n - 1) s² / (h (h - 1)) for each group: t = (difference - null value) / √(d1 + d2), and
    df = (d1 + d2)² / (d1² / (h1 - 1) + d2² / (h2 - 1)). The interval holds exactly the null values that a two-sided
    test at 1 - confidence does not reject.

    A trimmed mean is neither the mean nor the median unless the distribution is symmetric: a spec should want the
    typical value, not the total. Values are trimmed for their place, not for being wrong; nothing is excluded.

    References
    ----------
    Yuen (1974), The two-sample trimmed t for unequal population variances, Biometrika 61:165-170.
    Tukey & McLaughlin (1963), Less vulnerable confidence and significance procedures for location based on a single
    sample: trimming/winsorization 1, Sankhya A 25:331-352 (the standard error).
    """
    one, two = Trimmed.of(first, trim), Trimmed.of(second, trim)
    if refusal := _refusal(one, two, trim):
        return refusal
    error = math.hypot(one.standard_error, two.standard_error)
    share = (one.standard_error / error) ** 2, (two.standard_error / error) ** 2
    return t_outcome(
        Asked(null_value=null_value, alternative=alternative, confidence=confidence),
        estimate=moments(one.stay).mean - moments(two.stay).mean,
        standard_error=error,
        df=1 / (share[0] ** 2 / (one.stay.size - 1) + share[1] ** 2 / (two.stay.size - 1)),
        n=(first.size, second.size),
        remarks=(_remark(one, two),),
    )


def second_route(
    first: Values,
    second: Values,
    *,
    null_value: float = 0.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    trim: float = 0.2,
) -> Result:
    """Compute the same by exact sums and quadrature; what is refused and how many are trimmed is shared."""
    one, two = Trimmed.of(first, trim), Trimmed.of(second, trim)
    if refusal := _refusal(one, two, trim):
        return refusal
    means, squares, stay = [], [], []
    for group, cut in ((first, one.cut), (second, two.cut)):
        ascending = sorted(group.tolist())
        middle = ascending[cut : len(ascending) - cut]
        pulled_in = [middle[0]] * cut + middle + [middle[-1]] * cut
        means.append(exact_moments(np.array(middle)).mean)
        squares.append(exact_moments(np.array(pulled_in)).squares / (len(middle) * (len(middle) - 1)))
        stay.append(len(middle))
    squared_error = sum(squares, Fraction(0))
    parts = [square**2 / (h - 1) for square, h in zip(squares, stay, strict=True)]
    return t_outcome_again(
        Asked(null_value=null_value, alternative=alternative, confidence=confidence),
        estimate=means[0] - means[1],
        squared_error=squared_error,
        df=squared_error**2 / sum(parts, Fraction(0)),
        n=(first.size, second.size),
        remarks=(_remark(one, two),),
    )


@dataclass(frozen=True)
class Trimmed:
    """One group: how many values are left out at each end, and those that stay, ascending."""

    cut: int
    stay: Values

    @classmethod
    def of(cls, values: Values, trim: float) -> "Trimmed":
        """Trim a group; the share counts as the decimal that was written, so 0.29 of 100 values are 29."""
        cut = math.floor(Fraction(repr(float(trim))) * values.size) if 0 <= trim < 0.5 else 0
        return cls(cut, np.sort(values)[cut : values.size - cut])

    @property
    def n(self) -> int:
        """How many values there were."""
        return self.stay.size + 2 * self.cut

    @property
    def standard_error(self) -> float:
        """The standard error of the trimmed mean, from the values pulled in to those that stay."""
        lowest, highest = np.repeat(self.stay[[0, -1]], self.cut).reshape(2, -1)
        sd = moments(np.concatenate([lowest, self.stay, highest])).sd
        return sd * math.sqrt((self.n - 1) / (self.stay.size * (self.stay.size - 1)))


def _remark(one: Trimmed, two: Trimmed) -> str:
    return (
        f"At each end {count(one.cut, 'value')} of the first group and {count(two.cut, 'value')} of the second are "
        "trimmed."
    )


def _refusal(one: Trimmed, two: Trimmed, trim: float) -> NotComputed | None:
    groups = {"first": one, "second": two}
    constant = [
        f"all {count(group.stay.size, 'value')} of the {word} group{', once trimmed,' if group.cut else ''} are equal"
        for word, group in groups.items()
        if not varies(group.stay)
    ]
    few = [
        too_few(group.stay.size, 2, noun="value", whose=f" of the {word} group{', once trimmed,' if group.cut else ''}")
        for word, group in groups.items()
    ]
    outside = None if 0 <= trim < 0.5 else f"trim lies between 0 and 1/2; the option says {trim}"
    return first_reason(outside, *few, "; ".join(constant) or None, n=(one.n, two.n))
