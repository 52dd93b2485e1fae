"""Combustor at constant area, at constant pressure, or with a stated total-pressure ratio.

All mass, axial impulse and total enthalpy of the fuel enter; its total enthalpy is that at the fuel's temperature, the
kinetic energy is not added again. Heiser and Pratt (1994), ch. 6, for the stream-thrust balances (from memory).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow import heating, states
from cycle.flowpath.setting import Setting
from cycle.flowpath.stream import SOLVED, STATUS_CODE, Booking, Process, Step, Stream, status_of, stream
from cycle.gas.base import Gas
from cycle.gas.constant import ConstantGas
from cycle.gas.equilibrium import EquilibriumGas
from cycle.gas.frozen import FrozenGas
from cycle.gas.state import OUT_OF_RANGE, State, merge


@dataclass(frozen=True, slots=True)
class Mixed:
    """The stream's balances once `ratio` kg of fuel a kg of it have entered: gas, mass flow kg/s, total enthalpy J/kg,
    axial momentum N of stream and fuel less friction, and the booking; arrays (N,)."""

    gas: Gas
    mass_flow: Array
    total_enthalpy: Array
    momentum: Array
    booking: Booking


def burner_gas(entering: Stream, setting: Setting) -> Stream:
    """The entering stream with the gas that burns: the combustion pair at constant gamma, reacting in equilibrium.

    At constant gamma p, T and u are kept and the datum of h and s moves with the pair. A composition that was held is released: it goes
    to equilibrium at constant area. The same stream where nothing changes but at constant gamma.
    """
    gas = entering.gas
    if isinstance(gas, ConstantGas):
        return _repaired(entering, gas.with_cp(combustion_cp(setting)))
    if setting.choices["gas.model"] != "equilibrium" or not isinstance(gas, FrozenGas | EquilibriumGas):
        return entering
    reacting = gas.reacting()
    if setting.choices["combustor.excess_fuel"] == "inert":
        reacting = reacting.with_excess_inert()
    return _set_free(entering, reacting) if isinstance(gas, FrozenGas) else replace(entering, gas=reacting)


def _set_free(entering: Stream, gas: Gas) -> Stream:
    """The stream whose held composition has gone to equilibrium: mass, momentum, energy and area are kept."""
    with np.errstate(all="ignore"):
        impulse = entering.state.pressure + entering.flux * entering.velocity
        found = heating.heated(gas, impulse, entering.flux, entering.total_enthalpy, entering.mach > 1.0)
        settled = found.passes & found.state.good
        state = merge(settled, found.state, entering.state)
        velocity = np.where(settled, entering.flux / found.state.density, entering.velocity)
    return Stream(gas, state, velocity, entering.mass_flow, entering.axial_factor)


def combustion_cp(setting: Setting) -> Array:
    """cp of the combustion pair, J/(kg K), (N,)."""
    return setting["gas.cp_combustion"] if setting.has("gas.cp_combustion") else setting["gas.cp_compression"]


def expansion_cp(setting: Setting) -> Array:
    """cp of the expansion pair, J/(kg K), (N,)."""
    return setting["gas.cp_expansion"] if setting.has("gas.cp_expansion") else combustion_cp(setting)


def _repaired(entering: Stream, gas: ConstantGas) -> Stream:
    state = gas.at("tp", entering.state.temperature, entering.state.pressure)
    return Stream(gas, state, entering.velocity, entering.mass_flow, entering.axial_factor)


def gas_change(entering: Stream, cp: Array, station: str) -> Step | None:
    """Hand-over to another constant-gamma pair at a station; None where the gas is another model or nothing changes."""
    gas = entering.gas
    if not isinstance(gas, ConstantGas) or np.array_equal(gas.cp, cp):
        return None
    changed = _repaired(entering, gas.with_cp(cp))
    figures = {
        "enthalpy_jump": changed.state.enthalpy - entering.state.enthalpy,
        "entropy_jump": changed.state.entropy - entering.state.entropy,
    }
    return Step(changed, Process("gas change", station, station, figures), status_of(changed.state))


def released(setting: Setting, ratio: Array) -> Array:
    """Heat released at constant gamma, J per kg of fuel: the burnt fraction of what the oxygen allows."""
    with np.errstate(divide="ignore", invalid="ignore"):
        allowed = np.minimum(1.0, setting.stoichiometric_ratio / ratio)
    allowed = np.where(np.isfinite(allowed), allowed, 1.0)
    heat: Array = setting["combustor.burnt_fraction"] * allowed * setting.heating_value
    return heat


def _full(setting: Setting, entering: Stream, ratio: Array) -> Array:
    """Sensible enthalpy of the fuel about the reference temperature, on the datum h = cp T of the burner's pair."""
    cp, reference = combustion_cp(setting), setting["gas.reference_temperature"]
    own = setting["fuel.vapour_specific_heat"] if setting.has("fuel.vapour_specific_heat") else cp
    return own * (setting["fuel.temperature"] - reference) + cp * reference + released(setting, ratio)


