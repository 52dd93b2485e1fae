"""Isentropic turning of a supersonic stream of any gas, and oblique shocks of known wave angle.

Source: the Prandtl-Meyer relation d(angle) = (M^2-1)^(1/2) dV/V, NACA Report 1135 (1953), eq. (170) (number from memory),
here as (M^2-1)^(1/2) dp/(rho V^2) along the isentrope of the gas. With w = [ln(p*/p)]^(1/2), p* the sonic pressure, the
integrand is smooth down to Mach 1, so that Gauss rules serve, one between two joins of the heat-capacity polynomials. Angles are
in radians.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array, Flags
from cycle.flow import gas_shocks, roots, states
from cycle.gas.base import Gas
from cycle.gas.species import LOWEST, MIDDLE
from cycle.gas.state import NOT_CONVERGED, State

_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(14)
_TOLERANCE = 1e-12
_JOINS = (LOWEST, MIDDLE)
"""Temperatures where the slope of the heat capacity of a real gas jumps, K."""


@dataclass(frozen=True, slots=True)
class Turned:
    """State behind an isentropic turn, the speed there m/s (N,), and whether the stream can turn so far."""

    state: State
    velocity: Array
    possible: Flags


@dataclass(frozen=True, slots=True)
class _Isentrope:
    """A stream (ht J/kg, s J/(kg K)), the logarithm of its sonic pressure (N,), and w at the joins of the gas data, falling."""

    gas: Gas
    total_enthalpy: Array
    entropy: Array
    sonic: Array
    joins: tuple[Array, ...]

    def slope(self, w: Array) -> Array:
        """d(angle)/dw at w (K, N)."""
        points = np.tile(np.arange(self.entropy.size), w.shape[0])
        state = self.gas.take(points).at("sp", self.entropy[points], np.exp(self.sonic - w**2).ravel())
        square = 2.0 * (self.total_enthalpy[points] - state.enthalpy)
        beyond = np.sqrt(np.maximum(square / state.sound_speed**2 - 1.0, 0.0))
        inside: Array = np.where(state.range < NOT_CONVERGED, beyond * state.pressure / (state.density * square), np.nan)
        return 2.0 * w * inside.reshape(w.shape)

    def angle(self, low: Array, high: Array) -> Array:
        """Angle between w `low` and `high` (N,), positive where `high` is the faster."""
        edges = np.array([high, *(np.clip(join, low, high) for join in self.joins), low])
        half = 0.5 * (edges[:-1] - edges[1:])
        nodes = edges[1:] + half * (1.0 + _NODES[:, None, None])
        slopes = self.slope(nodes.reshape(-1, low.size)).reshape(nodes.shape)
        total: Array = (half * (_WEIGHTS[:, None, None] * slopes)).sum((0, 1))
        return total


def _isentrope(gas: Gas, before: State, velocity: Array) -> tuple[_Isentrope, Array]:
    total = before.enthalpy + 0.5 * velocity**2
    sonic = np.log(states.sonic(gas, total, before.entropy, before).pressure)
    joined = [gas.at("ts", T, before.entropy, start=before).pressure for T in _JOINS]
    *joins, w = (np.sqrt(np.maximum(sonic - np.log(p), 0.0)) for p in (*joined, before.pressure))
    return _Isentrope(gas, total, before.entropy, sonic, tuple(joins)), w


@np.errstate(all="ignore")
def prandtl_meyer_angle(gas: Gas, before: State, velocity: Array) -> Array:
    """Prandtl-Meyer angle of a stream in any gas: what an isentropic compression to Mach 1 would turn it by.

    gas: N points. before: its state. velocity: (N,), m/s. Returns (N,), rad; NaN below Mach 1.
    Source: NACA Report 1135, eq. (170), integrated along the isentrope of the gas.
    """
    line, w = _isentrope(gas, before, velocity)
    return np.where(velocity >= before.sound_speed, line.angle(np.zeros_like(w), w), np.nan)


@np.errstate(all="ignore")
def isentropic_turn(gas: Gas, before: State, velocity: Array, deflection: Array) -> Turned:
    """Isentropic compression of a supersonic stream of any gas by a concave wall.

    gas: N points. before: the state ahead. velocity: (N,), m/s. deflection: (N,), rad, at least 0. Returns `Turned`; not
    possible where the stream is subsonic or would be slowed past Mach 1: the state there must not be used.
    Source: NACA Report 1135, eq. (170), integrated along the isentrope of the gas.
    """
    line, w = _isentrope(gas, before, velocity)
    after = roots.bracketed(lambda x: line.angle(x, w) - deflection, np.zeros_like(w), w, _TOLERANCE)
    possible = np.isfinite(after) & (velocity >= before.sound_speed)
    pressure = np.where(possible, np.exp(line.sonic - after**2), before.pressure)
    state = gas.at("sp", before.entropy, pressure, start=before)
    return Turned(state, states.velocity(line.total_enthalpy, state), possible & state.good)


@np.errstate(all="ignore")
def shock_of_wave(gas: Gas, before: State, velocity: Array, angle: Array) -> tuple[Array, gas_shocks.Front]:
    """Oblique shock of known wave angle in any gas: what it turns the stream by, and the flow behind it.

    gas: N points. before: the state ahead. velocity: (N,), m/s. angle: (N,), rad, from the Mach angle to pi/2.
    Returns the deflection (N,), rad, and `Front`; not attached, and NaN, below the Mach angle.
    Source: the Rankine-Hugoniot relations across the normal component, e.g. NACA Report 1135, eqs. (118) to (123) (from memory).
    """
    along = velocity * np.cos(angle)
    normal = gas_shocks.normal_shock(gas, before, velocity * np.sin(angle))
    turned = np.where(normal.attached, angle - np.arctan2(normal.velocity, along), np.nan)
    return turned, gas_shocks.Front(normal.state, np.hypot(normal.velocity, along), angle, normal.attached)
