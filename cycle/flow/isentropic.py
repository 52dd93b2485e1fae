"""Isentropic flow of a gas with constant ratio of specific heats.

Source of every formula here unless another is named: Ames Research Staff, NACA Report 1135 (1953),
"Isentropic flow", eqs. (43) to (51) and (80) (equation numbers from memory).
A value outside its domain (negative Mach number, area below the sonic area ...) gives NaN.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from cycle.arrays import Array, ArrayLike
from cycle.flow.roots import newton


class Ratios(NamedTuple):
    """Three static ratios of one point: temperature, pressure, density, each (N,), 1."""

    temperature: Array
    pressure: Array
    density: Array


def operands(mach: ArrayLike, gamma: ArrayLike) -> tuple[Array, Array]:
    """Mach number and ratio of specific heats broadcast together; both NaN where M < 0 or gamma <= 1.

    mach: (N,), 1. gamma: (N,), 1. Returns two arrays (N,), 1.
    """
    m, g = np.broadcast_arrays(np.asarray(mach, dtype=np.float64), np.asarray(gamma, dtype=np.float64))
    sound = (m >= 0.0) & (g > 1.0)
    return np.where(sound, m, np.nan), np.where(sound, g, np.nan)


def temperature_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Static over total temperature T/Tt.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: NACA Report 1135, eq. (43).
    """
    m, g = operands(mach, gamma)
    return 1.0 / (1.0 + 0.5 * (g - 1.0) * m**2)


def pressure_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Static over total pressure p/pt.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: NACA Report 1135, eq. (44).
    """
    m, g = operands(mach, gamma)
    return np.exp(-g / (g - 1.0) * np.log1p(0.5 * (g - 1.0) * m**2))


def density_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Static over total density rho/rhot.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: NACA Report 1135, eq. (45).
    """
    m, g = operands(mach, gamma)
    return np.exp(-1.0 / (g - 1.0) * np.log1p(0.5 * (g - 1.0) * m**2))


def critical_ratios(gamma: ArrayLike) -> Ratios:
    """Sonic over total temperature, pressure and density.

    gamma: (N,), 1. Returns `Ratios`, each (N,), 1. Source: NACA Report 1135, eqs. (43) to (45) at M = 1.
    """
    return Ratios(temperature_ratio(1.0, gamma), pressure_ratio(1.0, gamma), density_ratio(1.0, gamma))


def dynamic_pressure_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Dynamic pressure over total pressure q/pt = (gamma/2) M^2 p/pt.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: NACA Report 1135, eq. (47).
    """
    m, g = operands(mach, gamma)
    return 0.5 * g * m**2 * pressure_ratio(m, g)


def critical_velocity_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Speed over the sonic speed of the same total temperature V/a*.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: NACA Report 1135, eq. (50).
    """
    m, g = operands(mach, gamma)
    return m * np.sqrt(0.5 * (g + 1.0) * temperature_ratio(m, g))


@np.errstate(divide="ignore")
def _log_area(log_mach: Array, g: Array) -> Array:
    excess = np.expm1(2.0 * log_mach)
    small = (g - 1.0) / (g + 1.0)
    return 0.5 / small * np.log1p(small * excess) - log_mach


def area_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Area over sonic area A/A*; infinite at rest.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: NACA Report 1135, eq. (80).
    """
    m, g = operands(mach, gamma)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.where(m == 0.0, np.inf, np.exp(_log_area(np.log(m), g)))


def mass_flow_parameter(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Mass flow parameter (mass flow) (R Tt)^(1/2) / (pt A), without dimension.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1.
    Source: A. H. Shapiro, The Dynamics and Thermodynamics of Compressible Fluid Flow (1953), ch. 4 (from memory).
    """
    m, g = operands(mach, gamma)
    return np.sqrt(g) * m * np.exp(-0.5 * (g + 1.0) / (g - 1.0) * np.log1p(0.5 * (g - 1.0) * m**2))


def mach_from_pressure_ratio(ratio: ArrayLike, gamma: ArrayLike) -> Array:
    """Mach number at which p/pt has a value.

    ratio: p/pt, (N,), 1, above 0 and at most 1. gamma: (N,), 1. Returns (N,), 1; NaN out of range.
    Source: NACA Report 1135, eq. (44) solved for M.
    """
    r, g = operands(ratio, gamma)
    r = np.where((r > 0.0) & (r <= 1.0), r, np.nan)
    return np.sqrt(np.expm1(-(g - 1.0) / g * np.log(r)) * 2.0 / (g - 1.0))


def subsonic_mach(ratio: ArrayLike, gamma: ArrayLike) -> Array:
    """Subsonic Mach number at which A/A* has a value.

    ratio: A/A*, (N,), 1, at least 1. gamma: (N,), 1. Returns (N,), 1, at most 1; NaN where A/A* < 1.
    Source: NACA Report 1135, eq. (80) inverted by safeguarded Newton steps in ln M.
    """
    area, g = _reachable(ratio, gamma)
    log_area = np.log(area)
    exponent = 0.5 * (g + 1.0) / (g - 1.0)
    # dropping the M^2 term of A/A* gives a lower bound of M
    lower = -log_area + exponent * np.log(2.0 / (g + 1.0))
    start = np.maximum(lower, -np.sqrt(0.5 * (g + 1.0) * log_area))
    return np.exp(-_invert_area(log_area, g, -1.0, 0.0 * lower, -lower, -start))


def supersonic_mach(ratio: ArrayLike, gamma: ArrayLike) -> Array:
    """Supersonic Mach number at which A/A* has a value.

    ratio: A/A*, (N,), 1, at least 1. gamma: (N,), 1. Returns (N,), 1, at least 1; NaN where A/A* < 1.
    Source: NACA Report 1135, eq. (80) inverted by safeguarded Newton steps in ln M.
    """
    area, g = _reachable(ratio, gamma)
    log_area = np.log(area)
    exponent = 0.5 * (g + 1.0) / (g - 1.0)
    # dropping the constant term of A/A* gives an upper bound of M
    upper = (log_area - exponent * np.log((g - 1.0) / (g + 1.0))) / (2.0 * exponent - 1.0)
    start = np.minimum(upper, np.sqrt(0.5 * (g + 1.0) * log_area))
    return np.exp(_invert_area(log_area, g, 1.0, 0.0 * upper, upper, start))


def _reachable(ratio: ArrayLike, gamma: ArrayLike) -> tuple[Array, Array]:
    area, g = operands(ratio, gamma)
    return np.where((area >= 1.0) & np.isfinite(area), area, np.nan), g


def _invert_area(target: Array, g: Array, side: float, lower: Array, upper: Array, start: Array) -> Array:
    """|ln M| on one side of the sonic point; `side` is +1 supersonic, -1 subsonic."""

    def residual(distance: Array) -> tuple[Array, Array]:
        log_mach = side * distance
        square = np.exp(2.0 * log_mach)
        slope = side * (square - 1.0) / (1.0 + 0.5 * (g - 1.0) * square)
        return _log_area(log_mach, g) - target, slope

    return newton(residual, lower, upper, start)
