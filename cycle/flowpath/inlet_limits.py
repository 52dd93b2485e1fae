"""How far an inlet of given geometry is from what ends it, and the flight Mach numbers at which it gets there.

Margins are (allowed - actual)/allowed: positive is safe. Angles are in radians.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from cycle.arrays import Array
from cycle.flow import gas_cone, gas_limits, gas_shocks, gas_waves, inlet_shape, limits, roots
from cycle.flow.inlet_shape import Shape
from cycle.flowpath.inlet_geometry import Inlet, Stage
from cycle.flowpath.stream import Stream
from cycle.gas.base import Gas
from cycle.gas.state import State

_TOLERANCE = 1e-10
_SCAN = 9
_FASTEST = 30.0
_ON_LIP = 1e-6
"""Relative distance of the flight Mach number from that of shock on lip within which the shock is on the lip."""


@dataclass(frozen=True, slots=True)
class Bound:
    """One upper limit of N points. key: "attached", "separation", "start", "contraction" or "shock_on_lip"; stage: name of the stage,
    or ""; unit: a dimension name; actual, allowed (N,), NaN where the point has no such state."""

    key: str
    stage: str
    unit: str
    actual: Array
    allowed: Array

    @property
    def margin(self) -> Array:
        """(allowed - actual)/allowed, (N,)."""
        with np.errstate(all="ignore"):
            margin: Array = (self.allowed - self.actual) / self.allowed
        return margin


def _isentropic_room(gas: Gas, before: State, velocity: Array) -> Array:
    return gas_waves.prandtl_meyer_angle(gas, before, velocity)


def _wedge_room(gas: Gas, before: State, velocity: Array) -> Array:
    return gas_shocks.largest_turning(gas, before, velocity)[0]


_LARGEST_TURN: dict[str, Callable[[Gas, State, Array], Array]] = {
    "ramp": _wedge_room,
    "cowl": _wedge_room,
    "cone": gas_cone.largest_half_angle,
    "isentropic": _isentropic_room,
}


@np.errstate(all="ignore")
def largest_turn(inlet: Inlet, position: int) -> Array:
    """Largest turn that the stage at `position` can give its stream: detachment, or compression to Mach 1, (N,), rad.

    inlet: `Inlet`. NaN where the stream ahead has no state. Raises KeyError for a stage that does not turn.
    Source: NACA Report 1135 (1953); Taylor and Maccoll (1933); solved in the gas of the stream.
    """
    ahead, room = inlet.ahead(position), _LARGEST_TURN[inlet.stages[position].kind]
    found = np.full(ahead.velocity.shape, np.nan)
    there = np.flatnonzero(np.isfinite(ahead.velocity) & (ahead.mach > 1.0))
    if there.size:
        part = ahead.take(there)
        found[there] = room(part.gas, part.state, part.velocity)
    return found


def _attached(inlet: Inlet) -> list[Bound]:
    rows = [(k, s) for k, s in enumerate(inlet.stages) if s.kind in _LARGEST_TURN]
    return [Bound("attached", s.name, "angle", s.turn, largest_turn(inlet, k)) for k, s in rows]


def _separation(inlet: Inlet) -> list[Bound]:
    """A wave at the nose meets no boundary layer."""
    rows = [(k, s) for k, s in enumerate(inlet.stages) if k and s.kind in ("ramp", "cowl", "normal")]
    found = []
    for k, stage in rows:
        ahead = inlet.ahead(k)
        ratio = stage.stream.state.pressure / ahead.state.pressure
        found.append(Bound("separation", stage.name, "ratio", ratio, limits.separation_pressure_ratio(ahead.mach)))
    return found


def internal_contraction(inlet: Inlet) -> Array:
    """Area of the entering stream over throat area, (N,), 1; the entry is across the stream behind the external compression.

    inlet: `Inlet`. Source: definition.
    """
    return inlet.lip.area / inlet.throat_area


@np.errstate(all="ignore")
def starting_contraction(inlet: Inlet) -> Array:
    """Largest internal contraction that starts by itself at the lip of this inlet, (N,), 1.

    inlet: `Inlet`. Source: Kantrowitz and Donaldson, NACA WR L-713 (1945) (from memory), in the gas of the stream.
    """
    lip = inlet.lip
    return gas_limits.starting_contraction_limit(lip.gas, lip.state, lip.velocity)


@np.errstate(all="ignore")
def passing_contraction(inlet: Inlet) -> Array:
    """Largest internal contraction that the started stream passes without loss, (N,), 1.

    inlet: `Inlet`. Source: as `starting_contraction`.
    """
    lip = inlet.lip
    return gas_limits.isentropic_contraction_limit(lip.gas, lip.state, lip.velocity)


def starting_throat_area(inlet: Inlet) -> Array:
    """Least throat area with which this inlet starts by itself, (N,), m2.

    inlet: `Inlet`. Source: as `starting_contraction`.
    """
    least: Array = inlet.lip.area / starting_contraction(inlet)
    return least


def bounds(inlet: Inlet) -> tuple[Bound, ...]:
    """All limits of the inlet, in the order of the stream.

    inlet: `Inlet`. Returns `Bound`s: attached shock of each turn, also of the one that failed; separation (Korkegi 1975, from
    memory) of each shock but the first, which meets no boundary layer; self-starting and isentropic internal contraction.
    Source: as the functions of this module.
    """
    actual = internal_contraction(inlet)
    contraction = [
        Bound("start", "", "ratio", actual, starting_contraction(inlet)),
        Bound("contraction", "", "ratio", actual, passing_contraction(inlet)),
    ]
    return (*_attached(inlet), *_separation(inlet), *contraction)


def smallest_margin(found: Sequence[Bound], key: str) -> Array:
    """Smallest margin of the limits with one key, (N,), 1; NaN where none is assessed.

    found: as from `bounds`. Raises ValueError where no limit has the key. Source: definition.
    """
    smallest: Array = np.fmin.reduce([b.margin for b in found if b.key == key])
    return smallest


def at_speed(flight: Stream, mach: Array) -> Stream:
    """The same air at another flight Mach number, filling the same area.

    flight: station 0. mach: (N,), 1. Source: definition.
    """
    velocity = mach * flight.state.sound_speed
    return replace(flight, velocity=velocity, mass_flow=flight.area * flight.state.density * velocity)


def design_shape(inlet: Inlet, lip_height: Array) -> Shape:
    """Corners and lip such that every external wave of a plane inlet meets the lip at this flight condition.

    inlet: `Inlet` of ramps. lip_height: (N,), m. Returns `Shape`. Source: plane geometry.
    """
    ramps: Sequence[Stage] = inlet.stages[: inlet.external]
    turns, waves = np.array([s.turn for s in ramps]), np.array([s.angle for s in ramps])
    return inlet_shape.shape_on_lip(turns, waves, lip_height)


def _closed_lip_mach(turn: Array, wave_angle: Array, g: Array) -> Array:
    """Mach number at which a wedge has a wave angle, constant gamma; NaN where none has. NACA Report 1135, eq. (138) solved for M."""
    t = np.tan(turn)
    square = 2.0 * (1.0 / np.tan(wave_angle) + t) / (np.sin(2.0 * wave_angle) - t * (g + np.cos(2.0 * wave_angle)))
    return np.sqrt(np.where(square > 0.0, square, np.nan))


@np.errstate(all="ignore")
def ramp_lip_mach(flight: Stream, turn: Array, lip_x: Array, lip_y: Array) -> Array:
    """Flight Mach number at which the first ramp's shock meets the lip, (N,), 1: below it the inlet spills.

    flight: station 0, its air. turn: of the first ramp, (N,), rad. lip_x, lip_y: (N,), m. NaN where no speed gives
    that wave angle. Source: NACA Report 1135, eq. (138), starts the root; the shock is solved in the gas of the stream.
    """
    before, beta = flight.state, np.arctan2(lip_y, lip_x)
    guess = _closed_lip_mach(turn, beta, before.isentropic_exponent)

    def short(mach: Array) -> Array:
        turned = gas_waves.shock_of_wave(flight.gas, before, mach * before.sound_speed, beta)[0]
        # slower than a Mach wave at this angle turns nothing
        return np.nan_to_num(turned, nan=0.0) - turn

    return np.where(np.isfinite(guess), roots.bracketed(short, 0.8 * guess, 1.25 * guess, _TOLERANCE), np.nan)


@np.errstate(all="ignore")
def cone_lip_mach(flight: Stream, half_angle: Array, lip_x: Array, lip_y: Array) -> Array:
    """Flight Mach number at which the shock of a cone meets the lip, (N,), 1: below it the inlet spills.

    flight: station 0, its air. half_angle: (N,), rad. lip_x, lip_y: (N,), m. NaN where no speed up to Mach 30 gives that wave angle.
    Source: Taylor and Maccoll (1933), solved in the gas of the stream. A wedge needs more speed for the same wave angle.
    """
    before, beta = flight.state, np.arctan2(lip_y, lip_x)
    fastest = np.fmin(1.25 * _closed_lip_mach(half_angle, beta, before.isentropic_exponent), _FASTEST)

    def short(mach: Array) -> Array:
        return gas_cone.closeness(flight.gas, before, mach * before.sound_speed, beta, half_angle)

    return roots.bracketed(short, (1.0 + 1e-4) / np.sin(beta), fastest, _TOLERANCE)


def shock_on_lip(flight: Stream, inlet: Inlet, angle: Array, lip_x: Array, lip_y: Array) -> Bound:
    """Flight Mach number against the one at which the first external shock meets the lip.

    flight: station 0. inlet: solved there, with this lip. angle: of the first ramp or of the cone, (N,), rad. lip_x, lip_y: (N,), m.
    Returns `Bound`, NaN where shocks cross ahead of the lip: there they are steeper than the first, which meets no lip.
    Source: as `ramp_lip_mach` and `cone_lip_mach`.
    """
    search = cone_lip_mach if inlet.stages[0].kind == "cone" else ramp_lip_mach
    mach, allowed = flight.mach, search(flight, angle, lip_x, lip_y)
    # a lip that was placed on the shock is on it to the digits of its place
    on_it = np.abs(mach - allowed) <= _ON_LIP * allowed
    crossed = ~on_it & (mach > allowed) & ~inlet.inside[0]
    return Bound("shock_on_lip", "", "ratio", mach, np.where(on_it, mach, np.where(crossed, np.nan, allowed)))


@np.errstate(all="ignore")
def starting_mach(build: Callable[[Stream], Inlet], flight: Stream, low: Array, high: Array) -> Array:
    """Lowest flight Mach number between `low` and `high` (N,) at which the fixed inlet starts by itself, (N,), 1; NaN without one.

    build: the inlet of fixed geometry at a flight stream. flight: station 0, its air. The range is scanned in 8 steps; the first
    change of sign of allowed less actual contraction is then a root. Source: as `starting_contraction`.
    """

    def room(mach: Array) -> Array:
        inlet = build(at_speed(flight, mach))
        return starting_contraction(inlet) - internal_contraction(inlet)

    grid = low + (high - low) * np.linspace(0.0, 1.0, _SCAN)[:, None]
    signs = np.sign(np.array([room(m) for m in grid]))
    change = signs[:-1] * signs[1:] <= 0.0
    first, columns = np.argmax(change, axis=0), np.arange(low.size)
    found = roots.bracketed(room, grid[first, columns], grid[first + 1, columns], _TOLERANCE)
    return np.where(change.any(0), found, np.nan)
