"""Figures by name, computed when first asked for, floats for one point and arrays of the batch's shape otherwise."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from typing import Any

import numpy as np

from cycle.arrays import Array


def shaped(values: Array, shape: tuple[int, ...]) -> Any:
    """Values (N,) as a float where the batch is one point, else in its shape."""
    return float(values[0]) if shape == () else values.reshape(shape)


class Figures(Mapping[str, Any]):
    """Read-only figures of a station or of the performance; `figures.thrust` and `figures["thrust"]` are the same."""

    def __init__(self, source: Mapping[str, Callable[[], Array]], shape: tuple[int, ...]) -> None:
        self._source, self._shape, self._made = source, shape, dict[str, Any]()

    def __getitem__(self, key: str) -> Any:
        if key not in self._made:
            self._made[key] = shaped(self._source[key](), self._shape)
        return self._made[key]

    def __getattr__(self, key: str) -> Any:
        if key.startswith("_") or key not in self._source:
            raise AttributeError(f"no figure {key!r}; there are {', '.join(self._source)}")
        return self[key]

    def __iter__(self) -> Iterator[str]:
        return iter(self._source)

    def __len__(self) -> int:
        return len(self._source)


class Station(Figures):
    """The figures of one station; `mole_fractions` by species, each a float or an array; empty at constant gamma."""

    def __init__(
        self, source: Mapping[str, Callable[[], Array]], shape: tuple[int, ...], fractions: Callable[[], Mapping[str, Array]]
    ) -> None:
        super().__init__(source, shape)
        self._fractions = fractions

    @property
    def mole_fractions(self) -> dict[str, Any]:
        """Species name -> mole fraction."""
        return {name: shaped(x, self._shape) for name, x in self._fractions().items()}

    @property
    def has_value(self) -> bool:
        """Whether any point reached this station."""
        return bool(np.any(np.isfinite(self["pressure"])))
