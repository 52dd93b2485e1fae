"""Normal and oblique shocks at constant ratio of specific heats.

Source of every formula here unless another is named: Ames Research Staff, NACA Report 1135 (1953),
"Shock waves", eqs. (93) to (99), (138), (139), (148), (150), (168) (equation numbers from memory).
Angles are in radians.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from cycle.arrays import Array, ArrayLike
from cycle.flow.isentropic import operands
from cycle.flow.prandtl_meyer import mach_angle


class Shock(NamedTuple):
    """A shock: mach behind it, and p2/p1, rho2/rho1, T2/T1, pt2/pt1 across it, each (N,), 1."""

    mach: Array
    pressure_ratio: Array
    density_ratio: Array
    temperature_ratio: Array
    total_pressure_ratio: Array


class ObliqueShock(NamedTuple):
    """An oblique shock: wave angle and deflection (N,) rad, then as `Shock`, (N,) 1. NaN where detached."""

    wave_angle: Array
    deflection: Array
    mach: Array
    pressure_ratio: Array
    density_ratio: Array
    temperature_ratio: Array
    total_pressure_ratio: Array


class Detachment(NamedTuple):
    """Largest deflection of an attached shock, and the wave angle there, each (N,), rad."""

    deflection: Array
    wave_angle: Array


@np.errstate(invalid="ignore", divide="ignore", over="ignore")
def normal_shock(mach: ArrayLike, gamma: ArrayLike) -> Shock:
    """Normal shock.

    mach: ahead of the shock, (N,), 1, at least 1 (infinity gives the limits). gamma: (N,), 1.
    Returns `Shock`; NaN below Mach 1. Source: NACA Report 1135, eqs. (93) to (96) and (99).
    """
    m, g = operands(mach, gamma)
    m = np.where(m >= 1.0, m, np.nan)
    inverse = m**-2.0
    jump = 2.0 * g / (g + 1.0) * (m - 1.0) * (m + 1.0)
    pressure = 1.0 + jump
    density = (g + 1.0) / (g - 1.0 + 2.0 * inverse)
    behind = np.sqrt((g - 1.0 + 2.0 * inverse) / (2.0 * g - (g - 1.0) * inverse))
    loss = (g * np.log(density) - np.log1p(jump)) / (g - 1.0)
    return Shock(behind, pressure, density, pressure / density, np.exp(loss))


def mach_ahead(mach_behind: ArrayLike, gamma: ArrayLike) -> Array:
    """Mach number ahead of the normal shock that leaves a subsonic Mach number behind it.

    mach_behind: (N,), 1, above ((gamma-1)/(2 gamma))^(1/2) and at most 1. gamma: (N,), 1.
    Returns (N,), 1; NaN out of range. Source: NACA Report 1135, eq. (96), which is its own inverse.
    """
    m, g = operands(mach_behind, gamma)
    room = 2.0 * g * m**2 - (g - 1.0)
    room = np.where((room > 0.0) & (m <= 1.0), room, np.nan)
    return np.sqrt(((g - 1.0) * m**2 + 2.0) / room)


@np.errstate(invalid="ignore", divide="ignore")
def deflection_of_wave(mach: ArrayLike, wave_angle: ArrayLike, gamma: ArrayLike) -> Array:
    """Deflection of the stream by an oblique shock of known wave angle.

    mach: ahead of the shock, (N,), 1. wave_angle: (N,), rad, from the Mach angle to pi/2. gamma: (N,), 1.
    Returns (N,), rad; NaN outside that range. Source: NACA Report 1135, eq. (138).
    """
    m, g = operands(mach, gamma)
    beta = np.asarray(wave_angle, dtype=np.float64)
    excess = (m * np.sin(beta)) ** 2 - 1.0
    inside = (beta >= mach_angle(m)) & (beta <= 0.5 * np.pi)
    # at the Mach angle itself the excess is rounding
    excess = np.where(inside, np.maximum(excess, 0.0), np.nan)
    return np.arctan2(2.0 * excess * np.cos(beta), np.sin(beta) * (m**2 * (g + np.cos(2.0 * beta)) + 2.0))


def detachment(mach: ArrayLike, gamma: ArrayLike) -> Detachment:
    """Largest deflection that an attached oblique shock can give, and its wave angle.

    mach: (N,), 1, at least 1. gamma: (N,), 1. Returns `Detachment`; NaN below Mach 1.
    Source: NACA Report 1135, eq. (168).
    """
    m, g = operands(mach, gamma)
    m = np.where(m >= 1.0, m, np.nan)
    root = np.sqrt((g + 1.0) * ((g + 1.0) * m**4 / 16.0 + 0.5 * (g - 1.0) * m**2 + 1.0))
    sine_square = (0.25 * (g + 1.0) * m**2 - 1.0 + root) / (g * m**2)
    beta = np.arcsin(np.sqrt(np.minimum(sine_square, 1.0)))
    return Detachment(deflection_of_wave(m, beta, g), beta)


@np.errstate(invalid="ignore", divide="ignore")
def shock_of_wave(mach: ArrayLike, wave_angle: ArrayLike, gamma: ArrayLike) -> ObliqueShock:
    """Oblique shock of known wave angle.

    mach: ahead of the shock, (N,), 1. wave_angle: (N,), rad. gamma: (N,), 1. Returns `ObliqueShock`; NaN where the
    wave angle is below the Mach angle or above pi/2. Source: NACA Report 1135, eqs. (128) to (132), (138).
    """
    m, g = operands(mach, gamma)
    theta = deflection_of_wave(m, wave_angle, g)
    beta = np.where(np.isnan(theta), np.nan, np.asarray(wave_angle, dtype=np.float64))
    across = normal_shock(np.maximum(m * np.sin(beta), 1.0), g)
    return ObliqueShock(beta, theta, across.mach / np.sin(beta - theta), *across[1:])


def oblique_shock(mach: ArrayLike, deflection: ArrayLike, gamma: ArrayLike, strong: bool = False) -> ObliqueShock:
    """Oblique shock of known deflection.

    mach: ahead of the shock, (N,), 1. deflection: (N,), rad, from 0 (a Mach wave, or a normal shock when strong) to
    the detachment angle. gamma: (N,), 1. strong: which of the two solutions. Returns `ObliqueShock`, NaN where the
    shock is detached. Source: NACA Report 1135, eq. (150), the cubic in the wave angle, by its cosine solution.
    """
    m, g = operands(mach, gamma)
    m, theta, g = np.broadcast_arrays(m, np.asarray(deflection, dtype=np.float64), g)
    attached = (theta >= 0.0) & (theta <= detachment(m, g).deflection)
    theta = np.where(attached, theta, np.nan)
    # the cubic: 1 + ((g+1)/2 M^2 + 1) t y - (M^2-1) y^2 + (1 + (g-1)/2 M^2) t y^3 = 0,  y = tan beta, t = tan theta
    a, b, c = m**2 - 1.0, 1.0 + 0.5 * (g - 1.0) * m**2, 1.0 + 0.5 * (g + 1.0) * m**2
    t = np.tan(theta)
    shape = np.sqrt(np.maximum(a**2 - 3.0 * b * c * t**2, 0.0))
    d = b + 0.25 * (g + 1.0) * m**4
    # discriminant multiplied out by hand: acos of a number near one would lose the small deflections
    discriminant = np.maximum(a**3 + ((a * c) ** 2 - 3.0 * d**2) * t**2 - b * c**3 * t**4, 0.0)
    third = np.arctan2(b * t * np.sqrt(27.0 * discriminant), a**3 - 9.0 * b * d * t**2) / 3.0
    if strong:
        numerator = a + 2.0 * shape * np.cos(third)
        return shock_of_wave(m, np.arctan2(numerator, 3.0 * b * t), g)
    sum_of_both = np.where(a > 0.0, a + shape, 1.0)
    numerator = 3.0 * b * c * t**2 / sum_of_both + shape * (np.sqrt(3.0) * np.sin(third) + 2.0 * np.sin(0.5 * third) ** 2)
    beta = np.where(t == 0.0, 0.0, np.arctan2(numerator, 3.0 * b * t))
    # a Mach wave is the lower limit; rounding may fall under it
    return shock_of_wave(m, np.maximum(beta, mach_angle(m)), g)
