"""From the inputs of a case to the components that have a geometry: inlet shape, duct, diffuser ahead of a throat, expansion.

The components take plain arrays; what a case's keys mean for them stands here and nowhere else.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow import inlet_shape, states
from cycle.flow.duct.layout import AreaLaw, Injectors, Supply, Walls
from cycle.flow.duct.solution import MODES as DUCT_MODES
from cycle.flow.duct.solution import STATUSES as DUCT_STATUSES
from cycle.flowpath import back_pressure, combustor, duct_limits, geometric_throat, inlet_geometry, isolator, nozzle
from cycle.flowpath import expansion as widening
from cycle.flowpath.duct import Flow, Isolator, solve_duct
from cycle.flowpath.inlet_geometry import Inlet, Internal
from cycle.flowpath.setting import Setting
from cycle.flowpath.stream import SOLVED, STATUS_CODE, Process, Step, Steps, Stream, named_status, status_of

_PANEL = 4
"""Slices to a panel of the march."""

_BESIDE = 1e-15
"""Distance, over the duct's length, of two rows that are one place."""

_FEW = 16
"""Points up to which the total pressure along the duct is found, too."""


def cells(setting: Setting, table: str, column: str) -> Array | None:
    """A column of a table of rows, (rows, N); None where the first row lacks it."""
    found: list[Array] = []
    while setting.has(f"{table}.{len(found) + 1}.{column}"):
        found.append(setting[f"{table}.{len(found) + 1}.{column}"])
    return np.array(found) if found else None


def _internal(setting: Setting) -> Internal:
    """What happens behind the lip."""
    turn = setting["inlet.cowl_angle"] if setting.has("inlet.cowl_angle") else None
    shock = np.ones(setting.size) if setting.choices.get("inlet.terminal") == "terminal_shock" else None
    contraction = setting["inlet.internal_contraction"] if setting.has("inlet.internal_contraction") else None
    throat = setting["inlet.throat_area"] if setting.has("inlet.throat_area") else None
    return Internal(turn, throat_area=throat, contraction=contraction, shock_area_ratio=shock, axial=True)


def _lip(setting: Setting) -> tuple[Array, Array] | None:
    return (setting["inlet.lip_x"], setting["inlet.lip_y"]) if setting.choices.get("inlet.lip") == "lip" else None


def _ramps(flight: Stream, setting: Setting) -> Inlet:
    turns, lip = cells(setting, "inlet.ramp", "angle"), _lip(setting)
    assert turns is not None
    shape = None
    if lip is not None:
        lengths = cells(setting, "inlet.ramp", "length")
        shape = inlet_shape.shape_of_lengths(turns, np.empty((0, setting.size)) if lengths is None else lengths, *lip)
    return inlet_geometry.ramps(flight, turns, _internal(setting), shape)


def _isentropic(flight: Stream, setting: Setting) -> Inlet:
    wedge = setting["inlet.isentropic_ramp.first_wedge"] if setting.has("inlet.isentropic_ramp.first_wedge") else None
    return inlet_geometry.isentropic_ramp(flight, setting["inlet.isentropic_ramp.turning"], _internal(setting), wedge)


def _cone(flight: Stream, setting: Setting) -> Inlet:
    return inlet_geometry.cone(flight, setting["inlet.cone.half_angle"], _internal(setting), *(_lip(setting) or (None, None)))


_COMPRESSION: dict[str, Callable[[Stream, Setting], Inlet]] = {"ramp": _ramps, "isentropic_ramp": _isentropic, "cone": _cone}


def solved_inlet(flight: Stream, setting: Setting) -> Inlet:
    """The inlet by geometry of N points. flight: station 0 with the flow of the whole capture area."""
    return _COMPRESSION[setting.choices["inlet.compression"]](flight, setting)


