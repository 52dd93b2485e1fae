"""Constant-area heat addition in any gas: the Rayleigh line by mass, impulse and total enthalpy.

Shapiro (1953), ch. 7, for the line; the sonic point decides choking. At Mach 1 the line's total enthalpy is stationary,
so a state at p* = F/(1 + gamma_s), found by (v, p), gives the largest total enthalpy to second order in its own error.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array, Flags
from cycle.gas.base import Gas
from cycle.gas.state import NOT_CONVERGED, State


@dataclass(frozen=True, slots=True)
class SonicPoint:
    """Mach 1 on the Rayleigh line of each point (N,): state, specific volume m3/kg, largest total enthalpy J/kg,
    curvature of the total enthalpy over the specific volume."""

    state: State
    volume: Array
    total_enthalpy: Array
    curvature: Array


def sonic_point(gas: Gas, impulse: Array, flux: Array) -> SonicPoint:
    """Sonic point of the line p + G^2 v = F; impulse F Pa, flux G kg/(s m2), each (N,)."""
    state: State | None = None
    gamma = np.full_like(impulse, 1.22)
    for _ in range(5):
        p = impulse / (1.0 + gamma)
        state = gas.at("vp", (impulse - p) / flux**2, p, start=state)
        moved = np.abs(state.isentropic_exponent / gamma - 1.0)
        gamma = np.where(state.good, state.isentropic_exponent, gamma)
        if np.all(moved < 1e-7):
            break
    assert state is not None
    volume = (impulse - state.pressure) / flux**2
    return SonicPoint(
        state,
        volume,
        state.enthalpy + 0.5 * (flux * volume) ** 2,
        0.5 * (gamma + 1.0) / (gamma - 1.0) * flux**2,
    )


def constant_area(
    gas: Gas, impulse: Array, flux: Array, total_enthalpy: Array, supersonic: Flags, point: SonicPoint
) -> tuple[State, Flags]:
    """State (N,) behind heat addition at constant area, and whether the line reaches `total_enthalpy` at all.

    impulse F Pa, flux G kg/(s m2), total_enthalpy J/kg behind the heat addition, each (N,); supersonic: the branch.
    False flags mean choked: the state there must not be used.
    """
    passes = total_enthalpy <= point.total_enthalpy
    sign = np.where(supersonic, 1.0, -1.0)
    away = np.sqrt(np.maximum(point.total_enthalpy - total_enthalpy, 0.0) / point.curvature)
    ceiling = impulse / flux**2
    volume = np.clip(point.volume + sign * away, 0.02 * ceiling, 0.98 * ceiling)
    with np.errstate(all="ignore"):
        start = gas.at("vp", volume, impulse - flux**2 * volume, start=point.state)
        state = gas.at("momentum", impulse, flux, total_enthalpy, flux, start=start)
        mach = flux / state.density / state.sound_speed
    right = np.where(supersonic, mach >= 1.0 - 1e-6, mach <= 1.0 + 1e-6)
    return state.flagged(passes & ~right, NOT_CONVERGED), passes
