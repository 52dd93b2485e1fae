"""Closed formulas for what an inlet and an isolator can do, constant ratio of specific heats.

A value outside the domain of its formula gives NaN.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from cycle.arrays import Array, ArrayLike
from cycle.flow import isentropic, shocks
from cycle.flow.isentropic import operands
from cycle.flow.roots import peak

_REYNOLDS_EXPONENT = {"circular": 0.25, "rectangular": 0.2}
_KORKEGI_BREAK = 4.5
_PEAK_WIDTH = 1.0e-8


class Span(NamedTuple):
    """Lowest and highest value of what a correlation was measured at."""

    low: float
    high: float


class ShockTrainData(NamedTuple):
    """Span of the Mach number ahead of the train and of the Reynolds number on the momentum thickness there, and their source."""

    mach: Span
    reynolds: Span
    source: str


SHOCK_TRAIN_DATA = {
    "circular": ShockTrainData(Span(1.5, 2.7), Span(5e3, 6e4), "Waltrup and Billig, AIAA Journal 11 (1973) 1404; the span from memory"),
    "rectangular": ShockTrainData(Span(1.5, 2.7), Span(5e3, 6e4), "that of circular ducts, from memory; its own is not known here"),
}
"""Section -> what `shock_train_length` was measured at. A margin about it is a question of data, not of the engine."""


MACH_LOSS_DATA = Span(0.3, 0.7)
"""M3/M0 for which `mach_loss_efficiency` is commonly drawn; from memory, least surely of all here."""


class Compression(NamedTuple):
    """Adiabatic compression, (N,) each, 1: p3/p0, pt3/pt0, kinetic-energy efficiency, and Mach number after it."""

    pressure_ratio: Array
    total_pressure_ratio: Array
    kinetic_energy_efficiency: Array
    mach: Array


class ShockSystem(NamedTuple):
    """Oblique shocks of equal strength closed by a normal shock.

    turns (n, N) rad, each relative to the stream ahead of it; normal_mach (N,) of every oblique shock, 1;
    last_mach (N,) ahead of the normal shock, 1; total_pressure_ratio (N,) of the whole system, 1.
    """

    turns: Array
    normal_mach: Array
    last_mach: Array
    total_pressure_ratio: Array


def ram_recovery(mach: ArrayLike) -> Array:
    """Total-pressure recovery of the military specification: 1, 1 - 0.075 (M-1)^1.35, 800/(M^4 + 935).

    mach: flight, (N,), 1; the pieces join at Mach 1 and (with a small jump) at Mach 5. Returns (N,), 1.
    Source: MIL-E-5008B (from memory).
    """
    m = np.asarray(mach, dtype=np.float64)
    m = np.where(m >= 0.0, m, np.nan)
    middle = 1.0 - 0.075 * np.clip(m - 1.0, 0.0, None) ** 1.35
    return np.where(m <= 5.0, middle, 800.0 / (m**4 + 935.0))


def isentropic_contraction_limit(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Largest internal contraction (entry over throat area) that a started supersonic stream passes, A/A*(M).

    mach: at the entry of the internal contraction, (N,), 1, at least 1. gamma: (N,), 1. Returns (N,), 1.
    Source: Kantrowitz and Donaldson, NACA WR L-713 (1945) (from memory).
    """
    m, g = operands(mach, gamma)
    return isentropic.area_ratio(np.where(m >= 1.0, m, np.nan), g)