def _mass_only(setting: Setting, entering: Stream, ratio: Array) -> Array:
    return released(setting, ratio)


def _neglected(setting: Setting, entering: Stream, ratio: Array) -> Array:
    """ht4 = ht3 + f q: as if the fuel brought the stream's own total enthalpy for its mass."""
    if setting.choices["gas.fuel_mass"] == "neglected":
        return released(setting, ratio)
    return entering.total_enthalpy + (1.0 + ratio) * released(setting, ratio)


_FUEL_ENERGY: dict[str, Callable[[Setting, Stream, Array], Array]] = {
    "full": _full,
    "mass-only": _mass_only,
    "neglected": _neglected,
}


def fuel_enthalpy(setting: Setting, entering: Stream, ratio: Array) -> Array:
    """Total enthalpy that a kg of fuel brings, J/kg (N,); at constant gamma with the heat it releases."""
    if setting.fuel is None or setting.constant_gamma:
        return _FUEL_ENERGY[setting.choices["gas.fuel_energy"]](setting, entering, ratio)
    return setting.fuel.total_enthalpy(setting["fuel.temperature"])


def _fuel_speed(setting: Setting, entering: Stream) -> Array:
    if setting.has("combustor.fuel_axial_speed"):
        return setting["combustor.fuel_axial_speed"]
    return setting.get("combustor.fuel_axial_speed_ratio", 0.0) * entering.velocity


def mix(entering: Stream, setting: Setting, ratio: Array) -> Mixed:
    """Balances after `ratio` (N,) of fuel: friction is Cf (rho u^2/2) Aw of the entering stream."""
    counted = setting.choices.get("gas.fuel_mass", "counted") == "counted"
    fuel_flow = ratio * entering.mass_flow
    added = fuel_flow if counted else np.zeros_like(fuel_flow)
    flow = entering.mass_flow + added
    h = fuel_enthalpy(setting, entering, ratio)
    heat = setting.get("combustor.wall_heat", 0.0)
    total = (entering.mass_flow * entering.total_enthalpy + fuel_flow * h - heat) / flow
    impulse = added * _fuel_speed(setting, entering)
    own = entering.mass_flow * entering.velocity
    friction = 0.5 * own * setting.get("combustor.friction_area_ratio", 0.0)
    gas = entering.gas
    if setting.fuel is not None and not setting.constant_gamma:
        gas = gas.fuelled(setting.fuel, ratio, setting["combustor.burnt_fraction"])
    booking = Booking(fuel_flow, added, h, impulse, heat, friction, np.zeros_like(flow))
    return Mixed(gas, flow, total, own + impulse - friction, booking)


Burnt = tuple[State, Array, Codes, dict[str, Array], Booking]
"""State and speed at the exit, status, own figures, booking."""


def _constant_area(entering: Stream, setting: Setting, mixed: Mixed) -> Burnt:
    area = entering.area
    flux, impulse = mixed.mass_flow / area, entering.state.pressure + mixed.momentum / area
    found = heating.heated(mixed.gas, impulse, flux, mixed.total_enthalpy, entering.mach > 1.0)
    lost, choked = ~(impulse > 0.0), ~found.passes
    status = status_of(found.state, (lost, "stalled"), (choked & ~found.known, "out-of-range"), (choked, "choked"))
    return found.state, flux / found.state.density, status, {}, mixed.booking


def _constant_pressure(entering: Stream, setting: Setting, mixed: Mixed) -> Burnt:
    u = mixed.momentum / mixed.mass_flow
    p = entering.state.pressure
    state = mixed.gas.at("hp", mixed.total_enthalpy - 0.5 * u**2, p)
    area = mixed.mass_flow / (state.density * u)
    b = mixed.booking
    wall = p * (area - entering.area)
    booking = Booking(b.fuel_flow, b.mass_added, b.fuel_enthalpy, b.fuel_impulse, b.wall_heat, b.friction, wall)
    return state, u, status_of(state, (~(u > 0.0), "stalled")), {"area_ratio": area / entering.area}, booking


def _same_area(entering: Stream, setting: Setting, mixed: Mixed, critical: State, entropy: Array) -> tuple[State, Flags]:
    flux = mixed.mass_flow / (entering.area * setting.get("combustor.exit_area_ratio", 1.0))
    return states.at_flux(mixed.gas, mixed.total_enthalpy, entropy, flux, entering.mach > 1.0, critical)


