"""What an inlet can do, in any gas: how far it may contract inside, and ramps of equal strength.

At constant ratio of specific heats these equal the closed forms of `cycle.flow.limits`. Angles are in radians.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from cycle.arrays import Array
from cycle.flow import gas_shocks, gas_waves, roots, states
from cycle.gas.base import Gas
from cycle.gas.state import State

_PEAK_WIDTH = 1e-5
_TOLERANCE = 1e-11


class EqualStrength(NamedTuple):
    """Ramps of equal strength: turns (n, N) rad, each from the stream ahead of it, and their normal Mach number (N,), 1."""

    turns: Array
    normal_mach: Array


def _contraction(gas: Gas, total_enthalpy: Array, state: State, flux: Array) -> Array:
    critical = states.sonic(gas, total_enthalpy, state.entropy, state)
    return np.where(critical.good & state.good, critical.density * critical.sound_speed / flux, np.nan)


@np.errstate(all="ignore")
def isentropic_contraction_limit(gas: Gas, before: State, velocity: Array) -> Array:
    """Largest internal contraction (entry over throat area) that a started supersonic stream passes without loss.

    gas: N points. before: the state at the entry of the internal contraction. velocity: (N,), m/s.
    Returns (N,), 1; NaN below Mach 1. Source: Kantrowitz and Donaldson, NACA WR L-713 (1945) (from memory).
    """
    total, flux = before.enthalpy + 0.5 * velocity**2, before.density * velocity
    return np.where(velocity >= before.sound_speed, _contraction(gas, total, before, flux), np.nan)


@np.errstate(all="ignore")
def starting_contraction_limit(gas: Gas, before: State, velocity: Array) -> Array:
    """Largest internal contraction that starts by itself: a normal shock at the entry, then isentropic to a sonic throat.

    gas: N points. before: the state at the entry of the internal contraction. velocity: (N,), m/s.
    Returns (N,), 1; NaN below Mach 1. Source: Kantrowitz and Donaldson, NACA WR L-713 (1945) (from memory).
    """
    front = gas_shocks.normal_shock(gas, before, velocity)
    total, flux = before.enthalpy + 0.5 * velocity**2, before.density * velocity
    return np.where(front.attached, _contraction(gas, total, front.state, flux), np.nan)


def _turns(gas: Gas, before: State, velocity: Array, normal_mach: Array, count: int) -> Array:
    """Turns (count, N) of shocks of one normal Mach number; NaN from where the stream is slower than that."""
    state, speed, turns = before, velocity, []
    for _ in range(count):
        wave = np.arcsin(normal_mach * state.sound_speed / speed)
        turned, front = gas_waves.shock_of_wave(gas, state, speed, wave)
        turns.append(turned)
        state, speed = front.state, front.velocity
    return np.array(turns)


@np.errstate(all="ignore")
def equal_strength_turns(gas: Gas, before: State, velocity: Array, total_turn: Array, count: int) -> EqualStrength:
    """Ramp angles whose shocks all have the same normal Mach number and together turn the stream by a total angle.

    gas: N points. before: the state ahead of the first ramp. velocity: (N,), m/s. total_turn: (N,), rad, above 0.
    count: number of ramps, at least 1. Returns `EqualStrength`; NaN where weak shocks cannot turn so far.
    Source: Oswatitsch (1944), NACA TM 1140 (1947): shocks of equal strength lose the least; the sum is a root in that strength.
    """

    def sum_of(normal: Array) -> Array:
        total = _turns(gas, before, velocity, normal, count).sum(0)
        return np.where(np.isnan(total), -1.0, total)

    least, most = np.full_like(velocity, 1.0 + 1e-6), velocity / before.sound_speed
    strongest = roots.peak(sum_of, least, most, _PEAK_WIDTH)
    normal = roots.bracketed(lambda n: sum_of(n) - total_turn, least, strongest, _TOLERANCE)
    return EqualStrength(_turns(gas, before, velocity, normal, count), normal)
