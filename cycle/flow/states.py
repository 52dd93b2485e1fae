"""Rest, sonic and passage states of a stream of any gas: what isentropic flow asks of a gas model.

A stream is (total enthalpy ht, entropy s, composition); these laws find the state at rest, at a Mach number, at a
pressure or at a mass flux. Shapiro, The Dynamics and Thermodynamics of Compressible Fluid Flow (1953), ch. 4, for the
relations; none of them assumes a constant specific heat.
"""

from __future__ import annotations

import numpy as np

from cycle.arrays import Array, Flags
from cycle.flow import isentropic
from cycle.gas.base import Gas
from cycle.gas.state import NOT_CONVERGED, State

_TURNS = 30
_TOLERANCE = 1e-12


def velocity(total_enthalpy: Array, state: State) -> Array:
    """Speed m/s (N,) of a stream of `total_enthalpy` J/kg in `state`; NaN where the enthalpy exceeds it."""
    with np.errstate(invalid="ignore"):
        return np.sqrt(2.0 * (total_enthalpy - state.enthalpy))


def rest(gas: Gas, total_enthalpy: Array, entropy: Array) -> State:
    """Stagnation state: isentropic rest of the gas model at (ht J/kg, s J/(kg K)), each (N,)."""
    return gas.at("hs", total_enthalpy, entropy)


def from_reservoir(gas: Gas, total_temperature: Array, total_pressure: Array, pressure: Array) -> tuple[State, Array]:
    """State (N,) and speed m/s (N,) of an isentropic expansion from rest at (Tt K, pt Pa) to `pressure` Pa, each (N,)."""
    reservoir = gas.at("tp", total_temperature, total_pressure)
    state = gas.at("sp", reservoir.entropy, pressure)
    return state, velocity(reservoir.enthalpy, state)


def at_mach(gas: Gas, total_enthalpy: Array, entropy: Array, mach: Array, start: State) -> State:
    """State (N,) at the Mach number `mach` (N,) of the stream (ht, s); Newton in ln p, then secant.

    start: any state of the same stream, such as the present one; the first pressure is that of its isentropic exponent. At
    constant entropy dh = v dp and, as long as the exponent changes slowly, d(a^2)/a^2 = (1 - 1/gamma_s) dp/p; the secant takes
    the rest.
    """
    state, slope, before, at = start, None, None, None
    with np.errstate(all="ignore"):
        g, present = start.isentropic_exponent, velocity(total_enthalpy, start) / start.sound_speed
        relative = (1.0 + 0.5 * (g - 1.0) * present**2) / (1.0 + 0.5 * (g - 1.0) * mach**2)
        ln_p = np.log(start.pressure) + np.nan_to_num(g / (g - 1.0) * np.log(relative))
        done = np.zeros(ln_p.shape, bool)
        for _ in range(_TURNS):
            state = gas.at("sp", entropy, np.exp(ln_p), start=state)
            a2 = state.sound_speed**2
            miss = state.enthalpy + 0.5 * mach**2 * a2 - total_enthalpy
            model = a2 / state.isentropic_exponent * (1.0 + 0.5 * mach**2 * (state.isentropic_exponent - 1.0))
            if before is not None and at is not None:
                secant = (miss - before) / (ln_p - at)
                near = np.abs(secant / model - 1.0) < 0.5
                slope = np.where(near, secant, model)
            else:
                slope = model
            step = np.clip(-miss / slope, -1.5, 1.5)
            done |= np.abs(step) < _TOLERANCE
            if done.all():
                break
            before, at = miss, ln_p
            ln_p = np.where(done, ln_p, ln_p + np.nan_to_num(step))
            done |= np.abs(step) < 3e-8
        if not np.array_equal(np.exp(ln_p), state.pressure):
            state = gas.at("sp", entropy, np.exp(ln_p), start=state)
    return state.flagged(~done)


def sonic(gas: Gas, total_enthalpy: Array, entropy: Array, start: State) -> State:
    """Critical state (N,) of the stream (ht, s): isentropic Mach 1, where the mass flux is largest."""
    return at_mach(gas, total_enthalpy, entropy, np.ones_like(entropy), start)


def at_flux(gas: Gas, total_enthalpy: Array, entropy: Array, flux: Array, supersonic: Flags, critical: State) -> tuple[State, Flags]:
    """State (N,) where the stream (ht, s) passes `flux` kg/(s m2), and whether it can.

    supersonic: the branch of each point. critical: the sonic state of the stream. A flux above the critical one has no
    state: its flag is false and its state must not be used. The start comes from the constant-gamma area relation with
    the critical state's exponent.
    """
    limit = critical.density * critical.sound_speed
    ratio = np.maximum(limit / flux, 1.0)
    g = critical.isentropic_exponent
    mach = np.where(supersonic, isentropic.supersonic_mach(ratio, g), isentropic.subsonic_mach(ratio, g))
    relative = (1.0 + 0.5 * (g - 1.0) * mach**2) / (0.5 * (g + 1.0))
    with np.errstate(all="ignore"):
        guess = gas.at("sp", entropy, critical.pressure * relative ** (-g / (g - 1.0)))
        state = gas.at("flux", entropy, total_enthalpy, flux, start=guess)
        fast = velocity(total_enthalpy, state) >= state.sound_speed * (1.0 - 1e-6)
        slow = velocity(total_enthalpy, state) <= state.sound_speed * (1.0 + 1e-6)
    passes = flux <= limit * (1.0 + 1e-10)
    return state.flagged(passes & ~np.where(supersonic, fast, slow), NOT_CONVERGED), passes


def expanded_to_flux(gas: Gas, total_enthalpy: Array, entropy: Array, flux: Array, before: State) -> State:
    """Supersonic state (N,) where the stream (ht, s), sonic or supersonic in `before`, has widened to `flux` kg/(s m2).

    The flux must not exceed that of `before`; no sonic state is needed. Start as in `at_flux`.
    """
    g = before.isentropic_exponent
    mach = np.maximum(velocity(total_enthalpy, before) / before.sound_speed, 1.0)
    ratio = isentropic.area_ratio(mach, g) * before.density * velocity(total_enthalpy, before) / flux
    wide = isentropic.supersonic_mach(np.maximum(ratio, 1.0), g)
    relative = (1.0 + 0.5 * (g - 1.0) * wide**2) / (1.0 + 0.5 * (g - 1.0) * mach**2)
    with np.errstate(all="ignore"):
        guess = gas.at("sp", entropy, before.pressure * relative ** (-g / (g - 1.0)))
        return gas.at("flux", entropy, total_enthalpy, flux, start=guess)
