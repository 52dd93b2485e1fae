"""Figures by name, computed when first asked for, floats for one point and read-only arrays of the batch's shape otherwise."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from cycle.arrays import Array, sealed


def shaped(values: Array, shape: tuple[int, ...]) -> Any:
    """Values (N,) as a float where the batch is one point, else in its shape, read-only."""
    return float(values[0]) if shape == () else sealed(values.reshape(shape))


class Figures(Mapping[str, Any]):
    """Read-only figures of a station or of the performance; `figures.thrust` and `figures["thrust"]` are the same."""

    def __init__(self, source: Mapping[str, Callable[[], Array]], shape: tuple[int, ...]) -> None:
        self._source, self._shape, self._made = source, shape, dict[str, Any]()

    def __reduce__(self) -> tuple[Any, ...]:
        return type(self), (self._source, self._shape)

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

    def __reduce__(self) -> tuple[Any, ...]:
        return type(self), (self._source, self._shape, self._fractions)

    @property
    def mole_fractions(self) -> dict[str, Any]:
        """Species name -> mole fraction."""
        return {name: shaped(x, self._shape) for name, x in self._fractions().items()}

    @property
    def has_value(self) -> bool:
        """Whether any point reached this station."""
        return bool(np.any(np.isfinite(self["pressure"])))


@dataclass(frozen=True, slots=True)
class Row:
    """One line of an account: key, label, value (float, or array in the batch's shape), dimension of its unit."""

    key: str
    label: str
    value: Any
    unit: str


@dataclass(frozen=True, slots=True)
class Limit:
    """One limit; margin positive is safe. state: ok, near, over or "not assessed" (array of these in a batch).

    upper: whether `allowed` is an upper limit, at all points of a batch. restore: what gives margin back, or why it is not assessed;
    input: the case key to go to, or ""; note: what is to be known of the limit in any state, or "".
    """

    key: str
    label: str
    actual: Any
    allowed: Any
    margin: Any
    state: Any
    unit: str
    upper: bool
    restore: str
    input: str
    note: str = ""


@dataclass(frozen=True, slots=True)
class Process:
    """One process of the walk: name, label, stations, figures by key."""

    name: str
    label: str
    start: str
    end: str
    figures: Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Residual:
    """One audited law at one place; value: the relative residual."""

    law: str
    where: str
    value: Any


@dataclass(frozen=True, slots=True)
class Audit:
    """All residuals; ok where the worst of them is below the limit 1e-9 (for a batch: of all its points)."""

    ok: bool
    rows: tuple[Residual, ...]
    worst: Residual
