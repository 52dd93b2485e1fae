"""U.S. Standard Atmosphere 1976 from 0 to 86 km geometric altitude.

Source of everything here: U.S. Standard Atmosphere, 1976 (NOAA-S/T 76-1562), part 1: constants of table 2,
layers of table 4, molar-mass ratios of table 8, equations (18), (22), (23), (33a), (33b) and (42).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from cycle.arrays import Array, ArrayLike
from cycle.constants import STANDARD_GRAVITY

TOP_ALTITUDE = 86000.0
"""Highest geometric altitude of the lower atmosphere, m."""

EARTH_RADIUS = 6356766.0
"""Effective earth radius r0 of the standard, m (not the mean radius)."""

AIR_GAS_CONSTANT = 8314.32 / 28.9644
"""Specific gas constant of the standard's air, J/(kg K): its own molar constant, older than CODATA's."""

SEA_LEVEL_PRESSURE = 101325.0
"""Pressure at zero altitude, Pa."""

_SEA_LEVEL_TEMPERATURE = 288.15
_LAYER_BASE = np.array([0.0, 11000.0, 20000.0, 32000.0, 47000.0, 51000.0, 71000.0])  # geopotential, m
_LAYER_LAPSE = np.array([-6.5e-3, 0.0, 1.0e-3, 2.8e-3, 0.0, -2.8e-3, -2.0e-3])  # K per geopotential metre
_BASE_TEMPERATURE = _SEA_LEVEL_TEMPERATURE + np.concatenate(([0.0], np.cumsum(_LAYER_LAPSE[:-1] * np.diff(_LAYER_BASE))))
_HYDROSTATIC = STANDARD_GRAVITY / AIR_GAS_CONSTANT  # K/m
_MOLAR_MASS_ALTITUDE = np.linspace(80000.0, TOP_ALTITUDE, 13)  # geometric, m
_MOLAR_MASS_RATIO = 1.0 - 1.0e-6 * np.array([0, 4, 11, 29, 59, 91, 130, 171, 214, 259, 306, 359, 421])


class Air(NamedTuple):
    """Undisturbed air.

    temperature (N,) K, kinetic; pressure (N,) Pa; density (N,) kg/m3. NaN outside 0 to 86 km.
    """

    temperature: Array
    pressure: Array
    density: Array


def geopotential_altitude(altitude: ArrayLike) -> Array:
    """Geopotential altitude H = r0 z/(r0 + z).

    altitude: geometric altitude z, (N,), m. Returns (N,), m. Source: eq. (18) of the standard.
    """
    z = np.asarray(altitude, dtype=np.float64)
    return EARTH_RADIUS * z / (EARTH_RADIUS + z)


def geometric_altitude(geopotential: ArrayLike) -> Array:
    """Geometric altitude z = r0 H/(r0 - H), the inverse of `geopotential_altitude`.

    geopotential: H, (N,), m. Returns (N,), m. Source: eq. (19) of the standard.
    """
    h = np.asarray(geopotential, dtype=np.float64)
    return EARTH_RADIUS * h / (EARTH_RADIUS - h)


def molecular_scale_temperature(altitude: ArrayLike) -> Array:
    """Molecular-scale temperature T_M = T M0/M, linear in geopotential altitude by layers.

    altitude: geometric altitude, (N,), m. Returns (N,), K; NaN outside 0 to 86 km.
    Source: eq. (23) of the standard.
    """
    h = geopotential_altitude(altitude)
    layer = _layer_of(h)
    temperature = _BASE_TEMPERATURE[layer] + _LAYER_LAPSE[layer] * (h - _LAYER_BASE[layer])
    return np.where(_inside(altitude), temperature, np.nan)


def atmosphere(altitude: ArrayLike, temperature_offset: ArrayLike = 0.0) -> Air:
    """State of the undisturbed air at a geometric altitude.

    altitude: geometric altitude, (N,), m, 0 to 86 000. temperature_offset: added to the kinetic temperature
    at unchanged pressure, (N,), K. Returns `Air`; a point outside the altitude range, or with no positive
    temperature left, is NaN. From 80 km up the kinetic temperature is T_M times the molar-mass ratio M/M0,
    interpolated in table 8. Source: eqs. (22), (33a), (33b), (42) of the standard.
    """
    z, offset = np.broadcast_arrays(np.asarray(altitude, dtype=np.float64), np.asarray(temperature_offset, dtype=np.float64))
    scale_temperature = molecular_scale_temperature(z)
    ratio = np.interp(z, _MOLAR_MASS_ALTITUDE, _MOLAR_MASS_RATIO)
    temperature = scale_temperature * ratio + offset
    sound = temperature > 0.0
    temperature = np.where(sound, temperature, np.nan)
    pressure = np.where(sound, _pressure(geopotential_altitude(z), scale_temperature), np.nan)
    return Air(temperature, pressure, pressure * ratio / (AIR_GAS_CONSTANT * temperature))


def altitude_of_pressure(pressure: ArrayLike) -> Array:
    """Geometric altitude at which the standard atmosphere has a pressure: the layers inverted one by one.

    pressure: (N,), Pa. Returns (N,), m; NaN outside the pressures of 0 to 86 km.
    Source: eqs. (33a), (33b) of the standard solved for H.
    """
    p = np.asarray(pressure, dtype=np.float64)
    inside = (p <= SEA_LEVEL_PRESSURE) & (p >= _TOP_PRESSURE)
    p = np.where(inside, p, SEA_LEVEL_PRESSURE)
    layer = np.searchsorted(-_BASE_PRESSURE, -p, side="right") - 1
    base_temperature, lapse = _BASE_TEMPERATURE[layer], _LAYER_LAPSE[layer]
    drop = np.log(_BASE_PRESSURE[layer] / p) / _HYDROSTATIC
    sloped = np.where(lapse == 0.0, 1.0, lapse)
    rise = base_temperature * np.where(lapse == 0.0, drop, np.expm1(sloped * drop) / sloped)
    return np.where(inside, geometric_altitude(_LAYER_BASE[layer] + rise), np.nan)


def _inside(altitude: ArrayLike) -> np.ndarray[tuple[int, ...], np.dtype[np.bool_]]:
    z = np.asarray(altitude, dtype=np.float64)
    return (z >= 0.0) & (z <= TOP_ALTITUDE)


def _layer_of(geopotential: Array) -> np.ndarray[tuple[int, ...], np.dtype[np.intp]]:
    below = np.searchsorted(_LAYER_BASE, geopotential, side="right") - 1
    return np.clip(below, 0, _LAYER_BASE.size - 1)


def _pressure_from(base_pressure: ArrayLike, base_temperature: Array, lapse: Array, rise: Array, temperature: Array) -> Array:
    sloped = np.where(lapse == 0.0, 1.0, lapse)
    drop = np.where(lapse == 0.0, rise / base_temperature, np.log(temperature / base_temperature) / sloped)
    return np.asarray(base_pressure * np.exp(-_HYDROSTATIC * drop), dtype=np.float64)


def _base_pressures() -> Array:
    """Pressure at the foot of each layer, carried up from sea level, Pa."""
    pressures = [SEA_LEVEL_PRESSURE]
    for i in range(_LAYER_BASE.size - 1):
        rise = _LAYER_BASE[i + 1] - _LAYER_BASE[i]
        foot, head, lapse = _BASE_TEMPERATURE[i], _BASE_TEMPERATURE[i + 1], _LAYER_LAPSE[i]
        pressures.append(float(_pressure_from(pressures[-1], foot, lapse, rise, head)))
    return np.array(pressures)


_BASE_PRESSURE = _base_pressures()


def _pressure(geopotential: Array, scale_temperature: Array) -> Array:
    layer = _layer_of(geopotential)
    rise = geopotential - _LAYER_BASE[layer]
    return _pressure_from(_BASE_PRESSURE[layer], _BASE_TEMPERATURE[layer], _LAYER_LAPSE[layer], rise, scale_temperature)


_TOP_PRESSURE = float(_pressure(geopotential_altitude(TOP_ALTITUDE), molecular_scale_temperature(TOP_ALTITUDE)))
