"""Run an analysis spec written before the data into a report that a sceptical reader can check.

``run`` does the whole job from Python, ``read_run`` opens a run folder, ``statistical_tests`` and ``procedures`` are
the catalogues by the words of the spec: ``beforehand.procedures.holm([0.01, 0.04, 0.03])``.
"""

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from beforehand.errors import CallFault, DataFault, FolderFault, SpecFault
    from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS as statistical_tests  # noqa: N811
    from beforehand.multiplicity.contract import PROCEDURES as procedures  # noqa: N811
    from beforehand.study import Run, read_run, run

__version__ = "0.1.0"

__all__ = [
    "CallFault",
    "DataFault",
    "FolderFault",
    "Run",
    "SpecFault",
    "procedures",
    "read_run",
    "run",
    "statistical_tests",
]

# Importing the package stays cheap: each name brings its room when it is first used.
_ROOMS = {
    "run": ("study", "run"),
    "read_run": ("study", "read_run"),
    "Run": ("study", "Run"),
    "statistical_tests": ("hypothesis_tests.contract", "STATISTICAL_TESTS"),
    "procedures": ("multiplicity.contract", "PROCEDURES"),
    "SpecFault": ("errors", "SpecFault"),
    "DataFault": ("errors", "DataFault"),
    "FolderFault": ("errors", "FolderFault"),
    "CallFault": ("errors", "CallFault"),
}


def __getattr__(name: str) -> Any:
    if name not in _ROOMS:
        raise AttributeError(f"module 'beforehand' has no attribute '{name}'")
    room, attribute = _ROOMS[name]
    return getattr(import_module(f"beforehand.{room}"), attribute)


def __dir__() -> list[str]:
    return sorted(set(globals()) | set(__all__))