def inlet_by_geometry(flight: Stream, setting: Setting) -> Steps:
    """Station 0 to 1, behind the external compression, and on to 2 behind cowl shock, contraction and terminal shock."""
    found = solved_inlet(flight, setting)
    status = named_status(found.fault, inlet_geometry.FAULT_NAMES, {})
    outside = np.where(found.place >= found.external, SOLVED, status)
    angles = {f"wave_angle_{i + 1}": stage.angle for i, stage in enumerate(found.stages) if stage.kind in ("ramp", "cone", "isentropic")}
    figures = {**angles, "captured_fraction": found.captured_fraction, "additive_drag": found.additive_drag}
    return Steps(
        (
            Step(found.lip, Process("external compression", "0", "1", figures), outside),
            Step(found.exit, Process("internal compression", "1", "2"), status),
        ),
        captured=found.captured_fraction,
    )


def _area_law(setting: Setting, entry: Array) -> AreaLaw:
    """The duct's area over that of the burner entry, m2 (N,); its entry is added where the table begins further on."""
    x = cells(setting, "combustor.area", "x")
    assert x is not None
    rows = []
    for i in range(x.shape[0]):
        key = f"combustor.area.{i + 1}.area"
        rows.append(setting[key] / entry if setting.has(key) else setting[f"{key}_ratio"])
    perimeter = cells(setting, "combustor.area", "perimeter")
    ratios = np.array(rows)
    later = x[0] > 0.0
    if np.any(later):
        # the points of the batch whose table begins at the entry get a second row beside their first
        ratios = np.concatenate([[np.where(later, 1.0, ratios[0])], ratios])
        x = np.concatenate([[0.0 * x[0]], [np.where(later, x[0], _BESIDE * x[-1])], x[1:]])
        perimeter = None if perimeter is None else np.concatenate([perimeter[:1], perimeter])
    if perimeter is not None:
        return AreaLaw(x, ratios, "tabulated", perimeter=perimeter)
    planar = setting.choices["combustor.section"] == "planar"
    return AreaLaw(x, ratios, "rectangular" if planar else "circular", setting["combustor.width"] if planar else None)


def _steps_at_entry(setting: Setting, entry: Array) -> Flags:
    """Where the duct's area at x = 0, given in m2, is not that of the stream: a step that no balance of the march holds."""
    first = "combustor.area.1"
    if not setting.has(f"{first}.area"):
        return np.zeros(setting.size, np.bool_)
    step: Flags = (setting[f"{first}.x"] == 0.0) & (np.abs(setting[f"{first}.area"] / entry - 1.0) > 1e-6)
    return step


def _injectors(setting: Setting) -> Injectors:
    """Where the fuel enters; all of it at the burner entry where the case names no injector."""
    x = cells(setting, "combustor.injector", "x")
    count = 1 if x is None else x.shape[0]
    one = np.ones((count, setting.size))
    share, speed = cells(setting, "combustor.injector", "share"), cells(setting, "combustor.injector", "axial_speed")
    share = one if share is None else share / share.sum(0)  # a sum of 1 to the digits that were typed
    own = setting.get("combustor.burning_length", np.nan)
    length = np.array([setting.get(f"combustor.injector.{i + 1}.length", np.nan) for i in range(count)])
    theta = np.array([setting.get(f"combustor.injector.{i + 1}.theta", np.nan) * one[0] for i in range(count)])
    return Injectors(
        0.0 * one if x is None else x,
        share,
        0.0 * one if speed is None else speed,
        np.where(np.isnan(theta), setting["combustor.burning_theta"], theta),
        np.where(np.isnan(length), own, length),
    )


def fuel_supply(entering: Stream, setting: Setting, ratio: Array) -> Supply:
    """What `ratio` (N,) of fuel brings to the duct."""
    burnt = setting["combustor.burnt_fraction"]
    if setting.fuel is not None and not setting.constant_gamma:
        return Supply(setting.fuel, ratio, setting.fuel.total_enthalpy(setting["fuel.temperature"]), 0.0, burnt)
    released = combustor.released(setting, ratio)
    brought = combustor.fuel_enthalpy(setting, entering, ratio)
    counted = setting.choices.get("gas.fuel_mass", "counted") == "counted"
    # the neglected energy balance gives a heat per kg of stream: more per kg of fuel, with the stream's own enthalpy for its mass
    stretch = 1.0 + ratio if setting.choices["gas.fuel_energy"] == "neglected" and counted else np.ones(setting.size)
    heat = np.divide(released * stretch, burnt)
    return Supply(None, ratio, brought - released * stretch, heat, burnt, 1.0 if counted else 0.0)


