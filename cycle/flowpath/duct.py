"""The burner as a duct: the stream from the isolator's entry to the burner's exit, in whatever mode it runs.

Station 3 is the core behind the shock train before any fuel (station 2 itself where the flow is attached), 4 the exit.
A frictionless isolator of constant area keeps the impulse: p3 A3 + m u3 = p2 A2 + m u2, p3 acting on the whole section.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from cycle.arrays import Array, Codes
from cycle.flow import limits
from cycle.flow.duct.cooling import with_loss
from cycle.flow.duct.core import core_at
from cycle.flow.duct.coupling import solve_block
from cycle.flow.duct.layout import AreaLaw, Duct, Injectors, Supply, Walls, duct_of
from cycle.flow.duct.modes import PANELS
from cycle.flow.duct.solution import (
    MODES,
    PROFILE,
    SOLVED,
    STATUSES,
    THROAT,
    TRAIN,
    UNSTARTED,
    Solution,
    core_places,
    core_rows,
    refuse,
    side_by_side,
)
from cycle.flow.duct.summits import CORNER, ENTRY, EXIT, SMOOTH
from cycle.flowpath.stream import Booking, Stream, stream
from cycle.gas.constant import ConstantGas

BLOCK = 1024
"""Points solved together: as many as keep the states of a march in the processor's cache."""

THROATS = {-1: "none", SMOOTH: "smooth", CORNER: "corner", ENTRY: "entry", EXIT: "exit"}
"""What kind of section the thermal throat is; a corner is a break of the area, of the burning, or an injection."""


@dataclass(frozen=True, slots=True)
class Isolator:
    """Isolator ahead of the burner, each (N,) or scalar: length m, height m (or diameter), momentum thickness of the
    boundary layer m, viscosity of the stream Pa s; section "circular" or "rectangular"."""

    length: Array
    height: Array
    momentum_thickness: Array
    viscosity: Array
    section: str = "circular"


@dataclass(frozen=True, slots=True)
class Flow:
    """How N ducts run.

    mode, status: codes (N,) of `MODES` and `STATUSES`; a shock train longer than its isolator is
    unstarted. entry, exit: streams at 3 and 4; where the status is not solved
    they mean nothing. isolator, burner: what crosses the control surfaces 2-3 and 3-4. figures: each (N,), NaN where it
    has no meaning: see `FIGURES`. tried: codes (N,) of `TRIED` of "attached", "train", "throat". throat: codes (N,), keys
    of `THROATS`. spare: momentum of the core beyond that of the critical flow over the impulse of station 2, (N,), NaN where
    no train was looked for: a train ends where it vanishes. rows: the flow along x by name (R, N), `PROFILE` and
    "total_pressure" if asked for; rows before the first are NaN.
    """

    mode: Codes
    status: Codes
    entry: Stream
    exit: Stream
    isolator: Booking
    burner: Booking
    figures: Mapping[str, Array]
    tried: Mapping[str, Codes]
    throat: Codes
    spare: Array
    rows: Mapping[str, Array]

    def names(self) -> list[str]:
        """The found mode of every point."""
        return [MODES[code] for code in self.mode]

    def statuses(self) -> list[str]:
        """The status of every point."""
        return [STATUSES[code] for code in self.status]


FIGURES = {
    "separated_pressure": "p3, wall pressure of the separated zone, Pa",
    "core_area_ratio": "core area over duct area at burner entry",
    "reattachment_x": "where the core fills the duct, m from burner entry",
    "reattachments": "places where it would fill the duct and fit the throat, of which the first is taken",
    "throat_x": "where the flow is critical, m from burner entry",
    "peak_pressure_ratio": "highest wall pressure over p2",
    "attached_peak_pressure_ratio": "highest wall pressure of the attached march over p2",
    "separation_limit": "pressure ratio that separates",
    "separation_margin": "(limit - attached peak ratio)/limit",
    "unstart_margin": "1 - impulse that the critical flow asks at burner entry over the impulse of station 2",
    "train_length": "length of the shock train, m",
    "isolator_margin": "(isolator length - train length)/isolator length",
    "wall_force": "axial pressure force of the burner's walls beyond the entry section, N",
    "friction": "friction of the burner's walls, N",
    "impulse_error": "estimate of the discretisation error of the exit impulse, over it",
}