def starting_contraction_limit(mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Largest internal contraction (entry over throat area) that starts by itself: a normal shock at the entry.

    mach: at the entry of the internal contraction, (N,), 1, at least 1 (infinity gives the limit). gamma: (N,), 1.
    Returns (N,), 1. Source: Kantrowitz and Donaldson, NACA WR L-713 (1945) (from memory).
    """
    return isentropic.area_ratio(shocks.normal_shock(mach, gamma).mach, gamma)


def kinetic_energy_efficiency(total_pressure_ratio: ArrayLike, mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Kinetic-energy efficiency that belongs to a total-pressure ratio.

    total_pressure_ratio: pt/pt0, (N,), 1, above 0. mach: flight, (N,), 1. gamma: (N,), 1. Returns (N,), 1.
    Source: Heiser and Pratt, Hypersonic Airbreathing Propulsion (1994), ch. 5 (from memory, rederived).
    """
    m, g = operands(mach, gamma)
    ratio = np.asarray(total_pressure_ratio, dtype=np.float64)
    sound = (ratio > 0.0) & (m > 0.0)
    ratio, m = np.where(sound, ratio, np.nan), np.where(sound, m, np.nan)
    return 1.0 - 2.0 / ((g - 1.0) * m**2) * np.expm1(-(g - 1.0) / g * np.log(ratio))


def total_pressure_ratio(kinetic_energy_efficiency: ArrayLike, mach: ArrayLike, gamma: ArrayLike) -> Array:
    """Total-pressure ratio pt/pt0 that belongs to a kinetic-energy efficiency.

    kinetic_energy_efficiency: (N,), 1. mach: flight, (N,), 1. gamma: (N,), 1. Returns (N,), 1.
    Source: Heiser and Pratt, Hypersonic Airbreathing Propulsion (1994), ch. 5 (from memory, rederived).
    """
    m, g = operands(mach, gamma)
    lost = (1.0 - np.asarray(kinetic_energy_efficiency, dtype=np.float64)) * 0.5 * (g - 1.0) * m**2
    lost = np.where(lost > -1.0, lost, np.nan)
    return np.exp(-g / (g - 1.0) * np.log1p(lost))


def mach_loss_efficiency(mach: ArrayLike, mach_after: ArrayLike) -> Array:
    """Kinetic-energy efficiency estimated from how far an inlet slows the stream, 1 - 0.4 (1 - M3/M0)^4.

    mach: flight, (N,), 1. mach_after: after the compression, (N,), 1, at most `mach`. Returns (N,), 1.
    Source: Waltrup, Billig and Stockbridge (1982), a correlation (from memory).
    """
    m0, m3 = np.asarray(mach, dtype=np.float64), np.asarray(mach_after, dtype=np.float64)
    sound = (m3 >= 0.0) & (m3 <= m0) & (m0 > 0.0)
    return 1.0 - 0.4 * (1.0 - np.where(sound, m3, np.nan) / np.where(sound, m0, np.nan)) ** 4


def adiabatic_compression(temperature_ratio: ArrayLike, efficiency: ArrayLike, mach: ArrayLike, gamma: ArrayLike) -> Compression:
    """Compression to a static-temperature ratio at an adiabatic compression efficiency.

    temperature_ratio: T3/T0, (N,), 1. efficiency: (N,), 1. mach: flight, (N,), 1. gamma: (N,), 1.
    Returns `Compression`; NaN where the temperature asked for is below T0 or above the total temperature.
    Source: Heiser and Pratt, Hypersonic Airbreathing Propulsion (1994), ch. 4 and 5 (from memory, rederived).
    """
    m, g = operands(mach, gamma)
    psi, eta = np.asarray(temperature_ratio, dtype=np.float64), np.asarray(efficiency, dtype=np.float64)
    left = 1.0 / isentropic.temperature_ratio(m, g) / psi - 1.0
    sound = (psi >= 1.0) & (left >= 0.0) & (m > 0.0)
    psi, left = np.where(sound, psi, np.nan), np.where(sound, left, np.nan)
    # final temperature over the temperature of the same pressure reached without loss
    loss = psi * (1.0 - eta) + eta
    kept = 1.0 - 2.0 / ((g - 1.0) * m**2) * (psi - 1.0) * (1.0 - eta)
    exponent = g / (g - 1.0)
    return Compression((psi / loss) ** exponent, loss**-exponent, kept, np.sqrt(2.0 / (g - 1.0) * left))


def shock_train_length(
    mach: ArrayLike,
    pressure_ratio: ArrayLike,
    momentum_thickness: ArrayLike,
    momentum_reynolds: ArrayLike,
    height: ArrayLike,
    section: str,
) -> Array:
    """Length of a shock train from its foot to where the duct pressure has risen by a ratio.

    mach: core Mach number ahead of the train, (N,), 1, above 1. pressure_ratio: wall pressure reached over wall
    pressure ahead, (N,), 1, at least 1; the normal-shock ratio is the usual upper bound. momentum_thickness: of the
    boundary layer ahead, (N,), m. momentum_reynolds: on that thickness, (N,), 1. height: of the duct, or its diameter,
    (N,), m. section: "circular" or "rectangular". Returns (N,), m. Raises KeyError for another section.
    Source: Waltrup and Billig, AIAA Journal 11 (1973) 1404 (circular); Billig, Journal of Propulsion and Power
    9 (1993) 499 (rectangular); both from memory, the Reynolds exponents least surely.
    """
    m, rise = np.asarray(mach, dtype=np.float64), np.asarray(pressure_ratio, dtype=np.float64) - 1.0
    m, rise = np.where(m > 1.0, m, np.nan), np.where(rise >= 0.0, rise, np.nan)
    reynolds = np.asarray(momentum_reynolds, dtype=np.float64) ** _REYNOLDS_EXPONENT[section]
    scale = np.sqrt(np.asarray(height, dtype=np.float64) * np.asarray(momentum_thickness, dtype=np.float64))
    return scale * (50.0 * rise + 170.0 * rise**2) / ((m**2 - 1.0) * reynolds)


def separation_pressure_ratio(mach: ArrayLike) -> Array:
    """Pressure ratio of a shock that separates a turbulent boundary layer: 1 + 0.3 M^2, above M 4.5 0.17 M^2.5.

    mach: ahead of the shock, (N,), 1, above 1. Returns (N,), 1. The two pieces do not meet (7.08 and 7.30).
    Source: Korkegi, AIAA Journal 13 (1975) 534 (from memory).
    """
    m = np.asarray(mach, dtype=np.float64)
    m = np.where(m > 1.0, m, np.nan)
    return np.where(m <= _KORKEGI_BREAK, 1.0 + 0.3 * m**2, 0.17 * m**2.5)


def equal_strength_shocks(mach: ArrayLike, normal_mach: ArrayLike, count: int, gamma: ArrayLike) -> ShockSystem:
    """A number of oblique shocks with the same normal Mach number, closed by a normal shock.

    mach: flight, (N,), 1. normal_mach: (N,), 1, at least 1. count: number of oblique shocks. gamma: (N,), 1.
    Returns `ShockSystem`; NaN where the stream falls below the normal Mach number or below Mach 1 on the way.
    Source: Oswatitsch (1944), NACA TM 1140 (1947), with the shock relations of NACA Report 1135.
    """
    m, g = operands(mach, gamma)
    m, normal, g = np.broadcast_arrays(m, np.asarray(normal_mach, dtype=np.float64), g)
    turns, recovery = [], np.ones(m.shape)
    for _ in range(count):
        with np.errstate(invalid="ignore"):
            oblique = shocks.shock_of_wave(m, np.arcsin(normal / m), g)
        turns.append(oblique.deflection)
        m, recovery = oblique.mach, recovery * oblique.total_pressure_ratio
    return ShockSystem(np.array(turns), normal, m, recovery * shocks.normal_shock(m, g).total_pressure_ratio)


def best_equal_strength_shocks(mach: ArrayLike, count: int, gamma: ArrayLike) -> ShockSystem:
    """The equal-strength system of largest total-pressure recovery: a helper to size ramp angles.

    mach: flight, (N,), 1, above 1. count: number of oblique shocks, at least 1. gamma: (N,), 1.
    Returns `ShockSystem`. Source: Oswatitsch (1944), NACA TM 1140 (1947): at the best recovery all oblique shocks have
    the same normal Mach number, so that one number is left to be maximised.
    """
    m, g = operands(mach, gamma)
    m = np.where(m > 1.0, m, np.nan)

    def recovery(normal: Array) -> Array:
        found = equal_strength_shocks(m, normal, count, g).total_pressure_ratio
        return np.where(np.isnan(found), 0.0, found)

    return equal_strength_shocks(m, peak(recovery, np.ones(m.shape), m, _PEAK_WIDTH), count, g)
