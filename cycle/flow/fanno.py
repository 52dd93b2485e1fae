"""Fanno flow: wall friction on a stream of constant area without heat, constant ratio of specific heats.

Source of every formula here: A. H. Shapiro, The Dynamics and Thermodynamics of Compressible Fluid Flow
(1953), ch. 6 (from memory). Ratios are to the sonic state of the same stream (*); f is the Fanning friction
factor and D the hydraulic diameter. A value outside its domain gives NaN.
"""

from __future__ import annotations

import numpy as np

from cycle.arrays import Array, ArrayLike
from cycle.flow import isentropic
from cycle.flow.isentropic import operands
from cycle.flow.roots import newton


def temperature_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Static temperature over its sonic value T/T*.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: Shapiro (1953), ch. 6.
    """
    m, g = operands(mach, gamma)
    return (g + 1.0) / (2.0 + (g - 1.0) * m**2)


def pressure_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Static pressure over its sonic value p/p*; infinite at rest.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: Shapiro (1953), ch. 6.
    """
    m, g = operands(mach, gamma)
    with np.errstate(divide="ignore"):
        return np.sqrt(temperature_ratio(m, g)) / m


def velocity_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Speed over its sonic value V/V*, equal to rho*/rho.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: Shapiro (1953), ch. 6.
    """
    m, g = operands(mach, gamma)
    return m * np.sqrt(temperature_ratio(m, g))


def total_pressure_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Total pressure over its sonic value pt/pt*, the same function as the isentropic A/A*.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: Shapiro (1953), ch. 6.
    """
    return isentropic.area_ratio(mach, gamma)


def impulse_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Stream thrust over its sonic value I/I*, I = p A (1 + gamma M^2); least (1) at Mach 1.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1; infinite at rest. Source: Shapiro (1953), ch. 6.
    """
    m, g = operands(mach, gamma)
    return pressure_ratio(m, g) * (1.0 + g * m**2) / (1.0 + g)


def entropy_difference(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Entropy above the sonic state over the specific gas constant, (s - s*)/R = -ln(pt/pt*); never positive.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1; minus infinity at rest. Source: Shapiro (1953), ch. 6.
    """
    return -np.log(total_pressure_ratio(mach, gamma))


def _length(z: Array, g: Array) -> Array:
    excess = 2.0 * (z - 1.0) / (g + 1.0)
    return 0.5 * (g + 1.0) / g * (excess - np.log1p(excess))


def longest_duct(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Friction length 4 f L*/D that brings the stream to Mach 1.

    mach: entry, (N,), 1. gamma: (N,), 1. Returns (N,), 1; infinite at rest. Source: Shapiro (1953), ch. 6.
    """
    m, g = operands(mach, gamma)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.where(m == 0.0, np.inf, _length(m**-2.0, g))


def hypersonic_longest_duct(gamma: ArrayLike) -> Array:
    """Friction length 4 f L*/D at infinite Mach number: no supersonic stream bears more.

    gamma: (N,), 1. Returns (N,), 1. Source: Shapiro (1953), ch. 6, the limit of 4 f L*/D.
    """
    _, g = operands(0.0, gamma)
    return _length(np.zeros(g.shape), g)


def mach_from_length(length: ArrayLike, gamma: ArrayLike, supersonic: bool) -> Array:
    """Mach number from which a friction length 4 f L*/D leads to Mach 1.

    length: 4 f L*/D, (N,), 1, at least 0 (supersonic: below its limit at infinite Mach number). gamma: (N,), 1.
    supersonic: which branch. Returns (N,), 1; NaN out of range.
    Source: Shapiro (1953), ch. 6, inverted by safeguarded Newton steps in M^-2.
    """
    target, g = operands(length, gamma)
    if supersonic:
        target = np.where(target < hypersonic_longest_duct(g), target, np.nan)
    target = np.where(np.isfinite(target), target, np.nan)
    # y - ln(1+y) >= y^2/(2+2y) for y > 0 and >= y^2/2 for y < 0 bound y = 2 (M^-2 - 1)/(g+1) on each branch
    scaled = 2.0 * g / (g + 1.0) * target
    reach = -np.sqrt(2.0 * scaled) if supersonic else scaled + np.sqrt(scaled * (scaled + 2.0))
    bound = np.maximum(1.0 + 0.5 * (g + 1.0) * reach, 0.0)
    side = np.sign(bound - 1.0)

    def residual(distance: Array) -> tuple[Array, Array]:
        z = 1.0 + side * distance
        return _length(z, g) - target, side / g * (2.0 * z - 2.0) / (2.0 * z + g - 1.0)

    outermost = np.abs(bound - 1.0)
    return (1.0 + side * newton(residual, np.zeros(bound.shape), outermost, outermost)) ** -0.5


def mach_from_total_pressure(ratio: ArrayLike, gamma: ArrayLike, supersonic: bool) -> Array:
    """Mach number at which pt/pt* has a value.

    ratio: pt/pt*, (N,), 1, at least 1. gamma: (N,), 1. supersonic: which branch. Returns (N,), 1; NaN below 1.
    Source: Shapiro (1953), ch. 6: pt/pt* is the isentropic A/A*.
    """
    invert = isentropic.supersonic_mach if supersonic else isentropic.subsonic_mach
    return invert(ratio, gamma)


def mach_from_temperature(ratio: ArrayLike, gamma: ArrayLike) -> Array:
    """Mach number at which T/T* has a value.

    ratio: T/T*, (N,), 1, above 0 and at most (gamma+1)/2. gamma: (N,), 1. Returns (N,), 1; NaN out of range.
    Source: Shapiro (1953), ch. 6, solved for M.
    """
    r, g = operands(ratio, gamma)
    r = np.where((r > 0.0) & (r <= 0.5 * (g + 1.0)), r, np.nan)
    return np.sqrt(((g + 1.0) / r - 2.0) / (g - 1.0))


def mach_from_pressure(ratio: ArrayLike, gamma: ArrayLike) -> Array:
    """Mach number at which p/p* has a value.

    ratio: p/p*, (N,), 1, above 0. gamma: (N,), 1. Returns (N,), 1; NaN out of range.
    Source: Shapiro (1953), ch. 6: a quadratic in M^2, solved without cancellation.
    """
    r, g = operands(ratio, gamma)
    r = np.where(r > 0.0, r, np.nan)
    # (g-1) X^2 + 2 X = (g+1)/r^2 with X = M^2
    right = (g + 1.0) / r**2
    return np.sqrt(right / (1.0 + np.sqrt(1.0 + (g - 1.0) * right)))