def solve_duct(
    entering: Stream,
    law: AreaLaw,
    injectors: Injectors,
    supply: Supply,
    walls: Walls,
    *,
    ahead: Stream | None = None,
    separation: Array | None = None,
    isolator: Isolator | None = None,
    isolated: bool = True,
    asked: str = "auto",
    panels: int = PANELS,
    second: bool = False,
    total_pressures: bool = False,
    most: Codes | None = None,
) -> Flow:
    """Run N ducts from station 2, whose stream holds the burner's gas already.

    ahead: station 2 as it leaves the inlet, where its constant-gamma pair is another one: it changes at 3, and the limits go by its Mach
    number; separation: pressure ratio over p2 at which the boundary layer separates (N,), after Korkegi (1975) where None;
    isolator: None leaves the train's length unknown; isolated: False where the stream enters at 3, so that any shock train is too long;
    asked: "auto", "supersonic" or "thermal-throat"; panels: of a march,
    four nodes each; second: look for a shock train where the attached flow stands, too ("train" in `tried` says);
    total_pressures: also along the duct; most: the last mode that is asked for, see `coupling.solve_block`. A stream that is not
    supersonic is refused. ValueError as `duct_of`; a point without a flow has its status, never an exception.
    """
    ahead = entering if ahead is None else ahead
    duct = duct_of(
        entering.gas, entering.total_enthalpy, entering.velocity, entering.state.pressure, entering.mass_flow,
        entering.area, law, injectors, supply, walls,
    )  # fmt: skip
    if isinstance(ahead.gas, ConstantGas) and isinstance(entering.gas, ConstantGas) and not np.array_equal(ahead.gas.cp, entering.gas.cp):
        duct = replace(duct, entry_heat=ahead.gas.cp, heat_capacity=entering.gas.cp)
    limit = limits.separation_pressure_ratio(ahead.mach) if separation is None else np.broadcast_to(separation, (duct.size,))
    threshold = limit if asked == "auto" else np.full(duct.size, np.inf)
    tried = asked if (ahead.mach > 1.0).any() else "nothing"
    blocks = [np.arange(low, min(low + BLOCK, duct.size)) for low in range(0, max(duct.size, 1), BLOCK)]
    parts = [solve_block(duct.take(w), threshold[w], tried, panels, second, None if most is None else most[w]) for w in blocks]
    found = side_by_side(parts)
    refuse(found, ~(ahead.mach > 1.0))
    if duct.entry_heat is not None:
        duct = replace(duct, total_enthalpy=found.total_enthalpy)
    if found.lost_heat is not None:
        duct = with_loss(duct, found.lost_heat)
    with np.errstate(all="ignore"):
        return _flow(ahead, duct, found, limit, _train(ahead, found, isolator, isolated), total_pressures)


def _flow(entering: Stream, duct: Duct, found: Solution, limit: Array, train: Mapping[str, Array], total_pressures: bool) -> Flow:
    p2, mass = duct.pressure, duct.mass_flow
    core = _core(entering, duct, found.pressure_3)
    share = core.area / duct.entry_area
    behind = _exit(duct, found)
    beside = found.pressure_3 * (duct.entry_area - core.area)
    zero = np.zeros(duct.size)
    fuel = mass * duct.ratio
    burnt = duct.burnt_fraction * duct.burning(duct.end[None])[0]
    heat = fuel * burnt * duct.lost_heat + duct.wall_power + (0.0 if found.lost_heat is None else found.lost_heat[-1])
    burner = Booking(
        fuel, fuel * duct.fuel_mass, duct.fuel_enthalpy + burnt * duct.heat, duct.brought[-1], heat,
        found.friction, found.wall_force + beside,
    )  # fmt: skip
    attached_ratio = found.attached_peak / p2
    figures = {
        "separated_pressure": found.pressure_3,
        "core_area_ratio": share,
        "reattachment_x": found.x_fill,
        "reattachments": np.where(found.mode == THROAT, found.places.astype(np.float64), np.nan),
        "throat_x": found.x_throat,
        "peak_pressure_ratio": found.peak / p2,
        "attached_peak_pressure_ratio": attached_ratio,
        "separation_limit": limit,
        "separation_margin": 1.0 - attached_ratio / limit,
        "unstart_margin": 1.0 - found.needed / duct.impulse,
        "wall_force": found.wall_force,
        "friction": found.friction,
        "impulse_error": found.error,
        **train,
    }
    tried = {"attached": found.attached, "train": found.train, "throat": found.throat}
    rows = _rows(duct, found, total_pressures)
    short = (found.status == SOLVED) & (figures["isolator_margin"] < 0.0)
    isolated = Booking(zero, zero, zero, zero, zero, zero, -beside)
    return Flow(
        found.mode, np.where(short, UNSTARTED, found.status), core, behind, isolated, burner, figures, tried,
        found.throat_kind, found.spare, rows,
    )  # fmt: skip


