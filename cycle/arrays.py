"""The one array type of the model: float64, SI, one entry a point."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]
Flags = NDArray[np.bool_]
Codes = NDArray[np.int64]

__all__ = ["Array", "ArrayLike", "Codes", "Flags"]
