"""What the duct gives the stream along x: area, wetted perimeter, fuel, burning, heat lost; for N points at once.

Everything here is a function of x alone, so it is known before the flow is. The duct is cut into segments at every
corner of the area, injection plane and end of a burning law: inside a segment all of it is smooth.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, fields
from typing import Any

import numpy as np

from cycle.arrays import Array, ArrayLike, Codes, Flags
from cycle.flow.duct.panels import Lattice
from cycle.gas.base import Gas
from cycle.gas.fuels import Fuel

_SAME = 1e-12
"""Places nearer than this fraction of the duct's length are one place."""


@dataclass(frozen=True, slots=True)
class AreaLaw:
    """Area along the duct. x: m from burner entry, (E,) or (E, N), strictly rising from 0; ratio: area over that at
    entry there, (E,) or (E, N), linear between; section: "circular"; "rectangular" of the stated width, m (N,), all four
    walls wetted; or "tabulated": perimeter m, (E,) or (E, N), linear between."""

    x: ArrayLike
    ratio: ArrayLike
    section: str = "circular"
    width: ArrayLike | None = None
    perimeter: ArrayLike | None = None


@dataclass(frozen=True, slots=True)
class Injectors:
    """Where the fuel enters and how it burns, each (J,) or (J, N). x: m, inside the duct; share: of the fuel, sum 1;
    speed: axial speed of the fuel, m/s; theta: of the burning law; length: m over which it burns, NaN: to the duct's end.

    Burnt part of an injector's fuel: theta X/(1 + (theta - 1) X), X = (x - x_i)/length in 0..1. Heiser and Pratt,
    Hypersonic Airbreathing Propulsion (1994), ch. 6 (from memory).
    """

    x: ArrayLike
    share: ArrayLike
    speed: ArrayLike
    theta: ArrayLike
    length: ArrayLike | None = None


@dataclass(frozen=True, slots=True)
class Supply:
    """The fuel. fuel: None where the gas does not know it (constant gamma); ratio: kg a kg of entering stream; enthalpy:
    total enthalpy it brings, J/kg; heat: J/kg of burnt fuel that the gas model does not release by itself (constant
    gamma), else 0; burnt_fraction: multiplies the burning law; mass: 1, or 0 where the case neglects the fuel's mass."""

    fuel: Fuel | None
    ratio: ArrayLike
    enthalpy: ArrayLike
    heat: ArrayLike = 0.0
    burnt_fraction: ArrayLike = 1.0
    mass: ArrayLike = 1.0


@dataclass(frozen=True, slots=True)
class Walls:
    """friction: Fanning factor Cf; lost_heat: J to the wall a kg of fuel burnt, a stated fraction of the heat released;
    temperature: K of a wall that takes heat by Reynolds analogy (see `cooling`), None: an adiabatic one; power: W to the wall, evenly
    along the duct."""

    friction: ArrayLike = 0.0
    lost_heat: ArrayLike = 0.0
    temperature: ArrayLike | None = None
    power: ArrayLike = 0.0


@dataclass(frozen=True, eq=False)
class Cooling:
    """Heat lost to the wall from the entry to each row of a lattice, W (P n, N)."""

    grid: Lattice
    lost: Array

    def take(self, index: Codes) -> Cooling:
        """Of the chosen points."""
        return Cooling(self.grid.take(index), self.lost[:, index])

    def at(self, segment: Codes, x: Array) -> Array:
        """W, at places (n, N)."""
        lost: Array = self.grid.interpolated(self.lost, *self.grid.locate(segment, x))
        return lost


@dataclass(frozen=True, eq=False)
class Mixture:
    """What the duct is at places (n, N): area m2, its slope m, drag: friction over momentum flow, 1/m; mass_flow kg/s;
    total_enthalpy J/kg; brought: axial impulse of the fuel so far, N; ratio: fuel so far; burnt: fraction of that fuel;
    gas: of the n N places, flattened."""

    gas: Gas
    area: Array
    slope: Array
    drag: Array
    mass_flow: Array
    total_enthalpy: Array
    brought: Array
    ratio: Array
    burnt: Array

    def take(self, index: Codes) -> Mixture:
        """The places of the chosen points."""
        rows, n = self.area.shape
        if index.size == n and (index == np.arange(n)).all():
            return self
        columns = (getattr(self, f.name)[:, index] for f in fields(self) if f.name != "gas")
        return Mixture(self.gas.take(flat(rows, n, index)), *columns)


def flat(rows: int, n: int, index: Codes) -> Codes:
    """Positions of the columns `index` of an array (rows, n) in the flattened one."""
    return (np.arange(rows)[:, None] * n + index).ravel()


_PERIMETER: dict[str, Callable[[Array, Array, Array], Array]] = {
    "circular": lambda area, width, table: 2.0 * np.sqrt(np.pi * area),
    "rectangular": lambda area, width, table: 2.0 * (width + area / width),
    "tabulated": lambda area, width, table: table,
}
"""Wetted perimeter, m, from the area, the width and what a table gives."""


