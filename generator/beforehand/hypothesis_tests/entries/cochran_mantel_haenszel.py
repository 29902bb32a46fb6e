"""Cochran-Mantel-Haenszel test: is an event more, or less, frequent in one group than in another, within strata."""

import math
from decimal import Decimal
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from beforehand.hypothesis_tests import stratified, stratified_again
from beforehand.hypothesis_tests.beside import Strata
from beforehand.hypothesis_tests.contract import NotComputed, Outcome, Result, statistical_test
from beforehand.hypothesis_tests.rank_methods import SizeRule
from beforehand.hypothesis_tests.refusals import first_reason, too_few
from beforehand.hypothesis_tests.sides import Asked
from beforehand.hypothesis_tests.stratified import Judged, MantelHaenszel, equal_ratios, informative, tables_of
from beforehand.hypothesis_tests.two_by_two import Table
from beforehand.spelling import integer
from beforehand.terms import Alternative

Events = NDArray[np.bool_]
Method = Literal["by_size", "exact", "score", "mantel_haenszel"]

# Two strata of 1,000 units take 0.1 s, ten of 200 half a second, twice.
RULE = SizeRule("units", by_size=2_000, at_most=10_000)
AT_LEAST = "The first group has as few events as it can have in every stratum: estimate and lower end are 0."
AT_MOST = "The first group has as many events as it can have in every stratum: estimate and upper end are infinite."


@statistical_test(
    title="Cochran-Mantel-Haenszel test",
    design="two_groups",
    outcome="event",
    scale="ratio",
    estimates="common odds ratio",
    parameter="odds₁ / odds₂",
    statistic="events in the first group",
    p_is=f"exact, given both margins of each table, up to {integer(RULE.by_size)} units; by the normal score beyond",
    null="in every stratum the odds ratio equals the null value (1: the event is equally frequent in both groups)",
    assumptions=(
        "the units are independent of each other",
        "within a stratum every unit of a group has the same probability of the event, or the groups were formed at "
        "random within strata",
        "the odds ratio is the same in all strata (for the null value 1 it is enough that it lies on one side)",
    ),
    second_route=(
        "tables counted row by row, weights and their products in 40-digit decimal arithmetic, upper ends from the "
        "groups exchanged, the estimate of Mantel and Haenszel as a fraction; shares no logarithm of a weight, no "
        "floating-point sum and no root finder with the first"
    ),
    bound=1e-9,
    reference=(
        "Mantel and Haenszel (1959), Journal of the National Cancer Institute 22:719-748; Gart (1970), Biometrika "
        "57:471-475"
    ),
)
def cochran_mantel_haenszel(
    first: Events,
    second: Events,
    *,
    strata: Strata,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "by_size",
    continuity: bool = True,
) -> Result:
    """Test the odds ratio of an event in two groups that is common to all strata.

    Parameters
    ----------
    first, second : ndarray of bool, shapes (n1,) and (n2,)
        Whether the event happened to each independent unit of the group.
    strata : tuple of two ndarrays, shapes (n1,) and (n2,)
        The stratum of each unit, as text or whole number.
    null_value : float
        The common odds ratio under the null hypothesis, above 0.
    alternative : {"above", "below", "two_sided"}
        The side on which the odds ratio, odds of the first group / odds of the second, is claimed to lie.
    confidence : float
        Confidence of the two-sided interval, between 0 and 1.
    method : {"by_size", "exact", "score", "mantel_haenszel"}
        ``exact``: the conditional distribution of the events in the first group (refused for more than 10,000 units).
        ``score``: the same events against their mean and variance, at the null value 1 the statistic of Mantel and
        Haenszel. ``mantel_haenszel``: their estimate with the standard error of Robins, Breslow and Greenland.
        ``by_size`` is exact for up to 2,000 units and takes the score beyond.
    continuity : bool
        Whether the score moves the events by 1/2 towards their mean.

    Returns
    -------
    Outcome or NotComputed
        The common odds ratio (conditional maximum likelihood, or the estimate of Mantel and Haenszel) with the interval
        that its method keeps, the events in the first group, and p. Estimate and ends are 0 or infinite where the
        events are as few or many as they can be. A remark tests whether the strata agree. No result when a group is
        empty, when no stratum tells anything, or by ``mantel_haenszel`` at the ends.

    Raises
    ------
    ValueError
        When the null value is not above 0, or ``method`` is not one of its words.

    Notes
    -----
    Within each stratum, given its margins, the events of the first group follow Fisher's noncentral hypergeometric
    distribution; their sum over the strata tells all there is about a common odds ratio. A stratum without events, or
    with one group only, tells nothing and is left out. Each method has an interval that holds exactly the null values
    that its two-sided test does not reject, so p and interval never contradict each other; printed chi-squares of this
    test beside the interval of Robins, Breslow and Greenland can.

    References
    ----------
    Mantel and Haenszel (1959), Statistical aspects of the analysis of data from retrospective studies of disease,
    Journal of the National Cancer Institute 22:719-748.
    Gart (1970), Point and interval estimation of the common odds ratio in the combination of 2 x 2 tables with fixed
    marginals, Biometrika 57:471-475 (exact).
    Robins, Breslow and Greenland (1986), Estimators of the Mantel-Haenszel variance consistent in both sparse data and
    large-strata limiting models, Biometrics 42:311-323.
    """
    asked, tables = _asked(null_value, alternative, confidence, method), tables_of(first, second, strata)
    n, how = (first.size, second.size), _how(first.size + second.size, method)
    if refused := _refusal(tables, n, method):
        return refused
    telling, null = informative(tables), math.log(null_value)
    if how == "exact":
        judged: Judged | None = stratified.exact(telling, null, asked)
    elif how == "score":
        judged = stratified.score(telling, null, asked, continuity=continuity)
    else:
        judged = stratified.weighed(telling, null, asked)
    return _outcome(asked, judged, tables, n, method, continuity=continuity)


