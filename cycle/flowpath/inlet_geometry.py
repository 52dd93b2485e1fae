"""Inlet by geometry: ramps, an isentropic ramp or a cone outside; cowl shock, contraction and normal shock inside.

Every stage is solved in the stream's own gas. A stage without a solution ends the point: it carries a fault and the stage's place,
and that stage and all behind it are NaN. Station 1 is the last external stage, station 2 the last one of all.
Directions are angles from the flight direction, radians, positive away from the cowl's axis.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow import gas_cone, gas_shocks, gas_waves, inlet_shape, states
from cycle.flow.inlet_shape import Capture, Shape
from cycle.flowpath.stream import Stream
from cycle.gas.base import Gas
from cycle.gas.state import NOT_CONVERGED, OUT_OF_RANGE, State, merge, state_from

FAULTS: dict[str, str] = {
    "solved": "every stage of the inlet has a solution",
    "detached": "the turn asked for is larger than an attached shock gives at this Mach number",
    "over-turned": "the isentropic ramp turns the stream past Mach 1",
    "waves-merge": "the waves of two ramps meet inside the captured stream",
    "lip-blocked": "the lip lies on or under the ramp",
    "over-contracted": "the throat is smaller than the stream passes at Mach 1",
    "no-normal-shock": "the stream ahead of the normal shock is not supersonic, or its area is smaller than the throat",
    "out-of-range": "a state left the range of the data (150 to 6000 K)",
    "not-converged": "an iteration ended without an answer: a defect of the program, please report it",
}
"""Why a point has no solution, in words; `Inlet.fault` counts through them."""

FAULT_NAMES = tuple(FAULTS)
_CODE = {name: i for i, name in enumerate(FAULT_NAMES)}

_FACETS = 32
"""Straight pieces that stand for an isentropic ramp in its geometry."""

_ALONG = 1e-9
"""Direction within which a stream runs along the flight, rad: above the rounding of a sum of turns; no shock turns by so little."""


@dataclass(frozen=True, slots=True)
class Internal:
    """What happens behind the lip, each (N,) or None where it does not happen.

    cowl_turn: shock from the lip that turns the stream back, rad; None turns it back to the flight direction, zeros leave
    the stream as it is. throat_area: isentropic contraction to that area, m2; or
    contraction: to the lip's stream area over this. shock_area_ratio: normal shock where the area
    is this multiple of the area before it, at least 1; the stream is subsonic behind it.
    axial: whether a second shock turns what `cowl_turn` leaves, so that the stream ends in the flight direction.
    """

    cowl_turn: Array | None = None
    throat_area: Array | None = None
    shock_area_ratio: Array | None = None
    contraction: Array | None = None
    axial: bool = False


@dataclass(frozen=True, slots=True)
class Stage:
    """One stage: the stream behind it, and (N,) rad: its direction, the turn asked of it, and the wave angle from the stream
    ahead (of the first wave of an isentropic turn; NaN of a contraction).

    kind: "ramp", "isentropic", "cone", "cowl", "contraction", "expansion" or "normal". wall: the state on the surface of a cone.
    """

    name: str
    kind: str
    stream: Stream
    direction: Array
    turn: Array
    angle: Array
    wall: State | None = None


@dataclass(frozen=True, slots=True)
class Inlet:
    """A solved inlet of N points.

    flight: station 0 with the mass flow that is captured. stages: in order; the first `external` of them lie outside the cowl.
    captured_fraction (N,): captured over lip area, 1; 1 where no lip is given. additive_drag (N,), N: NaN where no lip is given.
    inside (n, N): which external waves pass into the cowl; no rows where no lip is given. throat_area (N,), m2: as stated, or of
    the stream. fault, place (N,): position in `FAULT_NAMES`, and of the stage that failed, or -1.
    """

    flight: Stream
    stages: tuple[Stage, ...]
    external: int
    captured_fraction: Array
    additive_drag: Array
    inside: Flags
    throat_area: Array
    fault: Codes
    place: Codes

    @property
    def lip(self) -> Stream:
        """Station 1: behind the external compression."""
        return self.stages[self.external - 1].stream if self.external else self.flight

    @property
    def exit(self) -> Stream:
        """Station 2: the end of the inlet."""
        return self.stages[-1].stream if self.stages else self.flight

    def ahead(self, position: int) -> Stream:
        """The stream that enters the stage at `position`."""
        return self.stages[position - 1].stream if position else self.flight


@dataclass(frozen=True, slots=True)
class _Raw:
    name: str
    kind: str
    state: State
    velocity: Array
    direction: Array
    turn: Array
    angle: Array
    wall: State | None


class _Path:
    """The inlet under way. A point that failed keeps its last good state as a stand-in; `finish` blanks it."""

    def __init__(self, flight: Stream) -> None:
        n = flight.velocity.size
        self.arriving, self.gas = flight, flight.gas
        self.state, self.velocity, self.direction = flight.state, flight.velocity, np.zeros(n)
        self.fault: Codes = np.zeros(n, np.int64)
        self.place: Codes = np.full(n, -1)
        self.raw: list[_Raw] = []

    def fail(self, bad: Flags, fault: str, place: int) -> None:
        """Points that failed for this reason, unless they did before."""
        new = bad & (self.fault == 0)
        self.fault[new], self.place[new] = _CODE[fault], place

    def check(self, state: State, place: int) -> None:
        self.fail(state.range == OUT_OF_RANGE, "out-of-range", place)
        self.fail(state.range == NOT_CONVERGED, "not-converged", place)

    def add(self, name: str, kind: str, found: tuple[State, Array, Array], turn: Array, angle: Array, wall: State | None = None) -> None:
        """One more stage: state, velocity and direction behind it."""
        state, velocity, direction = found
        self.check(state, len(self.raw))
        on = self.fault == 0
        self.state, self.velocity = merge(on, state, self.state), np.where(on, velocity, self.velocity)
        self.direction = np.where(on, direction, self.direction)
        self.raw.append(_Raw(name, kind, self.state, self.velocity, self.direction, turn, angle, wall))

    def shock(self, name: str, kind: str, turn: Array, sign: float | Array = 1.0) -> None:
        front = gas_shocks.oblique_shock(self.gas, self.state, self.velocity, turn)
        still = turn < _ALONG  # a point of the batch that has no such shock
        self.fail(~(front.attached | still), "detached", len(self.raw))
        state, velocity = merge(still, self.state, front.state), np.where(still, self.velocity, front.velocity)
        self.add(name, kind, (state, velocity, self.direction + sign * turn), turn, front.angle)

    def finish(self, captured: Capture, external: int, internal: Internal, assessed: bool) -> Inlet:
        full, inside = self.arriving, captured.inside if assessed else captured.inside[:0]
        flow = full.mass_flow * captured.fraction
        lost = (self.fault > 0) & (self.place < external)
        stages = tuple(self._stage(raw, k, flow) for k, raw in enumerate(self.raw))
        drag = np.where(lost | ~np.full(lost.shape, assessed), np.nan, captured.additive_pressure * full.area)
        flight = Stream(full.gas, full.state, full.velocity, np.where(lost, np.nan, flow), full.axial_factor)
        fraction = np.where(lost, np.nan, captured.fraction)
        narrowing = [s.stream for s in stages if s.kind not in ("expansion", "normal")]
        throat = (narrowing or [flight])[-1].area if internal.throat_area is None else internal.throat_area
        return Inlet(flight, stages, external, fraction, drag, inside & ~lost, throat, self.fault, self.place)

    def _stage(self, raw: _Raw, k: int, flow: Array) -> Stage:
        bad = (self.fault > 0) & (self.place <= k)

        def blank(values: Array) -> Array:
            return np.where(bad, np.nan, values)

        direction = blank(raw.direction)
        moving = Stream(self.gas, _blanked(raw.state, bad), blank(raw.velocity), blank(flow), np.cos(direction))
        wall = None if raw.wall is None else _blanked(raw.wall, bad)
        return Stage(raw.name, raw.kind, moving, direction, raw.turn, blank(raw.angle), wall)


def _blanked(state: State, bad: Flags) -> State:
    """The state with NaN, flagged, where `bad` holds."""
    empty = state_from(None if v is None else np.full_like(v, np.nan if v.dtype.kind == "f" else NOT_CONVERGED) for v in state.values())
    return merge(bad, empty, state)


def _no_lip(n: int) -> Capture:
    """Full capture, nothing known of the lip."""
    return Capture(np.ones(n), np.full(n, np.nan), np.zeros((0, n), np.bool_), np.zeros(n, np.bool_))


def _plane_capture(path: _Path, shape: Shape | None, waves: tuple[Array, Array, Array]) -> Capture:
    """waves: turns, angles and pressures behind, each (n, N)."""
    n = path.velocity.size
    if shape is None or not waves[0].size:
        return _no_lip(n)
    found = inlet_shape.capture(shape, *waves, path.arriving.state.pressure)
    path.fail(found.merged, "waves-merge", 0)
    path.fail(~(inlet_shape.clearance(shape, waves[0]) > 0.0), "lip-blocked", 0)
    return found


def _inside_cowl(path: _Path, internal: Internal, flow: Array) -> None:
    """The stages behind the lip."""
    lip_flux = path.state.density * path.velocity
    back = path.direction if internal.cowl_turn is None else internal.cowl_turn
    if np.any(back != 0.0):
        path.shock("cowl shock", "cowl", back, -1.0)
    left = np.where((np.abs(path.direction) > _ALONG) & (path.fault == 0), path.direction, 0.0)
    if internal.axial and np.any(left != 0.0):
        path.shock("second cowl shock", "cowl", np.abs(left), -np.sign(left))
    if internal.throat_area is not None:
        _contract(path, flow / internal.throat_area)
    elif internal.contraction is not None:
        _contract(path, lip_flux * internal.contraction)
    if internal.shock_area_ratio is not None:
        _normal_shock(path, internal.shock_area_ratio)


def _contract(path: _Path, flux: Array) -> None:
    """Isentropic flow to a mass flux, supersonic."""
    total, still = path.state.enthalpy + 0.5 * path.velocity**2, np.zeros_like(flux)
    critical = states.sonic(path.gas, total, path.state.entropy, path.state)
    state, passes = states.at_flux(path.gas, total, path.state.entropy, flux, np.ones(flux.shape, np.bool_), critical)
    path.fail(~passes, "over-contracted", len(path.raw))
    path.add("contraction", "contraction", (state, states.velocity(total, state), path.direction), still, np.full_like(flux, np.nan))


def _normal_shock(path: _Path, ratio: Array) -> None:
    """Supersonic expansion to `ratio` of the area, then a normal shock: two stages."""
    flux, total = path.state.density * path.velocity, path.state.enthalpy + 0.5 * path.velocity**2
    possible = (path.velocity > path.state.sound_speed) & (ratio >= 1.0)
    wide = np.where(possible, ratio, 1.0)
    path.fail(~possible, "no-normal-shock", len(path.raw))
    ahead = states.expanded_to_flux(path.gas, total, path.state.entropy, flux / wide, path.state)
    still = np.zeros_like(flux)
    path.add("expansion", "expansion", (ahead, states.velocity(total, ahead), path.direction), still, np.full_like(flux, np.nan))
    front = gas_shocks.normal_shock(path.gas, path.state, path.velocity)
    path.fail(~front.attached, "no-normal-shock", len(path.raw))
    path.add("normal shock", "normal", (front.state, front.velocity, path.direction), still, front.angle)


def _external_waves(path: _Path) -> tuple[Array, Array, Array]:
    """Turns, wave angles and pressures behind, each (n, N)."""
    shape = (len(path.raw), path.velocity.size)
    rows = [(r.turn, r.angle, r.state.pressure) for r in path.raw]
    turns, angles, pressures = (np.array([row[i] for row in rows]).reshape(shape) for i in range(3))
    return turns, angles, pressures


@np.errstate(all="ignore")
def ramps(flight: Stream, turns: Array, internal: Internal, shape: Shape | None = None) -> Inlet:
    """Plane ramps, each an attached weak oblique shock, then the stages behind the lip.

    flight: station 0 with the mass flow of the whole lip area. turns: (n, N), rad, each relative to the ramp before it; n = 0 is a
    pitot inlet. internal: what happens behind the lip. shape: corners and lip, for the captured fraction and additive drag.
    Returns `Inlet`. Source: NACA Report 1135 (1953), oblique shocks applied in sequence, in the gas of the stream.
    """
    path = _Path(flight)
    for k, turn in enumerate(turns):
        path.shock(f"ramp {k + 1}", "ramp", turn)
    captured = _plane_capture(path, shape, _external_waves(path))
    _inside_cowl(path, internal, flight.mass_flow * captured.fraction)
    return path.finish(captured, len(turns), internal, shape is not None)


@dataclass(frozen=True, slots=True)
class _Fan:
    """An isentropic turn in equal pieces: turns, wave angles and pressures behind each, (facets, N)."""

    turns: Array
    angles: Array
    pressures: Array


def _fan(gas: Gas, before: State, velocity: Array, turn: Array) -> _Fan:
    n = turn.size
    points = np.tile(np.arange(n), _FACETS)
    share = np.repeat(np.arange(1, _FACETS + 1) / _FACETS, n)
    behind = gas_waves.isentropic_turn(gas.take(points), before.take(points), velocity[points], share * turn[points])
    mu = np.arcsin(np.minimum(1.0, behind.state.sound_speed / behind.velocity)).reshape(_FACETS, n)
    mu = np.concatenate([np.arcsin(np.minimum(1.0, before.sound_speed / velocity))[None], mu])
    piece = np.broadcast_to(turn / _FACETS, (_FACETS, n))
    # one line for each piece: the mean of the Mach lines ahead of it and behind it
    return _Fan(piece, 0.5 * (mu[:-1] + mu[1:] + piece), behind.state.pressure.reshape(_FACETS, n))


@np.errstate(all="ignore")
def isentropic_ramp(flight: Stream, turn: Array, internal: Internal, wedge: Array | None = None, shape: Shape | None = None) -> Inlet:
    """A concave ramp that turns the stream isentropically, behind an optional straight wedge.

    flight: station 0 with the mass flow of the whole lip area. turn: of the curved part, (N,), rad. internal: what happens behind the
    lip. wedge: first straight turn, an oblique shock, (N,), rad. shape: corners of the wedge and of 32 straight pieces of the
    curve, and the lip: see `isentropic_waves`. Returns `Inlet`.
    Source: NACA Report 1135 (1953), Prandtl-Meyer turning, in the gas of the stream.
    """
    path = _Path(flight)
    if wedge is not None:
        path.shock("wedge", "ramp", wedge)
    first = _external_waves(path)
    fan = _fan(path.gas, path.state, path.velocity, turn) if shape is not None else None
    behind = gas_waves.isentropic_turn(path.gas, path.state, path.velocity, turn)
    path.fail(~behind.possible & behind.state.good, "over-turned", len(path.raw))
    angle = np.arcsin(np.minimum(1.0, path.state.sound_speed / path.velocity))
    path.add("isentropic ramp", "isentropic", (behind.state, behind.velocity, path.direction + turn), turn, angle)
    pieces = first if fan is None else tuple(np.concatenate(p) for p in zip(first, (fan.turns, fan.angles, fan.pressures), strict=True))
    captured = _plane_capture(path, shape, (pieces[0], pieces[1], pieces[2]))
    external = len(path.raw)
    _inside_cowl(path, internal, flight.mass_flow * captured.fraction)
    return path.finish(captured, external, internal, shape is not None)


@np.errstate(all="ignore")
def isentropic_waves(flight: Stream, turn: Array, wedge: Array | None = None) -> tuple[Array, Array]:
    """Turns and wave angles of an isentropic ramp as straight pieces, (32 or 33, N), rad: what `inlet_shape.shape_on_lip` needs.

    flight: station 0 at the design condition. turn, wedge: as in `isentropic_ramp`. Source: as there.
    """
    path = _Path(flight)
    if wedge is not None:
        path.shock("wedge", "ramp", wedge)
    fan = _fan(path.gas, path.state, path.velocity, turn)
    turns, angles, _ = _external_waves(path)
    return np.concatenate([turns, fan.turns]), np.concatenate([angles, fan.angles])


@dataclass(frozen=True, slots=True)
class _ConeEntry:
    """One uniform stream in the place of conical flow at the lip plane, and what the lip captures."""

    state: State
    direction: Array
    captured: Capture


def _cone_entry(flight: Stream, flow: gas_cone.Cone, half_angle: Array, ray: Array) -> _ConeEntry:
    """The stream that carries the mass, axial impulse, energy and entropy of the conical flow through the plane of the lip.

    The ray through the lip bounds a cone on which the flow is uniform; the mass and the impulse that cross it are those
    of the plane, so nothing is integrated.
    """
    before, u0, gas = flight.state, flight.velocity, flight.gas
    on_wave = np.minimum(ray, flow.front.angle)
    at = gas_cone.on_ray(gas, before, u0, flow.front.angle, on_wave, flow.layer)
    flux = np.where(ray < flow.front.angle, -at.state.density * at.normal_velocity / np.sin(on_wave), before.density * u0)
    momentum = flux * at.axial_velocity + at.state.pressure
    additive = np.where(ray < flow.front.angle, momentum - flux * u0 - before.pressure, 0.0)
    body = (np.tan(half_angle) / np.tan(on_wave)) ** 2
    impulse = (momentum - flow.surface.pressure * body) / (1.0 - body)
    state = _of_impulse(gas, at.state, impulse, flux / (1.0 - body))
    speed = states.velocity(before.enthalpy + 0.5 * u0**2, state)
    direction = np.arccos(flux / (1.0 - body) / (state.density * speed))
    inside = (ray > flow.front.angle * (1.0 + 1e-9))[None]
    captured = Capture(flux / (before.density * u0), additive, inside, np.zeros(u0.shape, np.bool_))
    return _ConeEntry(state.flagged(~np.isfinite(direction)), direction, captured)


def _of_impulse(gas: Gas, start: State, impulse: Array, flux: Array) -> State:
    """State on the isentrope of `start` with p + flux^2/rho = impulse, flux being axial and faster than sound: Newton in ln p."""
    state = start
    for _ in range(30):
        carried = flux**2 / state.density
        step = (impulse - state.pressure - carried) / (state.pressure - carried / state.isentropic_exponent)
        state = gas.at("sp", start.entropy, state.pressure * np.exp(np.clip(step, -0.5, 0.5)), start=state)
        if not np.any(np.abs(step) > 1e-13):
            break
    return state.flagged(~(np.abs(step) < 1e-9))


@np.errstate(all="ignore")
def cone(flight: Stream, half_angle: Array, internal: Internal, lip_x: Array | None = None, lip_y: Array | None = None) -> Inlet:
    """A cone as external compression of an axisymmetric inlet, then the stages behind the lip.

    flight: station 0 with the mass flow of the whole lip area. half_angle: (N,), rad. internal: what happens behind the lip, plane
    turns of the mean stream. lip_x, lip_y: position of the lip, y the radius, (N,), m; the shock meets the lip where none is given.
    Station 1 is the uniform stream with the mass, axial impulse, energy and entropy of the conical flow through the plane of the lip.
    Returns `Inlet`. Source: Taylor and Maccoll (1933), in the gas of the stream.
    """
    path = _Path(flight)
    flow = gas_cone.cone_flow(path.gas, path.state, path.velocity, half_angle)
    path.fail(~np.isfinite(flow.front.angle), "detached", 0)
    ray = flow.front.angle if lip_x is None or lip_y is None else np.arctan2(lip_y, lip_x)
    path.fail(ray <= half_angle, "lip-blocked", 0)
    entry = _cone_entry(flight, flow, half_angle, ray)
    speed = states.velocity(flight.total_enthalpy, entry.state)
    path.add("cone", "cone", (entry.state, speed, entry.direction), half_angle, flow.front.angle, flow.surface)
    _inside_cowl(path, internal, flight.mass_flow * entry.captured.fraction)
    return path.finish(entry.captured, 1, internal, lip_x is not None)