@dataclass(frozen=True, eq=False)
class Duct:
    """A duct of N points and the stream that comes to it.

    Entering stream: gas, total_enthalpy J/kg, mass_flow kg/s, velocity m/s, pressure Pa, entry_area m2. edges: (K + 1, N)
    of the segments, m; grades: (G + 1, N), the edges and the places between which a burning law hardly
    bends; at their left ends, each (K, N): area m2, perimeter m (tabulated), and both slopes; injected: share
    of the fuel upstream of a segment; brought: its axial impulse, N. Injectors: inject_x, share, theta, length (J, N). The walls: see
    `Walls`. entry_heat, heat_capacity: cp of the constant-gamma pairs ahead of burner entry and behind it, J/(kg K) (N,), where they
    differ: total_enthalpy is then that behind the hand-over at the temperature of station 2.
    """

    gas: Gas
    total_enthalpy: Array
    mass_flow: Array
    velocity: Array
    pressure: Array
    entry_area: Array
    fuel: Fuel | None
    ratio: Array
    fuel_enthalpy: Array
    heat: Array
    burnt_fraction: Array
    fuel_mass: Array
    friction: Array
    lost_heat: Array
    section: str
    width: Array
    edges: Array
    area: Array
    slope: Array
    perimeter: Array
    perimeter_slope: Array
    injected: Array
    brought: Array
    inject_x: Array
    share: Array
    theta: Array
    length: Array
    wall_temperature: Array
    wall_power: Array
    grades: Array
    cooling: Cooling | None = None
    entry_heat: Array | None = None
    heat_capacity: Array | None = None

    @property
    def size(self) -> int:
        """N."""
        return int(self.mass_flow.size)

    @property
    def impulse(self) -> Array:
        """F2 = p A + m u of the entering stream, N, (N,)."""
        impulse: Array = self.pressure * self.entry_area + self.mass_flow * self.velocity
        return impulse

    @property
    def end(self) -> Array:
        """x of the exit, m, (N,)."""
        end: Array = self.edges[-1]
        return end

    def take(self, index: Codes | Flags) -> Duct:
        """The ducts of the chosen points, in their order."""
        index = np.arange(self.size)[index]
        return Duct(*(_taken(getattr(self, f.name), index) for f in fields(self)))

    def area_at(self, segment: Codes, x: Array) -> Array:
        """Area, m2, at places (n, N) of the segments (n, N)."""
        area: Array = _pick(self.area, segment) + _pick(self.slope, segment) * (x - _pick(self.edges[:-1], segment))
        return area

    def mixture(self, segment: Codes, x: Array) -> Mixture:
        """The duct at places x (n, N), m, each in its segment (n, N)."""
        area = self.area_at(segment, x)
        table = _pick(self.perimeter, segment) + _pick(self.perimeter_slope, segment) * (x - _pick(self.edges[:-1], segment))
        drag = 0.5 * self.friction * _PERIMETER[self.section](area, self.width, table) / area
        injected, burning = _pick(self.injected, segment), self.burning(x)
        ratio = self.ratio * injected
        released = self.ratio * self.burnt_fraction * burning
        flow = self.mass_flow * (1.0 + self.fuel_mass * ratio)
        energy = self.total_enthalpy + ratio * self.fuel_enthalpy + released * (self.heat - self.lost_heat)
        energy = energy - self.wall_power * (x / self.end) / self.mass_flow
        if self.cooling is not None:
            energy = energy - self.cooling.at(segment, x) / self.mass_flow
        burnt = self.burnt_fraction * burning / np.maximum(injected, 1e-300)
        return Mixture(
            self._mixed(ratio, burnt), area, _pick(self.slope, segment), drag, flow, energy * self.mass_flow / flow,
            _pick(self.brought, segment), ratio, burnt,
        )  # fmt: skip

    def burning(self, x: Array) -> Array:
        """Share of the whole fuel that the burning laws have reached at x (n, N)."""
        total = np.zeros(x.shape)
        for place, share, theta, length in zip(self.inject_x, self.share, self.theta, self.length, strict=True):
            part = np.clip((x - place) / length, 0.0, 1.0)
            total += share * theta * part / (1.0 + (theta - 1.0) * part)
        return total

    def _mixed(self, ratio: Array, burnt: Array) -> Gas:
        gas = self.gas.take(np.tile(np.arange(self.size), ratio.shape[0]))
        if self.fuel is None:
            return gas
        return gas.fuelled(self.fuel, ratio.ravel(), burnt.ravel())


def _taken(value: Any, index: Codes) -> Any:
    if isinstance(value, np.ndarray):
        return value[..., index]
    return value.take(index) if isinstance(value, Gas | Cooling) else value


def _pick(table: Array, segment: Codes) -> Array:
    """Entries of a table (K, N) for segments (n, N)."""
    found: Array = np.take_along_axis(table, segment, axis=0)
    return found


def _rows(values: ArrayLike | None, n: int, rows: int, default: float = 0.0) -> Array:
    if values is None:
        return np.full((rows, n), default)
    array = np.asarray(values, dtype=np.float64)
    return np.array(np.broadcast_to(array[:, None] if array.ndim == 1 else array, (rows, n)))


