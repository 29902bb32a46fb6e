"""Null hypotheses of five forms, each judged by one-sided tests of any entry; and how they are written in symbols."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, StatisticalTest
from beforehand.spelling import MOST_DIGITS, short
from beforehand.terms import Alternative, NullForm

_SIDE: dict[str, Alternative] = {"at_most": "above", "at_least": "below"}
_MARGINS = {"at": 1, "at_most": 1, "at_least": 1, "outside": 2, "inside": 2}


@dataclass(frozen=True)
class Null:
    """What is to be rejected about θ, the difference first - second or the ratio first / second.

    ``at`` d: θ = d, rejected on the side of the alternative. ``at_most`` d: θ <= d, rejected above. ``at_least`` d:
    θ >= d, rejected below. ``outside`` a, b: θ <= a or θ >= b (equivalence). ``inside`` a, b: a <= θ <= b (minimum
    effect).

    Raises
    ------
    ValueError
        When the form is not one of the five, has another number of margins, or two that don't ascend.
    """

    form: NullForm = "at"
    values: tuple[float, ...] = (0.0,)

    def __post_init__(self) -> None:
        if self.form not in _MARGINS:
            raise ValueError(f"a null hypothesis is {', '.join(_MARGINS)}; found {self.form!r}")
        if len(self.values) != _MARGINS[self.form]:
            raise ValueError(f"the form {self.form} has {_MARGINS[self.form]} margins; found {len(self.values)}")
        if len(self.values) == 2 and not self.values[0] < self.values[1]:
            raise ValueError(f"the smaller margin comes first; found {self.values}")

    def side(self, alternative: Alternative | None) -> Alternative:
        """Give the side on which the null hypothesis is rejected.

        Raises
        ------
        ValueError
            When an alternative is named that the form does not have.
        """
        side = _SIDE.get(self.form, alternative or "two_sided")
        wrong = self.form == "outside" and side != "two_sided"
        if wrong or (alternative is not None and alternative != side):
            raise ValueError(f"the form {self.form} has its own side; found the alternative {alternative}")
        return side


def judge_null(
    entry: StatisticalTest[...],
    samples: Sequence[Any],
    *,
    null: Null,
    alternative: Alternative | None = None,
    confidence: float = 0.95,
    options: Mapping[str, Any] | None = None,
) -> Result:
    """Test a null hypothesis of any form.

    Parameters
    ----------
    entry : StatisticalTest
        The test.
    samples : sequence of ndarray
        As the test takes them.
    null : Null
        The null hypothesis, margins in the unit of the estimate (ratios as ratios).
    alternative : {"above", "below", "two_sided"}, optional
        For the form ``at`` (and for one side of ``inside``); the other forms have their own side.
    confidence : float
        Confidence of the two-sided interval. For ``outside`` with each side at level a it is 1 - 2a.
    options : mapping, optional
        The test's own options.

    Returns
    -------
    Outcome or NotComputed
        Estimate and interval as the test gives them. For ``outside`` the p of two one-sided tests is the larger one;
        for ``inside`` twice the smaller one, at most 1 (Bonferroni: it may be rejected on either side). Statistic and
        remarks are those of the side that decides p.

    Raises
    ------
    ValueError
        When the alternative doesn't fit the form, or a supplied p-value is to be judged against margins.

    References
    ----------
    Schuirmann (1987), Journal of Pharmacokinetics and Biopharmaceutics 15:657-680 (two one-sided tests).
    """
    if entry.design == "supplied" and null.form != "at":
        raise ValueError(f"a supplied p-value can't be judged against margins; found the form {null.form}")
    side = null.side(alternative)

    def ask(null_value: float, on: Alternative) -> Result:
        return entry(*samples, null_value=null_value, alternative=on, confidence=confidence, **(options or {}))

    if null.form in ("at", "at_most", "at_least"):
        return ask(null.values[0], side)
    if null.form == "inside" and side != "two_sided":
        return ask(null.values[1 if side == "above" else 0], side)
    upper = 0 if null.form == "outside" else 1  # outside is left upwards at its lower margin, inside at its upper one
    above, below = ask(null.values[upper], "above"), ask(null.values[1 - upper], "below")
    if isinstance(above, NotComputed) or isinstance(below, NotComputed):
        return above if isinstance(above, NotComputed) else below
    return _larger(above, below) if null.form == "outside" else _smaller_doubled(above, below)


def _larger(above: Outcome, below: Outcome) -> Outcome:
    return above if above.p >= below.p else below


def _smaller_doubled(above: Outcome, below: Outcome) -> Outcome:
    smaller = above if above.p <= below.p else below
    return replace(smaller, p=min(1.0, 2 * smaller.p))


def null_in_symbols(entry: StatisticalTest[...], null: Null, alternative: Alternative | None = None) -> str:
    """Write a null hypothesis: "μ₁ − μ₂ ≤ −2", "odds₁ / odds₂ ≤ 0.5 or odds₁ / odds₂ ≥ 2"."""
    side, theta, margins = null.side(alternative), entry.parameter, _written(null)
    match null.form:
        case "outside":
            return f"{theta} ≤ {margins[0]} or {theta} ≥ {margins[1]}"
        case "inside":
            return {
                "above": f"{theta} ≤ {margins[-1]}",
                "below": f"{theta} ≥ {margins[0]}",
                "two_sided": f"{margins[0]} ≤ {theta} ≤ {margins[-1]}",
            }[side]
        case _:
            return f"{theta} {({'above': '≤', 'below': '≥', 'two_sided': '='})[side]} {margins[0]}"


def alternative_in_symbols(entry: StatisticalTest[...], null: Null, alternative: Alternative | None = None) -> str:
    """Write what is concluded when the null hypothesis is rejected: "μ₁ − μ₂ > −2", "−2 < μ₁ − μ₂ < 2"."""
    side, theta, margins = null.side(alternative), entry.parameter, _written(null)
    match null.form:
        case "outside":
            return f"{margins[0]} < {theta} < {margins[1]}"
        case "inside":
            return {
                "above": f"{theta} > {margins[-1]}",
                "below": f"{theta} < {margins[0]}",
                "two_sided": f"{theta} < {margins[0]} or {theta} > {margins[-1]}",
            }[side]
        case _:
            return f"{theta} {({'above': '>', 'below': '<', 'two_sided': '≠'})[side]} {margins[0]}"


def _written(null: Null) -> list[str]:
    return [short(value, MOST_DIGITS - 1) for value in null.values]