def _to_mach(entering: Stream, setting: Setting, mixed: Mixed, critical: State, entropy: Array) -> tuple[State, Flags]:
    state = states.at_mach(mixed.gas, mixed.total_enthalpy, entropy, setting["combustor.exit_mach"], critical)
    return state, np.ones(state.pressure.shape, np.bool_)


def _over_throat(entering: Stream, setting: Setting, mixed: Mixed, critical: State, entropy: Array) -> tuple[State, Flags]:
    flux = critical.density * critical.sound_speed / setting["combustor.exit_area_over_throat"]
    slow = np.zeros(flux.shape, np.bool_)
    return states.at_flux(mixed.gas, mixed.total_enthalpy, entropy, flux, slow, critical)


_EXIT: dict[str, Callable[[Stream, Setting, Mixed, State, Array], tuple[State, Flags]]] = {
    "same-area": _same_area,
    "exit_area_ratio": _same_area,
    "exit_mach": _to_mach,
    "exit_area_over_throat": _over_throat,
}


def _pressure_loss(entering: Stream, setting: Setting, mixed: Mixed) -> Burnt:
    before = states.rest(entering.gas, entering.total_enthalpy, entering.state.entropy)
    p = before.pressure * setting["combustor.pressure_ratio"]
    total = mixed.gas.at("hp", mixed.total_enthalpy, p)
    critical = states.sonic(mixed.gas, mixed.total_enthalpy, total.entropy, total)
    state, passes = _EXIT[setting.choices["combustor.exit"]](entering, setting, mixed, critical, total.entropy)
    state = state.after(before, total, critical)
    status = status_of(state, (total.range == OUT_OF_RANGE, "out-of-range"), (~passes & critical.good, "choked"))
    return state, states.velocity(mixed.total_enthalpy, state), status, {}, mixed.booking


_PROCESS: dict[str, Callable[[Stream, Setting, Mixed], Burnt]] = {
    "constant-area": _constant_area,
    "constant-pressure": _constant_pressure,
    "pressure-loss": _pressure_loss,
}


def _with_ratio(entering: Stream, setting: Setting, ratio: Array) -> Step:
    name = setting.choices["combustor.process"]
    with np.errstate(all="ignore"):
        mixed = mix(entering, setting, ratio)
        state, u, status, figures, booking = _PROCESS[name](entering, setting, mixed)
    figures = {**figures, "fuel_air_ratio": ratio}
    process = Process("burner", "3", "4", figures, booking, solves_momentum=name != "pressure-loss")
    return Step(stream(mixed.gas, state, u, mixed.mass_flow), process, overcooled(status, entering, setting, ratio))


def overcooled(status: Codes, entering: Stream, setting: Setting, ratio: Array) -> Codes:
    """The status codes (N,) of a burner with `ratio` of fuel, so named where its walls take more than the fuel's heat and the data end, or
    leave less than the coldest state has."""
    more = setting.get("combustor.wall_heat", 0.0) > ratio * entering.mass_flow * setting.heating_value
    out, lost = (status == STATUS_CODE[name] for name in ("out-of-range", "not-converged"))
    if not (lost & more).any():
        return np.where(out & more, STATUS_CODE["overcooled"], status)
    with np.errstate(all="ignore"):
        mixed = mix(entering, setting, ratio)
        coldest = mixed.gas.at("tp", np.full(setting.size, mixed.gas.temperatures[0]), entering.state.pressure).enthalpy
    return np.where(more & (out | lost & (mixed.total_enthalpy < coldest)), STATUS_CODE["overcooled"], status)


def _total_temperature(step: Step) -> Array:
    out = step.stream
    return states.rest(out.gas, out.total_enthalpy, out.state.entropy).temperature


def ratio_at_rest(entering: Stream, setting: Setting) -> Array:
    """Fuel-air ratio (N,) that gives the exit total temperature where all burns at rest at the entering total pressure; NaN
    where none does. Nothing chokes there, and dissociation is nearly that of the burner."""
    asked = setting["combustor.exit_total_temperature"]
    before = states.rest(entering.gas, entering.total_enthalpy, entering.state.entropy)

    def at_rest(ratio: Array) -> Array:
        mixed = mix(entering, setting, ratio)
        return mixed.gas.at("hp", mixed.total_enthalpy, before.pressure).temperature

    with np.errstate(all="ignore"):
        first = before.specific_heat * (asked - before.temperature) / (setting.heating_value - before.specific_heat * asked)
        ratio = _secant(at_rest, np.maximum(first, 0.0), asked)
        return np.where(ratio >= -1e-12, np.maximum(ratio, 0.0), np.nan)