def second_route(
    first: Events,
    second: Events,
    *,
    strata: Strata,
    null_value: float = 1.0,
    alternative: Alternative = "two_sided",
    confidence: float = 0.95,
    method: Method = "by_size",
    continuity: bool = True,
) -> Result:
    """Compute the same with ``stratified_again``; what is refused and the remarks are shared."""
    asked, cells = _asked(null_value, alternative, confidence, method), stratified_again.cells_of(first, second, strata)
    n, how = (len(first), len(second)), _how(len(first) + len(second), method)
    tables = tuple(Table(a, a + b, c + d, a + c) for a, b, c, d in cells)
    if refused := _refusal(tables, n, method):
        return refused
    free, null = stratified_again.free(cells), Decimal(null_value)
    if how == "exact":
        judged: Judged | None = stratified_again.exact(free, null, asked)
    elif how == "score":
        judged = stratified_again.score(free, null, asked, continuity=continuity)
    else:
        judged = stratified_again.weighed(free, null, asked)
    return _outcome(asked, judged, tables, n, method, continuity=continuity)


def smallest_p(
    sizes: tuple[int, ...],
    pooled: Events | None,
    *,
    alternative: Alternative,
    null_value: float,
    strata: Strata,
    method: Method = "by_size",
    continuity: bool = True,
) -> float:
    """Give the smallest attainable p: that of as many, or as few, events in the first group as each stratum allows.

    Without data any number of events is possible; p is smallest when in every stratum one group has them all.
    """
    if method == "mantel_haenszel":  # it has no p at the extremes
        return 0.0
    found = [
        cochran_mantel_haenszel(
            *extreme,
            strata=strata,
            null_value=null_value,
            alternative=alternative,
            method=method,
            continuity=continuity,
        )
        for extreme in stratified.extremes(strata, pooled)
    ]
    return min((one.p for one in found if isinstance(one, Outcome)), default=1.0)


def _asked(null_value: float, alternative: Alternative, confidence: float, method: str) -> Asked:
    if null_value <= 0:
        raise ValueError(f"an odds ratio under the null hypothesis is above 0; found {null_value!r}")
    if method not in ("by_size", "exact", "score", "mantel_haenszel"):
        raise ValueError(f"method is by_size, exact, score or mantel_haenszel; found {method!r}")
    return Asked(null_value=null_value, alternative=alternative, confidence=confidence)


def _how(units: int, method: Method) -> Method:
    if method == "by_size":
        return "exact" if units <= RULE.by_size else "score"
    return method


def _refusal(tables: tuple[Table, ...], n: tuple[int, int], method: Method) -> NotComputed | None:
    too_many = None
    if method == "exact" and sum(n) > RULE.at_most:
        counted = f"the exact distribution is counted for up to {integer(RULE.at_most)} units; there are "
        too_many = f"{counted}{integer(sum(n))}. Use method: score"
    nothing = "no stratum tells anything: in each one a group is missing, or no unit or every unit has the event"
    return first_reason(
        too_few(n[0], 1, noun="unit", whose=" of the first group"),
        too_few(n[1], 1, noun="unit", whose=" of the second group"),
        None if informative(tables) else nothing,
        too_many,
        n=n,
    )


def _outcome(
    asked: Asked,
    judged: Judged | None,
    tables: tuple[Table, ...],
    n: tuple[int, int],
    method: Method,
    *,
    continuity: bool,
) -> Result:
    if judged is None:
        told = "the estimate of Mantel and Haenszel is 0 or infinite, and has no error. Use method: exact"
        return NotComputed(told, n)
    return Outcome(
        estimate=judged.estimate,
        lower=judged.interval.lower,
        upper=judged.interval.upper,
        statistic=float(sum(table.events for table in tables)),
        p=asked.p(above=judged.above, below=judged.below),
        n=n,
        remarks=_remarks(tables, sum(n), method, continuity=continuity),
    )


def _remarks(tables: tuple[Table, ...], units: int, method: Method, *, continuity: bool) -> tuple[str, ...]:
    telling, how = informative(tables), _how(units, method)
    words = {
        "exact": "Exact conditional distribution",
        "score": f"Normal score, {'with' if continuity else 'without'} continuity correction",
        "mantel_haenszel": "Estimate of Mantel and Haenszel, error of Robins, Breslow and Greenland",
    }
    why = "as the spec asks"
    if method == "by_size":
        rule = "up to" if how == "exact" else "more than"
        why = f"the rule for {rule} {integer(RULE.by_size)} units; here {integer(units)}"
    said = [f"{words[how]} ({why}), from {integer(len(telling))} of {integer(len(tables))} strata."]
    if all(table.events == table.least for table in telling):
        said.append(AT_LEAST)
    if all(table.events == table.most for table in telling):
        said.append(AT_MOST)
    return (*said, *equal_ratios(telling, MantelHaenszel.of(telling).odds_ratio))
