"""Constant-area heat addition in any gas: the Rayleigh line by mass, impulse and total enthalpy.

Shapiro (1953), ch. 7, for the line; the sonic point decides choking. At Mach 1 the line's total enthalpy is stationary,
so a state at p* = F/(1 + gamma_s), found by (v, p), gives the largest total enthalpy to second order in its own error.
A state found far from Mach 1 decides as well, and for less: see `heated`.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.gas.base import Gas
from cycle.gas.state import NOT_CONVERGED, OUT_OF_RANGE, State, placed, scatter


@dataclass(frozen=True, slots=True)
class SonicPoint:
    """Mach 1 on the Rayleigh line of each point (N,), by a parabola through a state near it.

    state: near Mach 1; volume: specific volume of the sonic point, m3/kg; total_enthalpy: the largest of the line, J/kg;
    curvature of the total enthalpy over the specific volume, half its second derivative with the sign reversed.
    """

    state: State
    volume: Array
    total_enthalpy: Array
    curvature: Array


_CLOSE = 1e-3
"""Distance from choking, over the size of the parabola, below which the sonic point is sharpened."""

_SHARP = 4


def sonic_point(gas: Gas, impulse: Array, flux: Array, total_enthalpy: Array) -> SonicPoint:
    """Sonic point of the line p + G^2 v = F; impulse F Pa, flux G kg/(s m2), each (N,).

    total_enthalpy: of the stream behind the heat addition, J/kg (N,); where it comes close to the largest one, the point
    is sharpened until choking is decided to the precision of the states.
    """
    p = impulse / (1.0 + _EXPONENT)
    point = _parabola(gas.at("vp", (impulse - p) / flux**2, p), impulse, flux)
    for _ in range(_SHARP):
        size = point.curvature * point.volume**2
        close = np.flatnonzero(np.abs(point.total_enthalpy - total_enthalpy) < _CLOSE * size)
        moved = np.abs(1.0 / point.state.density[close] / point.volume[close] - 1.0)
        close = close[moved > 1e-7]
        if not close.size:
            break
        volume, near = point.volume[close], point.state.take(close)
        again = gas.take(close).at("vp", volume, impulse[close] - flux[close] ** 2 * volume, start=near)
        point = _merged(point, close, _parabola(again, impulse[close], flux[close]))
    return point


_EXPONENT = 1.22
"""First guess of the isentropic exponent of burnt gas; common practice."""


def _parabola(state: State, impulse: Array, flux: Array) -> SonicPoint:
    """Top of the total enthalpy along the line, its isentropic exponent held."""
    g, volume = state.isentropic_exponent, 1.0 / state.density
    curvature = 0.5 * (g + 1.0) / (g - 1.0) * flux**2
    sonic = g * impulse / ((1.0 + g) * flux**2)
    here = state.enthalpy + 0.5 * (flux * volume) ** 2
    return SonicPoint(state, sonic, here + curvature * (volume - sonic) ** 2, curvature)


def _merged(point: SonicPoint, index: Codes, part: SonicPoint) -> SonicPoint:
    columns = [getattr(point, name).copy() for name in ("volume", "total_enthalpy", "curvature")]
    for column, name in zip(columns, ("volume", "total_enthalpy", "curvature"), strict=True):
        column[index] = getattr(part, name)
    return SonicPoint(scatter(point.state, index, part.state), *columns)


@dataclass(frozen=True, slots=True)
class Heated:
    """State behind heat addition; whether the line reaches the total enthalpy; whether its sonic point is in the range of
    the data, where it had to be found; each (N,)."""

    state: State
    passes: Flags
    known: Flags


FAR = 0.06
"""Distance from Mach 1, as `Gas.guess_heated` gives it, from which a guess is trusted to keep its branch: Mach 1.34 and 0.76."""


def heated(gas: Gas, impulse: Array, flux: Array, total_enthalpy: Array, supersonic: Flags) -> Heated:
    """Heat addition at constant area: impulse F Pa, flux G kg/(s m2), total_enthalpy J/kg behind it, each (N,), and branch.

    A state found on its branch shows that the line reaches that far. Where the gas has a guess far from Mach 1 it is tried
    first; the sonic point then decides the rest: it is hotter, so more work, and most streams stay away from it.
    """
    guess = gas.guess_heated(impulse, flux, total_enthalpy, supersonic)
    direct = np.zeros(flux.shape, np.bool_) if guess is None else guess[1] > FAR
    if guess is None or not direct.any():
        return _by_sonic_point(gas, impulse, flux, total_enthalpy, supersonic)
    start = guess[0]
    if direct.all():
        state, fast = gas.at("momentum", impulse, flux, total_enthalpy, flux, start=start), supersonic
    else:
        far = np.flatnonzero(direct)
        targets, fast = [a[far] for a in (impulse, flux, total_enthalpy, flux)], supersonic[far]
        state = gas.take(far).at("momentum", *targets, start=start.take(far))
    found = state.good & ((flux[direct] > state.density * state.sound_speed) == fast)
    passes, known = np.ones(flux.shape, np.bool_), np.ones(flux.shape, np.bool_)
    if not (direct.all() and found.all()):
        direct[direct] = found
        left = np.flatnonzero(~direct)
        rest = _by_sonic_point(gas.take(left), impulse[left], flux[left], total_enthalpy[left], supersonic[left])
        passes[left], known[left] = rest.passes, rest.known
        state = placed(direct, state.take(found), rest.state)
    return Heated(state, passes, known)


def _by_sonic_point(gas: Gas, impulse: Array, flux: Array, total_enthalpy: Array, supersonic: Flags) -> Heated:
    point = sonic_point(gas, impulse, flux, total_enthalpy)
    state, passes = constant_area(gas, impulse, flux, total_enthalpy, supersonic, point)
    return Heated(state, passes, point.state.good)


def constant_area(
    gas: Gas, impulse: Array, flux: Array, total_enthalpy: Array, supersonic: Flags, point: SonicPoint
) -> tuple[State, Flags]:
    """State (N,) behind heat addition at constant area, and whether the line reaches `total_enthalpy` at all.

    impulse F Pa, flux G kg/(s m2), total_enthalpy J/kg behind the heat addition, each (N,); supersonic: the branch.
    False flags mean choked: the state there must not be used. A slow stream has its sonic point far above the range of
    the data; it passes where a state in range is found, and is flagged out of range where none is.
    """
    beyond = ~point.state.good & ~supersonic
    passes = (total_enthalpy <= point.total_enthalpy) | beyond
    live = np.flatnonzero(passes)
    with np.errstate(all="ignore"):
        start = _near_sonic(impulse, flux, total_enthalpy, supersonic, point)
        slow = np.flatnonzero(beyond)
        if slow.size:
            start = scatter(start, slow, _near_rest(gas.take(slow), impulse[slow], flux[slow], total_enthalpy[slow]))
        part = gas.take(live).at("momentum", impulse[live], flux[live], total_enthalpy[live], flux[live], start=start.take(live))
        state = scatter(start, live, part)
        mach = flux / state.density / state.sound_speed
    right = np.where(supersonic, mach >= 1.0 - 1e-6, mach <= 1.0 + 1e-6)
    state = replace(state, range=np.where(beyond & ~(right & state.good), OUT_OF_RANGE, state.range))
    return state.flagged(passes & ~right, NOT_CONVERGED), passes


def _near_sonic(impulse: Array, flux: Array, total_enthalpy: Array, supersonic: Flags, point: SonicPoint) -> State:
    """A start by the parabola, with the sonic state's composition, so that the iteration stays on its branch.

    Far from Mach 1 the parabola is too crude for p: T from the energy balance and v from the impulse, twice.
    """
    sonic, sign = point.state, np.where(supersonic, 1.0, -1.0)
    volume = point.volume + sign * np.sqrt(np.maximum(point.total_enthalpy - total_enthalpy, 0.0) / point.curvature)
    gas_constant = sonic.pressure / (sonic.density * sonic.temperature)
    for _ in range(2):
        energy = total_enthalpy - 0.5 * (flux * volume) ** 2 - sonic.enthalpy
        coldest = np.minimum(300.0, 0.3 * sonic.temperature)
        temperature = np.clip(sonic.temperature + energy / sonic.specific_heat, coldest, 5000.0)
        root = np.sqrt(np.maximum(impulse**2 - 4.0 * flux**2 * gas_constant * temperature, 0.0))
        volume = (impulse + sign * root) / (2.0 * flux**2)
    return replace(sonic, temperature=temperature, pressure=impulse - flux**2 * volume, density=1.0 / volume)


def _near_rest(gas: Gas, impulse: Array, flux: Array, total_enthalpy: Array) -> State:
    """A start for a slow stream: at rest, and from there the pressure that its speed leaves."""
    at_rest = gas.at("hp", total_enthalpy, impulse)
    pressure = np.maximum(impulse - flux**2 / at_rest.density, 0.7 * impulse)
    return replace(at_rest, pressure=pressure, density=at_rest.density * pressure / impulse)