def ratio_for(temperature_of: Callable[[Array], Array], first: Array, asked: Array) -> Array:
    """Fuel-air ratio (N,) near `first` at which a burner's exit total temperature is the one asked for; NaN where it does not
    settle."""
    with np.errstate(all="ignore"):
        found = _secant(temperature_of, first, asked, _MARCHED)
        return np.where(found >= 0.0, found, np.nan)


def _for_temperature(entering: Stream, setting: Setting) -> Array:
    """Fuel-air ratio (N,) that gives the exit total temperature; NaN where none does.

    First at rest, then, where the total pressure changes the temperature (dissociation), corrected with the burner itself.
    """
    ratio = ratio_at_rest(entering, setting)
    if setting.constant_gamma:
        return ratio
    asked = setting["combustor.exit_total_temperature"]
    with np.errstate(all="ignore"):
        usable = np.where(np.isfinite(ratio), ratio, 0.0)
        step = _with_ratio(entering, setting, usable)
        open_ = step.status == SOLVED
        if not open_.any():
            return ratio
        part, cut = entering.take(open_), setting.take(open_)
        better = _secant(lambda f: _total_temperature(_with_ratio(part, cut, f)), usable[open_], asked[open_])
        choked = STATUS_CODE["choked"]
        failed = ~np.isfinite(better)
        if failed.any():
            edge = _with_ratio(part, cut, usable[open_] * (1.0 + 1e-3)).status == choked
            better = np.where(failed & edge, usable[open_] * (1.0 + 1e-3), better)
        corrected = usable.copy()
        corrected[open_] = better
        return np.where(np.isfinite(ratio), corrected, np.nan)


_CLOSED, _MARCHED = 1e-12, 3e-10
"""Relative distance from the temperature asked for that is met: by closed balances, and by a march with its own iteration."""


def _secant(function: Callable[[Array], Array], first: Array, asked: Array, close: float = _CLOSED) -> Array:
    """Root of function = asked (N,) from `first`, by secant with steps held to half; NaN where it does not settle."""
    at = first
    before = function(at) - asked
    x = np.maximum(at * 1.01, 1e-6)
    done = np.zeros(first.shape, np.bool_)
    for _ in range(40):
        miss = function(x) - asked
        step = np.where(miss == 0.0, 0.0, -miss * (x - at) / (miss - before))
        settled = np.abs(step) <= 1e-13 * np.maximum(np.abs(x), 1e-6)
        done |= settled | (np.abs(miss) < close * asked)
        if np.all(done | ~np.isfinite(step)):
            break
        at, before = np.where(done, at, x), np.where(done, before, miss)
        moved = x + np.clip(step, -0.5 * np.abs(x) - 1e-4, 0.5 * np.abs(x) + 1e-4)
        x = np.where(done | ~np.isfinite(moved), x, moved)
    return np.where(done, x, np.nan)


def _by_equivalence(entering: Stream, setting: Setting) -> Array:
    return setting["combustor.equivalence_ratio"] * setting.stoichiometric_ratio


def _by_ratio(entering: Stream, setting: Setting) -> Array:
    return setting["combustor.fuel_air_ratio"]


_HEAT: dict[str, Callable[[Stream, Setting], Array]] = {
    "equivalence_ratio": _by_equivalence,
    "fuel_air_ratio": _by_ratio,
    "exit_total_temperature": _for_temperature,
}


def heat_ratio(entering: Stream, setting: Setting) -> Array:
    """Fuel-air ratio (N,) that the case's way of saying the heat amounts to; NaN where none does."""
    return _HEAT[setting.choices["combustor.heat"]](entering, setting)


def burner(entering: Stream, setting: Setting) -> Step:
    """Station 3 to 4; the entering stream already holds the burner's gas.

    Not solved: choked, no-fuel (no ratio reaches the temperature asked for), stalled, mode-refused, out-of-range.
    """
    ratio = heat_ratio(entering, setting)
    lacking = ~np.isfinite(ratio)
    step = _with_ratio(entering, setting, np.where(lacking, 0.0, ratio))
    status = np.where(lacking, STATUS_CODE["no-fuel"], step.status)
    slow = (entering.mach <= 1.0) & (setting.choices["engine.mode"] == "supersonic")
    return Step(step.stream, step.process, np.where(slow, STATUS_CODE["mode-refused"], status))


def exit_total_temperature(entering: Stream, setting: Setting, ratio: Array) -> Array:
    """Total temperature (N,) K behind the burner with `ratio` of fuel; NaN without a state."""
    step = _with_ratio(entering, setting, ratio)
    return np.where(step.status == SOLVED, _total_temperature(step), np.nan)
