"""Assemble recheck.py, the stand-alone checker of a run folder, from a fixed head and the replays that the run used."""

import inspect
from typing import Any

from beforehand.multiplicity.contract import PROCEDURES, WHOLE
from beforehand.multiplicity.scheme import SCHEMES
from beforehand.record import recheck_head, recheck_statistics

FROM = "the columns statistic, df, n_first and n_second, and the planned number of groups"
PLACE = "# The procedures and schemes of this run, as the run itself replayed them.\n"


def recheck_text(procedures: tuple[str, ...], schemes: tuple[str, ...]) -> str:
    """Give the text of recheck.py for the procedures and schemes of one run.

    A name that no catalogue holds is left out: the script says of such a family that it is not recomputed.
    """
    # A family whose procedure has the scheme's name is adjusted by the scheme.
    used = sorted((set(procedures) - set(schemes)) & set(PROCEDURES))
    # Families with a promise of their own stand beside any scheme.
    across = sorted({*schemes, "separate"} & set(SCHEMES))
    parts = _statistics(used)
    parts += [_replay(PROCEDURES.module(name), f"replay_{name}", f'PROCEDURES["{name}"]') for name in used]
    parts += [_replay(SCHEMES.module(name), f"across_{name}", f'SCHEMES["{name}"]') for name in across]
    replays = {name: PROCEDURES[name].replays for name in used} | {name: SCHEMES[name].replays for name in across}
    parts += [f'TAKEN["{name}"] = "{what}"\n' for name, what in replays.items() if what != WHOLE]
    before, after = inspect.getsource(recheck_head).split(PLACE)
    return "\n\n".join([before + PLACE, *parts]) + after


def _statistics(used: list[str]) -> list[str]:
    """Give what recheck.py needs where a procedure judges statistics: a check of them, and what the replays use."""
    judging = [name for name in used if PROCEDURES[name].compares != "anything"]
    if not judging:
        return []
    uses = dict.fromkeys(function for name in judging for function in PROCEDURES.module(name).REPLAY_USES)
    parts = [
        inspect.getsource(function)
        for function in (recheck_statistics.columns_of, recheck_statistics.statistics, *uses)
    ]
    return [*parts, "CHECKS.append(statistics)\n", *(f'FROM["{name}"] = "{FROM}"\n' for name in judging)]


def _replay(module: Any, own_name: str, place: str) -> str:
    text = inspect.getsource(module.replay).replace("def replay(", f"def {own_name}(", 1)
    return f"{text}\n\n{place} = {own_name}\n"
