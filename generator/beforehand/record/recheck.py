"""Assemble recheck.py, the stand-alone checker of a run folder, from a fixed head and the replays that the run used."""

import inspect
from typing import Any

from beforehand.multiplicity.contract import PROCEDURES, WHOLE
from beforehand.multiplicity.scheme import SCHEMES
from beforehand.record import recheck_head

PLACE = "# The procedures and schemes of this run, as the run itself replayed them.\n"


def recheck_text(procedures: tuple[str, ...], schemes: tuple[str, ...]) -> str:
    """Give the text of recheck.py for the procedures and schemes of one run.

    A name that no catalogue holds is left out: the script says of such a family that it is not recomputed.
    """
    used = sorted(set(procedures) & set(PROCEDURES))
    # Families with a promise of their own stand beside any scheme.
    across = sorted({*schemes, "separate"} & set(SCHEMES))
    parts = [_replay(PROCEDURES.module(name), name, "PROCEDURES") for name in used]
    parts += [_replay(SCHEMES.module(name), name, "SCHEMES") for name in across]
    replays = {name: PROCEDURES[name].replays for name in used} | {name: SCHEMES[name].replays for name in across}
    parts += [f'TAKEN["{name}"] = "{what}"\n' for name, what in replays.items() if what != WHOLE]
    before, after = inspect.getsource(recheck_head).split(PLACE)
    return "\n\n".join([before + PLACE, *parts]) + after


def _replay(module: Any, name: str, catalogue: str) -> str:
    text = inspect.getsource(module.replay)
    own_name = text.replace("def replay(", f"def replay_{name}(", 1)
    return f'{own_name}\n\n{catalogue}["{name}"] = replay_{name}\n'
