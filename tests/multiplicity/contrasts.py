"""Families of comparisons of group means, from raw data to what a procedure asks for: by a path of the tests' own."""

import math
from dataclasses import dataclass
from functools import cache
from itertools import combinations
from pathlib import Path
from typing import Any

import numpy as np
import yaml
from numpy.typing import NDArray
from scipy import special

Groups = dict[str, NDArray[np.float64]]
REFERENCES = Path(__file__).parents[1] / "references" / "data_based" / "simultaneous.yaml"


@dataclass(frozen=True)
class Contrasts:
    """What a family enters its procedure with."""

    p: NDArray[np.float64]
    given: dict[str, Any]
    estimates: NDArray[np.float64]
    errors: NDArray[np.float64]

    @property
    def plain(self) -> dict[str, Any]:
        """The ingredients as a record holds them."""
        return {name: value.tolist() if isinstance(value, np.ndarray) else value for name, value in self.given.items()}


@cache
def known(name: str) -> dict[str, Any]:
    """Find one entry of the check values."""
    entries: list[dict[str, Any]] = yaml.safe_load(REFERENCES.read_text("utf-8"))
    return next(entry for entry in entries if entry["id"] == name)


def groups_of(name: str) -> Groups:
    """Give the groups of an entry."""
    return {group: np.array(values, dtype=np.float64) for group, values in known(name)["data"].items()}


def all_pairs(groups: Groups) -> list[tuple[str, str]]:
    """Give the pairs, later minus earlier, in the order of the check values."""
    return [(later, earlier) for earlier, later in combinations(groups, 2)]


def pooled(groups: Groups, pairs: list[tuple[str, str]]) -> Contrasts:
    """Compare pairs with the variance pooled over all groups."""
    df = sum(values.size for values in groups.values()) - len(groups)
    variance = sum(((values - values.mean()) ** 2).sum() for values in groups.values()) / df
    estimates = np.array([groups[one].mean() - groups[other].mean() for one, other in pairs])
    errors = np.sqrt([variance * (1 / groups[one].size + 1 / groups[other].size) for one, other in pairs])
    t = estimates / errors
    given = {"statistics": t, "df": float(df), "groups": len({name for pair in pairs for name in pair})}
    return Contrasts(2 * special.stdtr(df, -np.abs(t)), given, estimates, errors)


def with_control(groups: Groups, control: str, *, side: str, doubled: bool = False) -> Contrasts:
    """Compare every other group with the control."""
    others = [name for name in groups if name != control]
    found = pooled(groups, [(name, control) for name in others])
    t, df = found.given["statistics"], found.given["df"]
    turn = {"above": 1, "below": -1, "two_sided": 1}[side]
    loadings = turn * np.array(
        [math.sqrt(groups[name].size / (groups[name].size + groups[control].size)) for name in others]
    )
    given = {
        "statistics": turn * t, "loadings": loadings, "df": df, "sides": 2 if side == "two_sided" else 1,
        "doubled": doubled,
    }  # fmt: skip
    p = found.p if side == "two_sided" else np.minimum(special.stdtr(df, -turn * t) * (2 if doubled else 1), 1)
    return Contrasts(p, given, found.estimates, found.errors)


def unequal(groups: Groups, pairs: list[tuple[str, str]]) -> Contrasts:
    """Compare pairs, each with the variances of its own two groups."""
    of_mean = {name: values.var(ddof=1) / values.size for name, values in groups.items()}
    estimates = np.array([groups[one].mean() - groups[other].mean() for one, other in pairs])
    errors = np.sqrt([of_mean[one] + of_mean[other] for one, other in pairs])
    dfs = np.array(
        [
            (of_mean[one] + of_mean[other]) ** 2
            / sum(of_mean[name] ** 2 / (groups[name].size - 1) for name in (one, other))
            for one, other in pairs
        ]
    )
    t = estimates / errors
    given = {"statistics": t, "dfs": dfs, "groups": len({name for pair in pairs for name in pair})}
    return Contrasts(2 * special.stdtr(dfs, -np.abs(t)), given, estimates, errors)


def drawn(random: np.random.Generator, k: int) -> Groups:
    """Draw groups of a few different sizes, with and without differences."""
    return {f"g{i}": random.normal(random.choice([0.0, 0.0, 1.5]), 1, int(random.integers(3, 15))) for i in range(k)}


def family(name: str, groups: Groups) -> list[Contrasts]:
    """Give what the groups make of a procedure, in each of the forms that it takes."""
    if name == "dunnett":
        sides = [("two_sided", False), ("above", False), ("below", False), ("below", True)]
        return [with_control(groups, "g0", side=side, doubled=doubled) for side, doubled in sides]
    if name == "games_howell":
        return [unequal(groups, all_pairs(groups))]
    return [pooled(groups, all_pairs(groups))]
