"""Rayleigh flow: heat added to a stream of constant area without friction, constant ratio of specific heats.

Source of every formula here unless another is named: A. H. Shapiro, The Dynamics and Thermodynamics of
Compressible Fluid Flow (1953), ch. 7 (from memory). Ratios are to the sonic state of the same stream (*).
A value outside its domain gives NaN.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from cycle.arrays import Array, ArrayLike
from cycle.flow.isentropic import operands


class HottestPoint(NamedTuple):
    """Point of largest static temperature: mach, and T/T* there, each (N,), 1."""

    mach: Array
    temperature_ratio: Array


def pressure_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Static pressure over its sonic value p/p*.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: Shapiro (1953), ch. 7.
    """
    m, g = operands(mach, gamma)
    return (1.0 + g) / (1.0 + g * m**2)


def temperature_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Static temperature over its sonic value T/T*.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: Shapiro (1953), ch. 7.
    """
    m, g = operands(mach, gamma)
    return (m * pressure_ratio(m, g)) ** 2


def velocity_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Speed over its sonic value V/V*, equal to rho*/rho.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: Shapiro (1953), ch. 7.
    """
    m, g = operands(mach, gamma)
    return m**2 * pressure_ratio(m, g)


def total_temperature_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Total temperature over its sonic value Tt/Tt*.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: Shapiro (1953), ch. 7.
    """
    m, g = operands(mach, gamma)
    return temperature_ratio(m, g) * (2.0 + (g - 1.0) * m**2) / (g + 1.0)


def total_pressure_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Total pressure over its sonic value pt/pt*, least (1) at Mach 1.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1. Source: Shapiro (1953), ch. 7.
    """
    m, g = operands(mach, gamma)
    return pressure_ratio(m, g) * ((2.0 + (g - 1.0) * m**2) / (g + 1.0)) ** (g / (g - 1.0))


def entropy_difference(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Entropy above the sonic state over the specific gas constant, (s - s*)/R; never positive.

    mach: (N,), 1. gamma: (N,), 1. Returns (N,), 1; minus infinity at rest. Source: Shapiro (1953), ch. 7.
    """
    m, g = operands(mach, gamma)
    with np.errstate(divide="ignore"):
        return g / (g - 1.0) * np.log(temperature_ratio(m, g)) - np.log(pressure_ratio(m, g))


def largest_heat_ratio(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Largest total-temperature ratio Tt*/Tt that heat can bring before the stream chokes.

    mach: entry, (N,), 1. gamma: (N,), 1. Returns (N,), 1; infinite at rest. Source: Shapiro (1953), ch. 7.
    """
    with np.errstate(divide="ignore"):
        return 1.0 / total_temperature_ratio(mach, gamma)


def hypersonic_total_temperature_ratio(gamma: ArrayLike) -> Array:
    """Total temperature over its sonic value at infinite Mach number, (gamma^2 - 1)/gamma^2.

    gamma: (N,), 1. Returns (N,), 1; its inverse is the heat ratio that chokes any supersonic stream at most.
    Source: Shapiro (1953), ch. 7, the limit of Tt/Tt*.
    """
    _, g = operands(0.0, gamma)
    return 1.0 - g**-2.0


def hottest_point(gamma: ArrayLike) -> HottestPoint:
    """Point of largest static temperature, at M = gamma^(-1/2).

    gamma: (N,), 1. Returns `HottestPoint`. Source: Shapiro (1953), ch. 7.
    """
    _, g = operands(0.0, gamma)
    mach = g**-0.5
    return HottestPoint(mach, temperature_ratio(mach, g))


def mach_from_total_temperature(ratio: ArrayLike, gamma: ArrayLike, supersonic: bool) -> Array:
    """Mach number at which Tt/Tt* has a value, on the subsonic or the supersonic branch.

    ratio: Tt/Tt*, (N,), 1, from 0 (supersonic: above its limit at infinite Mach number) to 1. gamma: (N,), 1.
    supersonic: which branch. Returns (N,), 1; NaN out of range, above 1 the stream is choked.
    Source: Shapiro (1953), ch. 7: the ratio is a quadratic in M^2, solved without cancellation.
    """
    tau, g = operands(ratio, gamma)
    least = hypersonic_total_temperature_ratio(g) if supersonic else -np.inf
    tau = np.where((tau > least) & (tau <= 1.0), tau, np.nan)
    root = (g + 1.0) * np.sqrt(1.0 - tau)
    with np.errstate(divide="ignore", invalid="ignore"):
        square = tau / (g + 1.0 - tau * g - root if supersonic else g + 1.0 - tau * g + root)
        return np.sqrt(square)


def mach_from_pressure(ratio: ArrayLike, gamma: ArrayLike) -> Array:
    """Mach number at which p/p* has a value.

    ratio: p/p*, (N,), 1, above 0 and at most 1 + gamma. gamma: (N,), 1. Returns (N,), 1; NaN out of range.
    Source: Shapiro (1953), ch. 7, solved for M.
    """
    r, g = operands(ratio, gamma)
    r = np.where((r > 0.0) & (r <= 1.0 + g), r, np.nan)
    return np.sqrt(((1.0 + g) / r - 1.0) / g)


def mach_from_temperature(ratio: ArrayLike, gamma: ArrayLike, beyond_hottest: bool) -> Array:
    """Mach number at which T/T* has a value, below or above the point of largest static temperature.

    ratio: T/T*, (N,), 1, above 0 and at most the largest. gamma: (N,), 1. beyond_hottest: the branch above
    M = gamma^(-1/2). Returns (N,), 1; NaN out of range.
    Source: Shapiro (1953), ch. 7: the square root of the ratio is a quadratic in M.
    """
    r, g = operands(ratio, gamma)
    top = hottest_point(g).temperature_ratio
    r = np.where((r > 0.0) & (r <= top), r, np.nan)
    # (1+g)^2 - 4 g r in terms of the distance from the top, where the two branches meet
    spread = np.sqrt(4.0 * g * (top - r))
    large = (1.0 + g + spread) / (2.0 * g * np.sqrt(r))
    return large if beyond_hottest else 1.0 / (g * large)