def _spread(value: ArrayLike, n: int) -> Array:
    return np.array(np.broadcast_to(np.asarray(value, dtype=np.float64), (n,)))


def _edges(places: Array) -> Array:
    """Sorted places (R, N) without those that are doubles for every point."""
    edges = np.sort(places, axis=0)
    gap = np.diff(edges, axis=0) > _SAME * edges[-1]
    keep = np.concatenate([[True], gap.any(1)])
    snapped = np.maximum.accumulate(np.vstack([edges[:1], np.where(gap, edges[1:], -np.inf)]), axis=0)
    kept: Array = snapped[keep]
    kept[-1] = edges[-1]
    return kept


_BEND = 2.5
"""Largest ratio of 1 + (theta - 1) X at the two ends of a panel: a polynomial follows the burning law there to about 1e-4."""


def _grades(edges: Array, place: Array, length: Array, theta: Array) -> Array:
    """The edges and, of each injector, the places that cut its burning law theta X/(1 + (theta - 1) X) into pieces of equal bend."""
    steep = np.log(np.maximum(theta, 1.0 + 1e-9))
    pieces = np.maximum(1.0, np.ceil(steep / math.log(_BEND)))
    parts = (np.minimum(k / pieces, 1.0) for k in range(1, int(pieces.max())))
    inner = [np.minimum(place + length * np.expm1(part * steep) / np.expm1(steep), edges[-1]) for part in parts]
    return _edges(np.vstack([edges, *inner]))


def _interpolated(table_x: Array, table_y: Array, edges: Array) -> tuple[Array, Array]:
    """Value at the left end and slope of each segment, (K, N), of a table linear between its entries (E, N)."""
    middle = 0.5 * (edges[1:] + edges[:-1])
    interval = (middle[:, None] > table_x[None, 1:-1]).sum(1)
    x0, y0 = _pick(table_x, interval), _pick(table_y, interval)
    slope = (_pick(table_y, interval + 1) - y0) / (_pick(table_x, interval + 1) - x0)
    return y0 + slope * (edges[:-1] - x0), slope


def duct_of(
    gas: Gas,
    total_enthalpy: Array,
    velocity: Array,
    pressure: Array,
    mass_flow: Array,
    entry_area: Array,
    law: AreaLaw,
    injectors: Injectors,
    supply: Supply,
    walls: Walls,
) -> Duct:
    """The duct of N points: see `Duct` for the entering stream, each (N,), and the other classes for the rest.

    ValueError where the table does not rise from 0, an area is not positive, an injector lies outside the duct or the
    shares do not add up to 1.
    """
    n = mass_flow.size
    entries, count = np.shape(law.x)[0], np.shape(injectors.x)[0]
    table_x, ratio = _rows(law.x, n, entries), _rows(law.ratio, n, entries)
    place, share = _rows(injectors.x, n, count), _rows(injectors.share, n, count)
    _check(table_x, ratio, place, share)
    end = table_x[-1]
    length = _rows(injectors.length, n, count, np.nan)
    length = np.where(np.isnan(length), end - place, length)
    edges = _edges(np.vstack([table_x, place, np.minimum(place + length, end)]))
    area, slope = _interpolated(table_x, ratio * entry_area, edges)
    perimeter, perimeter_slope = _interpolated(table_x, _rows(law.perimeter, n, entries), edges)
    entered = place[None] <= edges[:-1, None] + _SAME * end
    f, mass = _spread(supply.ratio, n), _spread(supply.mass, n)
    speed = _rows(injectors.speed, n, count)
    return Duct(
        gas, total_enthalpy, mass_flow, velocity, pressure, entry_area, supply.fuel, f, _spread(supply.enthalpy, n),
        _spread(supply.heat, n), _spread(supply.burnt_fraction, n), mass, _spread(walls.friction, n),
        _spread(walls.lost_heat, n), law.section, _spread(1.0 if law.width is None else law.width, n), edges, area, slope,
        perimeter, perimeter_slope, (entered * share[None]).sum(1),
        mass_flow * mass * f * (entered * (share * speed)[None]).sum(1), place, share, _rows(injectors.theta, n, count), length,
        _spread(np.nan if walls.temperature is None else walls.temperature, n), _spread(walls.power, n),
        _grades(edges, place, length, _rows(injectors.theta, n, count)),
    )  # fmt: skip


def _check(x: Array, ratio: Array, place: Array, share: Array) -> None:
    if not ((x[0] == 0.0).all() and (np.diff(x, axis=0) > 0.0).all()):
        raise ValueError("the places of the area law must rise strictly from 0")
    if not (ratio > 0.0).all():
        raise ValueError("the areas of a duct must be positive")
    if not ((place >= 0.0) & (place < x[-1])).all():
        raise ValueError("an injector must lie inside the duct")
    if np.abs(share.sum(0) - 1.0).max() > 1e-9:
        raise ValueError("the shares of the injectors must add up to 1")
