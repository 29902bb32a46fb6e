"""What the tests of the catalogue hand to a procedure that asks for more than p."""

from typing import Any

from beforehand.multiplicity.contract import Procedure

FROM_THE_PLAN = frozenset({"weights", "positions"})
OPTIONS: dict[str, Any] = {"false_rejections": 2, "false_share": 0.1, "truncation": 0.25}
"""A value for each option that has no default."""


def judges_by_p(procedure: Procedure) -> bool:
    """Whether p and the plan are all that a procedure asks for; the others judge by statistics of their own."""
    return procedure.needs <= FROM_THE_PLAN


def options_for(procedure: Procedure) -> dict[str, Any]:
    needed = [name for name, option in procedure.options.items() if option.default is option.empty]
    return {name: OPTIONS[name] for name in needed}


def given_for(procedure: Procedure, m: int) -> dict[str, Any]:
    """Give unequal weights that sum to 1, a written order other than that of the p-values, and options."""
    parts = [1 + i % 3 for i in range(m)]
    whole = sum(parts)
    ingredients = {
        "weights": [part / whole for part in parts],
        "positions": [(i + m // 2) % m for i in range(m)],
    }
    return {name: ingredients[name] for name in procedure.needs} | options_for(procedure)


def moved_as(given: dict[str, Any], order: list[int]) -> dict[str, Any]:
    """Bring what belongs to each member into another order of the members."""
    return {name: [value[i] for i in order] if name in FROM_THE_PLAN else value for name, value in given.items()}
