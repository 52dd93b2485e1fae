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
from cycle.gas.state import NOT_CONVERGED, State, merge, scatter

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

    The flux must not exceed that of `before`; no sonic state is needed. Start as in `at_flux`. Close to Mach 1, where the flux is flat,
    by `_past_sonic`; at the flux of a sonic `before` that state itself. `before` may be a little subsonic, as a throat's stream whose
    composition is kept from there is.
    """
    g = before.isentropic_exponent
    mach = np.maximum(velocity(total_enthalpy, before) / before.sound_speed, 1.0)
    ratio = isentropic.area_ratio(mach, g) * before.density * velocity(total_enthalpy, before) / flux
    wide = isentropic.supersonic_mach(np.maximum(ratio, 1.0), g)
    relative = (1.0 + 0.5 * (g - 1.0) * wide**2) / (1.0 + 0.5 * (g - 1.0) * mach**2)
    with np.errstate(all="ignore"):
        guess = gas.at("sp", entropy, before.pressure * relative ** (-g / (g - 1.0)))
        state = gas.at("flux", entropy, total_enthalpy, flux, start=guess)
        drop = _drop_past_sonic(total_enthalpy, flux, before)
        slow = velocity(total_enthalpy, before) < before.sound_speed * (1.0 - _SLOW)
        near = np.flatnonzero(np.abs(drop) < np.where(slow, _FLAT_FROM_BELOW, _FLAT))
        if near.size:
            part = (total_enthalpy[near], entropy[near], flux[near], before.take(near), drop[near])
            state = scatter(state, near, _past_sonic(gas.take(near), *part))
    return state


_FLAT, _FLAT_FROM_BELOW, _SAME, _SLOW = 1e-3, 0.3, 3e-8, 1e-6
"""Change of ln p from a nearly sonic state below which the flux is too flat for Newton; the same from a state that is subsonic by more
than the last; below which it is rounding."""


def _drop_past_sonic(total_enthalpy: Array, flux: Array, before: State) -> Array:
    """Change of ln p (N,), negative, from the nearly sonic state `before` to `flux` behind Mach 1, to second order.

    d ln G/d ln p = (1 - 1/M^2)/gamma_s, and at Mach 1 d2 ln G/d ln p2 = -(gamma_s + 1)/gamma_s^2 at constant exponent. Shapiro (1953),
    ch. 4. Of use close to Mach 1 only.
    """
    u, g = velocity(total_enthalpy, before), before.isentropic_exponent
    slope, curvature = (1.0 - (before.sound_speed / u) ** 2) / g, (g + 1.0) / g**2
    fall = np.minimum(np.log(flux / (before.density * u)), 0.0)
    drop: Array = (slope - np.sqrt(slope**2 - 2.0 * curvature * fall)) / curvature
    return drop


def _past_sonic(gas: Gas, total_enthalpy: Array, entropy: Array, flux: Array, before: State, drop: Array) -> State:
    """The state (N,) of `expanded_to_flux` where it lies close to Mach 1: Newton in ln p from the change `drop`, held near it because the
    slope vanishes at Mach 1."""
    first = np.log(before.pressure)
    change, held = drop, 0.2 * np.abs(drop)
    for _ in range(6):
        state = gas.at("sp", entropy, np.exp(first + change), start=before)
        u = velocity(total_enthalpy, state)
        slope = (1.0 - (state.sound_speed / u) ** 2) / state.isentropic_exponent
        step = np.nan_to_num(-np.log(state.density * u / flux) / slope)
        change = np.clip(change + step, drop - held, drop + held)
    state = gas.at("sp", entropy, np.exp(first + change), start=before)
    return merge(np.abs(drop) < _SAME, before, state)
