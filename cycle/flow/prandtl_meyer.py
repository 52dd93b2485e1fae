"""Prandtl-Meyer flow: isentropic turning of a supersonic stream at constant ratio of specific heats.

Source of every formula here: Ames Research Staff, NACA Report 1135 (1953), "Prandtl-Meyer expansion",
eqs. (171) and (172) (equation numbers from memory). Angles are in radians.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from cycle.arrays import Array, ArrayLike
from cycle.flow import isentropic
from cycle.flow.roots import newton


class Turn(NamedTuple):
    """An isentropic turn: mach after it, and p2/p1, rho2/rho1, T2/T1 across it, each (N,), 1."""

    mach: Array
    pressure_ratio: Array
    density_ratio: Array
    temperature_ratio: Array


def mach_angle(mach: ArrayLike) -> Array:
    """Mach angle mu = asin(1/M).

    mach: (N,), 1, at least 1. Returns (N,), rad; NaN below Mach 1. Source: NACA Report 1135, eq. (9) (from memory).
    """
    m = np.asarray(mach, dtype=np.float64)
    m = np.where(m >= 1.0, m, np.nan)
    return np.arctan2(1.0, np.sqrt((m - 1.0) * (m + 1.0)))


def angle(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Prandtl-Meyer angle nu(M), zero at Mach 1.

    mach: (N,), 1, at least 1. gamma: (N,), 1. Returns (N,), rad; NaN below Mach 1.
    Source: NACA Report 1135, eq. (171c).
    """
    m, g = isentropic.operands(mach, gamma)
    m = np.where(m >= 1.0, m, np.nan)
    spread = np.sqrt((g + 1.0) / (g - 1.0))
    slope = np.sqrt((m - 1.0) * (m + 1.0))
    return spread * np.arctan(slope / spread) - np.arctan(slope)


def largest_angle(gamma: ArrayLike) -> Array:
    """Prandtl-Meyer angle at infinite Mach number.

    gamma: (N,), 1. Returns (N,), rad. Source: NACA Report 1135, eq. (172).
    """
    _, g = isentropic.operands(0.0, gamma)
    return 0.5 * np.pi * (np.sqrt((g + 1.0) / (g - 1.0)) - 1.0)


def mach_from_angle(nu: ArrayLike, gamma: ArrayLike) -> Array:
    """Mach number that has a Prandtl-Meyer angle.

    nu: (N,), rad, from 0 to below `largest_angle`. gamma: (N,), 1. Returns (N,), 1; NaN out of range.
    Source: NACA Report 1135, eq. (171c) inverted by safeguarded Newton steps.
    """
    target, g = isentropic.operands(nu, gamma)
    target = np.where(target < largest_angle(g), target, np.nan)
    spread = np.sqrt((g + 1.0) / (g - 1.0))

    # unknown: x = atan((M^2-1)^(1/2)/spread), which stays bounded as M grows
    def residual(x: Array) -> tuple[Array, Array]:
        tangent = np.tan(x)
        slope = spread * (spread**2 - 1.0) * tangent**2 / (1.0 + (spread * tangent) ** 2)
        return spread * x - np.arctan(spread * tangent) - target, slope

    near_sonic = np.cbrt(3.0 * target / (1.0 - spread**-2)) / spread
    upper = np.full(target.shape, 0.5 * np.pi)
    x = newton(residual, np.zeros(target.shape), upper, np.arctan(near_sonic))
    # so small an angle is lost to rounding inside the steps; its leading term is exact
    x = np.where((target >= 0.0) & (target < 1e-18), np.arctan(near_sonic), x)
    return np.sqrt(1.0 + (spread * np.tan(x)) ** 2)


def turn(mach: ArrayLike, deflection: ArrayLike, gamma: ArrayLike) -> Turn:
    """Isentropic turn of a supersonic stream: nu2 = nu1 + deflection.

    mach: before the turn, (N,), 1. deflection: (N,), rad, positive expands, negative compresses. gamma: (N,), 1.
    Returns `Turn`; NaN where the angle is beyond `largest_angle` or the compression would pass Mach 1.
    Source: NACA Report 1135, eqs. (43) to (45) and (171c).
    """
    m, g = isentropic.operands(mach, gamma)
    after = mach_from_angle(angle(m, g) + np.asarray(deflection, dtype=np.float64), g)
    laws = (isentropic.pressure_ratio, isentropic.density_ratio, isentropic.temperature_ratio)
    return Turn(after, *(law(after, g) / law(m, g) for law in laws))
