"""ductwalk's model: ramjet and scramjet flowpaths walked station by station.

`load` a case, `solve` it, read the `Walk`. Results are preliminary-design estimates. Nothing heavy is imported until
one of these names is used.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from cycle.case import Case, load, loads
    from cycle.errors import CaseError
    from cycle.result import Walk, solve
    from cycle.sensitivity import sensitivities

__version__ = "0.5.0"

_HOME = {
    "Case": "cycle.case", "load": "cycle.case", "loads": "cycle.case", "CaseError": "cycle.errors", "Walk": "cycle.result",
    "sensitivities": "cycle.sensitivity", "solve": "cycle.result",
}  # fmt: skip

__all__ = ["Case", "CaseError", "Walk", "load", "loads", "sensitivities", "solve"]


def __getattr__(name: str) -> Any:
    if name not in _HOME:
        raise AttributeError(f"module 'cycle' has no attribute {name!r}")
    return getattr(import_module(_HOME[name]), name)