def _walls(setting: Setting, ratio: Array) -> Walls:
    friction = setting["combustor.friction_coefficient"]
    if setting.has("combustor.wall_temperature"):
        return Walls(friction, 0.0, setting["combustor.wall_temperature"])
    if setting.has("combustor.wall_heat_fraction"):
        return Walls(friction, setting["combustor.wall_heat_fraction"] * setting.heating_value * _releasing(setting, ratio))
    return Walls(friction, power=setting.get("combustor.wall_heat", 0.0))


def _releasing(setting: Setting, ratio: Array) -> Array:
    """Share of the fuel (N,) whose burning the oxygen allows; all of it where the excess reacts, too."""
    if setting.choices.get("combustor.excess_fuel") == "reacts":
        return np.ones(setting.size)
    return np.fmin(1.0, setting.stoichiometric_ratio / np.maximum(ratio, 1e-300))


def _isolator(entering: Stream, setting: Setting) -> Isolator | None:
    thickness = isolator.momentum_thickness(entering, setting) if setting.has("isolator.length") else None
    if thickness is None:
        return None
    height, mu = isolator.section(setting, entering.area).height, isolator.viscosity(entering.state.temperature)
    return Isolator(setting["isolator.length"], height, thickness, mu, setting.choices["isolator.shape"])


def enters_at_3(setting: Setting) -> bool:
    """Whether the stream is a rig's that enters at the burner: no isolator holds a shock train ahead of it."""
    return setting.choices["start"] == "entry" and setting.choices["entry.station"] == "3"


def flow_of(ahead: Stream, setting: Setting, ratio: Array, total_pressures: bool = False, most: Codes | None = None) -> Flow:
    """The duct at the fuel-air ratio `ratio` (N,); ahead: station 2, at constant gamma with the pair of the compression; most: see
    `solve_duct`."""
    entering = combustor.burner_gas(ahead, setting)
    return solve_duct(
        entering,
        _area_law(setting, entering.area),
        _injectors(setting),
        fuel_supply(entering, setting, ratio),
        _walls(setting, ratio),
        separation=setting["combustor.separation_limit"] if setting.has("combustor.separation_limit") else None,
        ahead=ahead,
        isolator=_isolator(ahead, setting),
        isolated=not enters_at_3(setting),
        asked=setting.choices["engine.mode"],
        panels=_panels(setting),
        total_pressures=total_pressures,
        most=most,
    )


def heat_limits(stream: Stream, setting: Setting, upper: Array) -> dict[str, duct_limits.End]:
    """The fuel-air ratios at which the modes of N ducts end, up to `upper`, (N,); stream: station 2."""
    pair = setting.constant_gamma and not np.array_equal(combustor.combustion_cp(setting), setting["gas.cp_compression"])
    coupled = pair or setting.has("combustor.wall_temperature")

    def at(points: Codes, ratio: Array, most: Codes) -> Flow:
        return flow_of(stream.take(points), setting.take(points), ratio, most=None if coupled else most)

    return duct_limits.heat_limits(at, _heat(stream, setting), upper, coupled)


