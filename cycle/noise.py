"""Noise is not a value: what is below the error of a figure is 0, for the record, the text, the screen and the comparison alike.

The scale of an error is that of the figures from which a figure is made: a row of an account is held against the largest of its
account, a difference of two figures against the larger of them, a potential against the stream thrusts it is the difference of.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from typing import Any

FIGURE = 1e-9
"""Error of a solved figure over its scale: what the audit allows a balance."""
STEP = 1e-7
"""Error of what one step of an input gives, over the figure that moves: two solutions, and the figure may be a small difference."""


def settled(value: Any, scale: Any, error: float = FIGURE) -> Any:
    """A figure, or 0 where it is below its error.

    Parameters: value and scale, floats or arrays that broadcast, in one unit; NaN stays, and a scale of NaN or infinity settles nothing;
    error, relative to the scale. Returns: a float for floats, else an array.
    """
    if _plain(value, scale):
        return 0.0 if math.isfinite(scale) and abs(value) <= error * abs(scale) else float(value)
    import numpy as np

    size = np.abs(scale)
    out = np.where(np.isfinite(size) & (np.abs(value) <= error * size), 0.0, value)
    return float(out) if out.ndim == 0 else out


def _plain(*values: Any) -> bool:
    """Whether all are single numbers: the screen is painted before numpy is there."""
    return all(isinstance(value, float | int) for value in values)


def rows(values: Sequence[Any], error: float = FIGURE) -> list[Any]:
    """The rows of one account, each held against the largest of them, point by point.

    Parameters: values, floats or arrays of one shape, in one unit; NaN stays and counts for nothing; error, see `settled`.
    Returns: as many.
    """
    scale = largest(values)
    return [settled(value, scale, error) for value in values]


def largest(values: Iterable[Any]) -> Any:
    """The largest size of some figures, point by point; 0 where there is none. values: floats or arrays of one shape."""
    every = list(values)
    if _plain(*every):
        return max((abs(float(value)) for value in every if math.isfinite(value)), default=0.0)
    import numpy as np

    out: Any = 0.0
    for value in every:
        size = np.abs(value)
        out = np.fmax(out, np.where(np.isfinite(size), size, 0.0))
    return float(out) if np.ndim(out) == 0 else out


def change(value: Any, base: Any, error: float = FIGURE) -> Any:
    """The change of a figure, 0 where it is below the error of the larger of both. Parameters: see `settled`."""
    return settled(value - base, largest((value, base)), error)