def _core(entering: Stream, duct: Duct, pressure: Array) -> Stream:
    """The core at burner entry before any fuel, with the gas of station 2: that itself where the pressure has not risen."""
    u = duct.velocity - (pressure - duct.pressure) * duct.entry_area / duct.mass_flow
    state = entering.gas.at("hp", entering.total_enthalpy - 0.5 * u**2, pressure, start=entering.state)
    return stream(entering.gas, state, u, duct.mass_flow)


def _exit(duct: Duct, found: Solution) -> Stream:
    last = np.full((1, duct.size), duct.edges.shape[0] - 2)
    here = duct.mixture(last, duct.end[None])
    return stream(here.gas, found.state, found.velocity, here.mass_flow[0])


def _train(entering: Stream, found: Solution, isolator: Isolator | None, isolated: bool) -> dict[str, Array]:
    """Length of the shock train and its margin; without an isolator the margin is -1 where there is any train."""
    if isolator is None:
        unknown = np.full(found.mode.shape, np.nan)
        separated = np.isin(found.mode, [TRAIN, THROAT])
        return {"train_length": unknown, "isolator_margin": unknown if isolated else np.where(separated, -1.0, np.nan)}
    thickness = np.asarray(isolator.momentum_thickness, dtype=np.float64)
    reynolds = entering.flux * thickness / isolator.viscosity
    ratio = found.pressure_3 / entering.state.pressure
    length = limits.shock_train_length(entering.mach, ratio, thickness, reynolds, isolator.height, isolator.section)
    return {"train_length": length, "isolator_margin": 1.0 - length / isolator.length}


def _rows(duct: Duct, found: Solution, total_pressures: bool) -> dict[str, Array]:
    """The profile with the separated zone ahead of the march, and total pressures where asked for."""
    rows = {name: values.copy() for name, values in found.rows.items()}
    solved = np.flatnonzero(found.status == SOLVED)
    zone = solved[found.x_fill[solved] > 0.0]
    if zone.size:
        _separated_zone(duct.take(zone), found, zone, rows)
    if total_pressures and solved.size:
        rows["total_pressure"] = _total_pressures(duct.take(solved), rows, solved)
    return rows


def _separated_zone(duct: Duct, found: Solution, zone: Codes, rows: dict[str, Array]) -> None:
    """Rows of the core; those of the subsonic march upstream of the place where it fills the duct are moved there."""
    fill, p3 = found.x_fill[zone], found.pressure_3[zone]
    x, count = core_places(duct, fill), core_rows(duct)
    segment = (duct.edges[1:-1, None] <= x).sum(0)
    segment[-1] = (duct.edges[1:-1] < fill).sum(0)
    mixture = duct.mixture(segment, x)
    lost = np.zeros(x.shape)
    for _ in range(5 if duct.friction.any() else 1):
        core = core_at(duct, mixture, p3, lost, None)
        step = 0.5 * (core.friction[1:] + core.friction[:-1]) * np.diff(x, axis=0)
        lost = np.concatenate([lost[:1], np.cumsum(step, axis=0)]) if duct.friction.any() else lost
    columns = (
        x, np.broadcast_to(p3, x.shape), core.state.temperature.reshape(x.shape), core.velocity, np.sqrt(core.mach_squared),
        mixture.area, np.exp(core.ln_share) * mixture.area, mixture.burnt, mixture.ratio,
    )  # fmt: skip
    upstream = rows["x"][count:, zone] < fill
    for name, values in zip(PROFILE, columns, strict=True):
        rows[name][:count, zone] = values
        rows[name][count:, zone] = np.where(upstream, values[-1], rows[name][count:, zone])


def _total_pressures(duct: Duct, rows: Mapping[str, Array], solved: Codes) -> Array:
    """Total pressure of the rows, Pa (R, N): isentropic rest of the gas of each."""
    total = np.full(rows["x"].shape, np.nan)
    where = np.isfinite(rows["x"][:, solved])
    flat = np.nonzero(where)
    pick = {name: rows[name][:, solved][where] for name in PROFILE}
    gas = duct.gas.take(flat[1])
    if duct.fuel is not None:
        gas = gas.fuelled(duct.fuel, pick["ratio"], pick["burnt"])
    state = gas.at("tp", pick["temperature"], pick["pressure"])
    rest = gas.at("hs", state.enthalpy + 0.5 * pick["velocity"] ** 2, state.entropy)
    total[flat[0], solved[flat[1]]] = rest.pressure
    return total
