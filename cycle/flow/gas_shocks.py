"""Normal and oblique shocks in any gas: mass, momentum and energy across the front, no constant specific heat.

Rankine-Hugoniot relations, e.g. NACA Report 1135 (1953), for the closed constant-gamma forms that start the iteration.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow import roots, shocks
from cycle.gas.base import Gas
from cycle.gas.state import State

_CLEAR = 0.9
"""Share of the constant-gamma detachment deflection below which the two branches are well apart in any gas."""
_SETTLED = 1e-14

_CARRIED_T, _CARRIED_P = 1.4, 10.0
"""Largest ratios across a shock over which a composition is carried as a start: within those of the equilibrium iteration."""


@dataclass(frozen=True, slots=True)
class Front:
    """State behind a shock, the speed there m/s (N,), the wave angle rad (N,), and whether the shock exists."""

    state: State
    velocity: Array
    angle: Array
    attached: Flags


def normal_shock(gas: Gas, before: State, velocity: Array) -> Front:
    """Normal shock in a stream of `velocity` m/s (N,); no shock where it is not supersonic."""
    rho, g = before.density, before.isentropic_exponent
    mach2 = (velocity / before.sound_speed) ** 2
    flux = rho * velocity
    impulse = before.pressure + flux * velocity
    total = before.enthalpy + 0.5 * velocity**2
    with np.errstate(all="ignore"):
        volume = ((g - 1.0) * mach2 + 2.0) / ((g + 1.0) * np.maximum(mach2, 1.0)) / rho
        guess = _closed_behind(before, volume, impulse - flux**2 * volume)
        if guess is None:
            guess = gas.at("hp", total - 0.5 * (flux * volume) ** 2, impulse - flux**2 * volume)
        state = gas.at("momentum", impulse, flux, total, flux, start=guess)
        behind = flux / state.density
    real = (mach2 > 1.0) & (behind <= state.sound_speed * (1.0 + 1e-6))
    return Front(state.flagged((mach2 > 1.0) & ~real), behind, np.full_like(velocity, 0.5 * np.pi), mach2 > 1.0)


def _closed_behind(before: State, volume: Array, pressure: Array) -> State | None:
    """A start behind shocks whose jump is small enough for the composition ahead to be carried over it; None where one is not."""
    T = before.temperature * pressure * volume * before.density / before.pressure
    small = (_CARRIED_T * before.temperature > T) & (_CARRIED_P * before.pressure > pressure)
    if not small.all():
        return None
    sound = np.sqrt(before.isentropic_exponent * pressure * volume)
    return replace(before, temperature=T, pressure=pressure, density=1.0 / volume, sound_speed=sound)


def _turning(gas: Gas, before: State, velocity: Array, angle: Array) -> tuple[Array, Front]:
    """Deflection rad that a wave at `angle` gives, and the flow behind it."""
    across = velocity * np.sin(angle)
    normal = normal_shock(gas, before, across)
    along = velocity * np.cos(angle)
    # a wave this close to a Mach wave turns nothing, and its jump is lost to rounding
    wave = across < before.sound_speed * (1.0 + 1e-7)
    turned = np.where(wave, 0.0, angle - np.arctan2(normal.velocity, along))
    return turned, Front(normal.state, np.hypot(normal.velocity, along), angle, normal.attached)


def largest_turning(gas: Gas, before: State, velocity: Array) -> tuple[Array, Array]:
    """Detachment: the largest deflection rad (N,) of an attached shock and its wave angle rad (N,).

    Scanned about the constant-gamma angle; the maximum is flat, so 1e-4 in angle is 1e-8 in deflection.
    """
    mach = np.maximum(velocity / before.sound_speed, 1.0 + 1e-9)
    centre = shocks.detachment(mach, before.isentropic_exponent).wave_angle
    low = np.maximum(centre - 0.25, np.arcsin(1.0 / mach) + 1e-9)
    high = np.minimum(centre + 0.25, 0.5 * np.pi)

    def turned(angle: Array, at: Codes) -> Array:
        return _turning(gas.take(at), before.take(at), velocity[at], angle)[0]

    angle = roots.scanned_peak(turned, low, high)
    return _turning(gas, before, velocity, angle)[0], angle


def _near_closed(gas: Gas, before: State, velocity: Array, deflection: Array, strong: bool) -> tuple[Array, Flags]:
    """Wave angle rad (N,) by secant steps from the constant-gamma one, and where they have settled, clear of detachment."""
    mach, g = velocity / before.sound_speed, before.isentropic_exponent
    angle = shocks.oblique_shock(mach, deflection, g, strong).wave_angle
    clear = (deflection > 0.0) & (deflection < _CLEAR * shocks.detachment(mach, g).deflection)
    miss = _turning(gas, before, velocity, angle)[0] - deflection
    slope = (shocks.deflection_of_wave(mach, angle * (1.0 - 1e-4), g) - deflection) / (-1e-4 * angle)
    for _ in range(10):
        moved = angle - miss / slope
        now = _turning(gas, before, velocity, moved)[0] - deflection
        slope = np.where(now == miss, slope, (now - miss) / (moved - angle))
        angle, miss = moved, now
        if not np.any(clear & (np.abs(miss) > _SETTLED)):
            break
    return angle, clear & (np.abs(miss) <= _SETTLED)


def _from_bracket(gas: Gas, before: State, velocity: Array, deflection: Array, strong: bool) -> tuple[Array, Flags]:
    """Wave angle rad (N,) between the Mach angle (or the normal) and the detachment angle, and whether the shock is attached."""
    mach = velocity / before.sound_speed
    most, at_most = largest_turning(gas, before, velocity)
    attached = (mach > 1.0) & (deflection <= most) & (deflection >= 0.0)
    edge = np.full_like(mach, 0.5 * np.pi) if strong else np.arcsin(np.minimum(1.0, 1.0 / mach))
    angle = roots.bracketed(lambda b: _turning(gas, before, velocity, b)[0] - deflection, edge, at_most, 1e-14)
    return np.where(attached & np.isfinite(angle), angle, at_most), attached


def oblique_shock(gas: Gas, before: State, velocity: Array, deflection: Array, strong: bool = False) -> Front:
    """Oblique shock that turns the stream by `deflection` rad (N,); weak branch unless `strong`.

    Not attached where the stream is subsonic or the deflection exceeds the largest one of this gas; the state there
    must not be used. The wave angle is found from the constant-gamma one; near detachment, and where that fails, it is a root
    between the Mach angle (or the normal) and the detachment angle.
    """
    with np.errstate(all="ignore"):
        angle, attached = _near_closed(gas, before, velocity, deflection, strong)
        rest = np.flatnonzero(~attached)
        if rest.size:
            part = gas.take(rest), before.take(rest), velocity[rest], deflection[rest]
            angle[rest], attached[rest] = _from_bracket(*part, strong)
        front = _turning(gas, before, velocity, angle)[1]
    return Front(front.state, front.velocity, angle, attached)
