"""Tails of the largest of several statistics a second time, in plain Python: what the replays of Tukey and Dunnett use.

The functions stand in recheck.py too, so each needs nothing but the ones above it and the standard library. Not shared
with ``distributions``: the rule (Gauss and Legendre's on panels), how far an integrand is followed (until it adds
nothing), the normal tail (math.erfc), and that every integral over the standard deviation is walked by itself.
"""

from __future__ import annotations

import math
from typing import Callable  # noqa: UP035 -- read by Python 3.8 too


def legendre_rule(n: int) -> list[tuple[float, float]]:
    """Give nodes between -1 and 1 and weights of the rule with n points, by Newton's method on the polynomial."""
    rule = []
    for i in range(n):
        x = math.cos(math.pi * (i + 0.75) / (n + 0.5))
        for _ in range(100):
            before, value = 0.0, 1.0
            for k in range(n):
                before, value = value, ((2 * k + 1) * x * value - k * before) / (k + 1)
            slope = n * (x * value - before) / (x * x - 1)
            x -= value / slope
            if abs(value / slope) < 1e-15:
                break
        rule.append((x, 2 / ((1 - x * x) * slope * slope)))
    return rule


def studentized_tails(
    normal_tail: Callable[[float], float], rate: float, many: bool, values: list[float], dfs: list[float]
) -> list[float]:
    """Give P(W / s > q) for each q, where normal_tail(w) = P(W > w) falls like exp(-rate w w); each q has a df of s.

    Panels of log w = log q + log s are walked from where the integrand is large, both ways, until they add nothing;
    they are narrower where many statistics compete.
    """
    rule = legendre_rule(20)
    known: dict[tuple[float, int], list[float]] = {}

    def panel(i: int, width: float, sign: int, shift: float, df: float) -> float:
        nodes = [(i + 0.5 + x / 2) * width for x, _ in rule]
        if (sign * width, i) not in known:
            known[sign * width, i] = [normal_tail(sign * math.exp(x)) if sign else 1.0 for x in nodes]
        tails, total = known[sign * width, i], 0.0
        for j, (_, weight) in enumerate(rule):
            log_s = nodes[j] - shift
            total += weight * tails[j] * math.exp(df * (log_s - math.expm1(2 * log_s) / 2))
        return total

    def walked(start: float, width: float, sign: int, shift: float, df: float) -> float:
        middle = math.floor(start / width)
        total = panel(middle, width, sign, shift, df)
        for way in (-1, 1):
            i, last, added = middle + way, total, panel(middle + way, width, sign, shift, df)
            while added > last or added > 1e-19 * total:
                total += added
                i += way
                last, added = added, panel(i, width, sign, shift, df)
        return total

    result, whole = [], {}
    for q, df in zip(values, dfs):  # noqa: B905 -- read by Python 3.8 too
        if q == 0:
            result.append(normal_tail(0.0))
            continue
        width = 2.0 ** min(-1 if many else 0, math.floor(math.log2(4 / math.sqrt(df))))
        if df not in whole:
            whole[df] = walked(0.0, width, 0, 0.0, df)
        log_q = math.log(abs(q))
        peak = log_q - (math.log1p(2 * rate * q * q / df) / 2 if q > 0 else 0)
        result.append(min(1.0, walked(peak, width, 1 if q > 0 else -1, log_q, df) / whole[df]))
    return result


def range_tails(values: list[float], dfs: list[float], groups: int) -> list[float]:
    """Give P(Q > q) of the studentized range of so many groups, for each q with its df."""
    rule = legendre_rule(16)
    width = 2.0 if groups <= 30 else 1.0
    known: dict[int, list[tuple[float, float, float]]] = {}

    def largest(i: int) -> list[tuple[float, float, float]]:
        """Give for the nodes of one panel: z, Phi(z), and the density of the largest value times the weight."""
        if i not in known:
            known[i] = []
            for x, weight in rule:
                z = (i + 0.5 + x / 2) * width
                below = math.erfc(-z / math.sqrt(2)) / 2
                density = groups * math.exp(-z * z / 2) / math.sqrt(2 * math.pi) * below ** (groups - 1)
                known[i].append((z, below, weight * width / 2 * density))
        return known[i]

    def normal_tail(w: float) -> float:
        total = 0.0
        for i in range(math.floor((w / 2 - 9) / width), math.ceil((w / 2 + 9) / width)):
            for z, below, weight in largest(i):
                too_low = math.erfc((w - z) / math.sqrt(2)) / 2 / below if below else 1.0
                any_too_low = -math.expm1((groups - 1) * math.log1p(-too_low)) if too_low < 1 else 1.0
                total += weight * any_too_low
        return total

    return studentized_tails(normal_tail, 0.25, groups > 100, values, dfs)


def shared_control_tails(values: list[float], loadings: list[float], df: float, sides: int) -> list[float]:
    """Give P(max T > t), or P(max |T| > t) for two sides, of statistics whose correlations are products of loadings."""
    rule = legendre_rule(16)
    times: dict[float, int] = {}
    for b in loadings:
        key = abs(b) if sides == 2 else b
        times[key] = times.get(key, 0) + 1
    each = [(b, math.sqrt(2 - 2 * b * b), count) for b, count in sorted(times.items())]
    steepest = max(abs(b) for b in times)
    width = min(2.0 if len(loadings) <= 30 else 1.0, 4 * math.sqrt(1 - steepest * steepest) / steepest)

    def any_above(w: float, z: float) -> float:
        none = 0.0
        for b, scale, count in each:
            above = math.erfc((w - b * z) / scale) / 2
            if sides == 2:
                above += math.erfc((w + b * z) / scale) / 2
            if above >= 1:
                return 1.0
            none += count * math.log1p(-above)
        return -math.expm1(none)

    def normal_tail(w: float) -> float:
        far = 9 + max(w, 0.0) * steepest
        low = 0.0 if sides == 2 else -far if each[0][0] < 0 else -9.0
        high = far if each[-1][0] > 0 else 9.0
        total = 0.0
        for i in range(math.floor(low / width), math.ceil(high / width)):
            for x, weight in rule:
                z = (i + 0.5 + x / 2) * width
                total += weight * any_above(w, z) * math.exp(-z * z / 2)
        return total * sides * width / 2 / math.sqrt(2 * math.pi)

    return studentized_tails(normal_tail, 0.5, len(loadings) > 100, values, [df] * len(values))