def _panels(setting: Setting) -> int:
    return max(2, int(np.max(setting["combustor.slices"])) // _PANEL)


def duct(stream: Stream, setting: Setting) -> Steps:
    """Station 2 (or a rig's 3) to 3 to 4: isolator and burner as one duct, in whatever mode it runs."""
    ratio = _heat(stream, setting)
    lacking = ~np.isfinite(ratio)
    usable = np.where(lacking, 0.0, ratio)
    found = flow_of(stream, setting, usable, setting.size <= _FEW)
    status = np.where(lacking, STATUS_CODE["no-fuel"], named_status(found.status, DUCT_STATUSES, {}))
    status = combustor.overcooled(status, stream, setting, usable)
    status = np.where(_steps_at_entry(setting, stream.area), STATUS_CODE["area-step"], status)
    ahead = np.isin(status, [SOLVED, STATUS_CODE["choked"], STATUS_CODE["no-fuel"]]) & found.entry.state.good
    mode = {f"mode_{name}": (found.mode == i).astype(float) for i, name in enumerate(DUCT_MODES)}
    shared = {k: v for k, v in found.figures.items() if k in _ISOLATOR_FIGURES}
    own = {k: v for k, v in found.figures.items() if k not in _ISOLATOR_FIGURES}
    start = "3" if enters_at_3(setting) else "2"
    ahead_of_it = Process("isolator", start, "3", {**shared, **mode}, found.isolator, solves_momentum=True)
    burner = Process("burner", "3", "4", {**own, "fuel_air_ratio": usable}, found.burner, solves_momentum=True, profile=found.rows)
    change = combustor.gas_change(found.entry, combustor.combustion_cp(setting), "3") if setting.constant_gamma else None
    held = np.where(ahead, SOLVED, status)
    changes = () if change is None else (replace(change, status=held),)
    return Steps((Step(found.entry, ahead_of_it, held), *changes, Step(found.exit, burner, status)))


def _heat(stream: Stream, setting: Setting) -> Array:
    """Fuel-air ratio of the duct (N,); NaN where no ratio gives the exit total temperature asked for."""
    entering = combustor.burner_gas(stream, setting)
    if setting.choices["combustor.heat"] != "exit_total_temperature":
        return combustor.heat_ratio(entering, setting)
    first = combustor.ratio_at_rest(entering, setting)
    usable = np.where(np.isfinite(first), first, 0.0)
    runs = np.flatnonzero(np.isfinite(first) & (flow_of(stream, setting, usable).status == 0))
    if not runs.size:
        return first
    part, cut = stream.take(runs), setting.take(runs)

    def temperature(ratio: Array) -> Array:
        found = flow_of(part, cut, ratio)
        out = found.exit
        total = states.rest(out.gas, out.total_enthalpy, out.state.entropy).temperature
        return np.where(found.status == 0, total, np.nan)

    better = combustor.ratio_for(temperature, usable[runs], cut["combustor.exit_total_temperature"])
    first = first.copy()
    first[runs] = better
    return first


_ISOLATOR_FIGURES = (
    "separated_pressure", "core_area_ratio", "attached_peak_pressure_ratio", "separation_limit", "separation_margin", "unstart_margin",
    "train_length", "isolator_margin",
)  # fmt: skip


def diffuser(stream: Stream, setting: Setting) -> Steps:
    """Station 2 to 3 ahead of a given choked throat: the terminal shock stands where throat and mass flow agree."""
    area_3 = stream.area * setting.get("combustor.entry_area_ratio", 1.0)

    def burner(three: Stream) -> tuple[Stream, Codes]:
        step = combustor.burner(combustor.burner_gas(three, setting), setting)
        out = step.stream
        changed = combustor.gas_change(out, combustor.expansion_cp(setting), "4") if setting.constant_gamma else None
        return nozzle.nozzle_gas(out if changed is None else changed.stream, setting, "4"), step.status

    found = geometric_throat.match_throat(stream, area_3, burner, setting["nozzle.throat_area"])
    status = named_status(found.fault, geometric_throat.FAULT_NAMES, _THROAT_FAULTS)
    status = np.where(found.fault == _BURNER, found.burner_status, status)
    if setting.choices["start"] == "entry":  # nothing spills ahead of a rig: a shock driven out of it does not leave its entry as stated
        status = np.where(
            (status == SOLVED) & (found.mode == geometric_throat.MODE_NAMES.index("subcritical")), STATUS_CODE["unstarted"], status
        )
    figures = {
        "throat_margin": found.margin,
        "shock_mach": found.shock_mach,
        "shock_area_ratio": found.shock_area_ratio,
        "shock_recovery": found.recovery,
        "spilled_flow": found.spilled_flow,
        "spilled_entropy": found.behind.state.entropy,
        **{f"mode_{name}": (found.mode == i).astype(float) for i, name in enumerate(geometric_throat.MODE_NAMES)},
    }
    step = Step(found.three, Process("isolator", "2", "3", figures), status)
    return Steps((step,), captured=np.where(np.isfinite(found.captured_fraction), found.captured_fraction, 1.0), replaced={"2": found.two})


_BURNER = geometric_throat.FAULT_NAMES.index("burner")
_THROAT_FAULTS = {
    "not-supersonic": "throat-mismatch", "diffuser-narrows": "throat-mismatch", "throat-too-small": "unstarted",
    "shock-outside": "throat-mismatch", "burner": "choked",
}  # fmt: skip


def _line(setting: Setting) -> widening.Line:
    """The expansion with the losses of the case."""
    return widening.Line(
        lambda s, p: nozzle.expanded(s, setting, p),
        lambda s, a: nozzle.to_area(s, setting, a),
    )


def _end(entering: Stream, setting: Setting, ambient: Array) -> tuple[str, Array]:
    end = setting.choices["nozzle.exit"]
    if end in nozzle.AREA:
        return "area", nozzle.AREA[end](entering, setting)
    return "pressure", ambient if end == "ideal" else setting["nozzle.exit_pressure"]


_EXPANSION_FAULTS = {
    "subsonic": "throat-mismatch", "supersonic": "throat-mismatch", "upstream": "under-expanded", "exit-shrinks": "under-expanded",
    "no-flow": "under-expanded", "shock-expelled": "under-expanded",
}  # fmt: skip


def expansion(entering: Stream, setting: Setting, ambient: Array) -> Step | Steps:
    """Station 4 or 5 to 10, by way of 9 where the nozzle has an internal part, freezing on the way where the case says so."""
    start = "5" if nozzle.has_throat(setting) else "4"
    factor = np.broadcast_to(nozzle.divergence_factor(setting), (setting.size,))
    kind, end = _end(entering, setting, ambient)
    by = {"freeze_mach": "mach", "freeze_area_ratio": "area_ratio"}.get(setting.choices.get("nozzle.freeze", ""))
    if by is not None:
        frozen = widening.frozen_after(entering, by, setting[f"nozzle.freeze_{by}"], kind, end, _line(setting))
        status = named_status(frozen.fault, widening.FAULT_NAMES, _EXPANSION_FAULTS)
        step = Step(_diverging(frozen.exit, factor), Process("nozzle", start, "10"), status)
        return _closed(frozen.plane, step, ambient, entering) if kind == "area" else step
    if setting.has("nozzle.internal_area_ratio"):
        area = entering.area * setting["nozzle.internal_area_ratio"]
        found = widening.two_part(entering, area, kind, end, _line(setting), from_throat=nozzle.has_throat(setting))
        status = named_status(found.fault, widening.FAULT_NAMES, _EXPANSION_FAULTS)
        over = {"over_expanded": found.over_expanded.astype(float)}
        return Steps(
            (
                Step(found.nine, Process("nozzle", start, "9", over), status),
                Step(_diverging(found.ten, factor), Process("external expansion", "9", "10"), status),
            )
        )
    step = nozzle.nozzle(entering, setting, ambient)
    return _closed(entering, step, ambient) if kind == "area" else step


def _closed(entering: Stream, step: Step, ambient: Array, follows: Stream | None = None) -> Step:
    """A nozzle of given area against the ambient pressure: see `back_pressure.held_back`."""
    held = back_pressure.held_back(entering, step.stream, np.where(step.status == SOLVED, ambient, np.nan), follows)
    if not held.shocked.any():
        return step
    figures = {"full_flow_pressure": np.where(held.shocked, step.stream.state.pressure, np.nan), "exit_shock_pressure": held.behind}
    code = status_of(held.stream.state, (held.expelled, "back-pressured"))
    return Step(held.stream, replace(step.process, figures=figures), np.where(held.shocked, code, step.status))


def _diverging(stream: Stream, factor: Array) -> Stream:
    return Stream(stream.gas, stream.state, stream.velocity, stream.mass_flow, factor)
