"""The one array type of the model: float64, SI, one entry a point."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any, TypeVar

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]
Flags = NDArray[np.bool_]
Codes = NDArray[np.int64]

__all__ = ["Array", "ArrayLike", "Codes", "Flags", "sealed"]

_Part = TypeVar("_Part")
_PLAIN = (str, int, float, type(None))


def sealed(part: _Part) -> _Part:
    """Make every array in a record read-only, so that nobody who is handed one can change what others read.

    Parameters: part, an array, or arrays nested in tables, rows and records. Returns: part itself.
    """
    if isinstance(part, np.ndarray):
        part.flags.writeable = False
    elif not isinstance(part, _PLAIN):
        for value in _parts(part):
            sealed(value)
    return part


def _parts(record: Any) -> Iterable[Any]:
    if isinstance(record, Mapping):
        return record.values()
    if isinstance(record, tuple | list):
        return record
    if hasattr(record, "__dataclass_fields__"):
        return [getattr(record, name) for name in record.__dataclass_fields__]
    return list(vars(record).values())
