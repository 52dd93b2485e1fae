"""Nozzle: a choked throat where there is one, then expansion to a pressure or an area, with its losses."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from cycle.arrays import Array, Flags
from cycle.flow import roots, states
from cycle.flowpath.setting import Setting
from cycle.flowpath.stream import Process, Step, Stream, status_of, stream
from cycle.gas.state import State, merge, scatter


def has_throat(setting: Setting) -> bool:
    """Whether the engine has a physical throat, station 5: sized to pass its flow, or given."""
    return setting.has("nozzle.throat_area") or setting.choices.get("nozzle.throat") == "sized"


def nozzle_gas(burnt: Stream, setting: Setting, station: str) -> Stream:
    """The stream at `station` (4 or 5) with the gas that expands from there: of kept composition where it freezes there."""
    chemistry = setting.choices.get("nozzle.chemistry")
    frozen = chemistry == "frozen" and station == "4"
    after = chemistry == "frozen-after" and setting.choices.get("nozzle.freeze_station") == station
    if not (frozen or after):
        return burnt
    gas = burnt.gas.frozen(burnt.state)
    return replace(burnt, gas=gas, state=gas.at("tp", burnt.state.temperature, burnt.state.pressure))


def throat(burnt: Stream, setting: Setting) -> Step:
    """Station 4 to 5: isentropic to Mach 1, the throat sized to pass the flow. A supersonic stream does not fit."""
    with np.errstate(all="ignore"):
        state = states.sonic(burnt.gas, burnt.total_enthalpy, burnt.state.entropy, burnt.state)
        u = states.velocity(burnt.total_enthalpy, state)
    out = stream(burnt.gas, state, u, burnt.mass_flow)
    figures = {"burner_exit_over_throat": burnt.area / out.area}
    return Step(out, Process("throat", "4", "5", figures), status_of(state, (burnt.mach > 1.0 + 1e-9, "throat-mismatch")))


def divergence_factor(setting: Setting) -> Array:
    """Axial share of the exit momentum, (N,). Farokhi, Aircraft Propulsion, examples 5.8 and 5.9."""
    if setting.choices["nozzle.divergence"] == "divergence_factor":
        return setting["nozzle.divergence_factor"]
    return _SHAPE[setting.choices["nozzle.divergence_shape"]](setting["nozzle.divergence_angle"])


_SHAPE: dict[str, Callable[[Array], Array]] = {
    "conical": lambda a: 0.5 * (1.0 + np.cos(a)),
    "planar": lambda a: np.sinc(a / np.pi),
}


def _by_velocity(entering: Stream, setting: Setting, ideal: State) -> Array:
    """u10 = c u_s at the same pressure: enthalpy behind the loss, J/kg."""
    kinetic = entering.total_enthalpy - ideal.enthalpy
    return entering.total_enthalpy - setting["nozzle.velocity_coefficient"] ** 2 * kinetic


def _by_static(entering: Stream, setting: Setting, ideal: State) -> Array:
    """Drop over the isentropic drop from the static state. Heiser and Pratt (1994), from memory."""
    h = entering.state.enthalpy
    return h - setting["nozzle.expansion_efficiency"] * (h - ideal.enthalpy)


def _by_total(entering: Stream, setting: Setting, ideal: State) -> Array:
    """Drop over the isentropic drop from the total state."""
    h = entering.total_enthalpy
    return h - setting["nozzle.expansion_efficiency_from_total"] * (h - ideal.enthalpy)


_QUALITY: dict[str, Callable[[Stream, Setting, State], Array]] = {
    "velocity_coefficient": _by_velocity,
    "expansion_efficiency": _by_static,
    "expansion_efficiency_from_total": _by_total,
}


def _lossless(setting: Setting) -> Flags:
    """Points whose expansion has no loss, (N,)."""
    none: Flags = setting[f"nozzle.{setting.choices['nozzle.quality']}"] == 1.0
    return none


def expanded(entering: Stream, setting: Setting, pressure: Array, start: State | None = None) -> State:
    """State at `pressure` (N,) behind the real expansion."""
    ideal = entering.gas.at("sp", entering.state.entropy, pressure, start=start)
    if _lossless(setting).all():
        return ideal
    h = _QUALITY[setting.choices["nozzle.quality"]](entering, setting, ideal)
    return entering.gas.at("hp", h, pressure, start=ideal)


def to_area(entering: Stream, setting: Setting, area: Array) -> tuple[State, Flags]:
    """Supersonic state that fills `area` (N,), not below the entering one, and whether there is one.

    Isentropic first, then the pressure at which the real expansion keeps the mass flow, by Newton and then secant in ln p.
    Just behind a throat the losses can leave no such pressure: what does not settle, or is subsonic, is looked at by `_near_throat`.
    """
    flux = np.minimum(entering.mass_flow / area, entering.flux)
    state = states.expanded_to_flux(entering.gas, entering.total_enthalpy, entering.state.entropy, flux, entering.state)
    fits = np.ones(area.shape, np.bool_)
    known = _lossless(setting)
    if setting.choices["nozzle.quality"] == "expansion_efficiency":
        # a drop counted from the entering state leaves that state as it is
        same = (flux >= entering.flux * (1.0 - SAME)) & (entering.mach >= 1.0 - SAME)
        state, known = merge(same, entering.state, state), known | same
    lossy = np.flatnonzero(~known)
    if lossy.size:
        found, fits[lossy] = _with_loss(entering.take(lossy), setting.take(lossy), flux[lossy], state.take(lossy))
        state = scatter(state, lossy, found)
    return state, fits


SAME = 1e-9
"""Relative difference below which two mass fluxes are the same one."""


def _with_loss(entering: Stream, setting: Setting, flux: Array, ideal: State) -> tuple[State, Flags]:
    """`to_area` of points with losses; ideal: the isentropic state (N,) of the same flux."""
    state, fits = ideal, np.ones(flux.shape, np.bool_)
    ln_p = np.log(state.pressure)
    at, before, slope = ln_p, np.full_like(ln_p, np.nan), np.ones_like(ln_p)
    done = np.zeros(ln_p.shape, np.bool_)
    for _ in range(40):
        state = expanded(entering, setting, np.exp(ln_p), state)
        u = states.velocity(entering.total_enthalpy, state)
        miss = np.log(state.density * u / flux)
        secant = (miss - before) / (ln_p - at)
        isentropic = (1.0 - (state.sound_speed / u) ** 2) / state.isentropic_exponent
        slope = np.where(np.isfinite(secant) & (secant > 0.05), secant, np.where(np.isfinite(before), slope, isentropic))
        done |= np.abs(miss) < 1e-13
        if done.all():
            break
        before, at = np.where(done, before, miss), np.where(done, at, ln_p)
        ln_p = np.where(done, ln_p, ln_p + np.clip(-miss / slope, -1.0, 1.0))
    left = np.flatnonzero(~done | ~(u >= state.sound_speed))
    if left.size:
        found, fits[left] = _near_throat(entering.take(left), setting.take(left), flux[left], ideal.take(left))
        state = scatter(state, left, found)
    return state, fits


_SCAN, _TOP = 65, 0.77
"""Pressures tried between the bracket's ends; isentropic Mach number below which no loss puts the largest flux, which for a velocity
coefficient near 0 lies at gamma_s^(-1/2)."""


def _near_throat(entering: Stream, setting: Setting, flux: Array, ideal: State) -> tuple[State, Flags]:
    """The real expansion where its largest mass flux lies close to `flux` (N,): beyond that maximum by bisection, or no
    state at all where even the maximum is below it.

    The isentropic state of that flux, `ideal`, has too little of it with the losses: the bracket's other end.
    """

    def excess(ln_p: Array, stream: Stream, part: Setting, target: Array) -> Array:
        state = expanded(stream, part, np.exp(ln_p))
        return np.log(state.density * states.velocity(stream.total_enthalpy, state) / target)

    def around(middle: Array, width: Array) -> tuple[Array, Array]:
        """Largest excess (N,) of the `_SCAN` places tried about `middle`, inside the bracket, and its place."""
        places = np.clip(middle + width * np.linspace(1.0, -1.0, _SCAN)[:, None], low, high)
        found = excess(places.ravel(), wide, asked, np.tile(flux, _SCAN)).reshape(_SCAN, n)
        found = np.where(np.isfinite(found), found, -np.inf)
        best = found.argmax(0), np.arange(n)
        return found[best], places[best]

    n = flux.size
    many = np.tile(np.arange(n), _SCAN)
    wide, asked = entering.take(many), setting.take(many)
    high, low = _highest(entering, setting), np.log(ideal.pressure)
    half = 0.5 * (high - low)
    most, peak = around(low + half, half)
    for closer in (_SCAN / 4.0, _SCAN**2 / 16.0, _SCAN**3 / 64.0):
        most, peak = around(peak, half / closer)
    fits = most >= -SAME
    root = roots.bracketed(lambda x: excess(x, entering, setting, flux), peak, np.minimum(low, peak), 1e-15)
    root = np.where(most > SAME, root, peak)
    state = expanded(entering, setting, np.exp(np.where(fits, root, high)))
    return state.flagged(~fits | ~np.isfinite(root)), fits


def _highest(entering: Stream, setting: Setting) -> Array:
    """ln of the highest pressure at which an expansion with losses may end, (N,): at constant exponent that of the isentropic Mach number
    `_TOP`. A drop counted from the entering state ends no higher than that: the entropy would fall."""
    ln_p = np.log(entering.state.pressure)
    if setting.choices["nozzle.quality"] == "expansion_efficiency":
        return ln_p
    g = entering.state.isentropic_exponent
    relative = (1.0 + 0.5 * (g - 1.0) * np.maximum(entering.mach, _TOP) ** 2) / (1.0 + 0.5 * (g - 1.0) * _TOP**2)
    top: Array = ln_p + g / (g - 1.0) * np.log(relative)
    return top


def _area_over_capture(entering: Stream, setting: Setting) -> Array:
    return setting["nozzle.exit_area_over_capture"] * setting["engine.capture_area"]


def _area_ratio(entering: Stream, setting: Setting) -> Array:
    return setting["nozzle.exit_area_ratio"] * entering.area


AREA: dict[str, Callable[[Stream, Setting], Array]] = {
    "exit_area_over_capture": _area_over_capture,
    "exit_area_ratio": _area_ratio,
}


def nozzle(entering: Stream, setting: Setting, ambient: Array) -> Step:
    """Station 4 or 5 to 10.

    ambient: Pa (N,), where the expansion is ideal. Not solved: under-expanded where the exit asked for lies upstream of
    the entry or is too small for the losses, throat-mismatch where a subsonic stream meets no throat.
    """
    end = setting.choices["nozzle.exit"]
    with np.errstate(all="ignore"):
        if end in AREA:
            area = AREA[end](entering, setting)
            state, fits = to_area(entering, setting, area)
            upstream = (area < entering.area * (1.0 - 1e-9)) | ~fits
        else:
            p = ambient if end == "ideal" else setting["nozzle.exit_pressure"]
            state = expanded(entering, setting, p)
            upstream = p > entering.state.pressure * (1.0 + 1e-9)
        u = states.velocity(entering.total_enthalpy, state)
    slow = (entering.mach < 1.0 - 1e-9) & (not has_throat(setting))
    out = Stream(entering.gas, state, u, entering.mass_flow, np.broadcast_to(divergence_factor(setting), u.shape))
    start = "5" if has_throat(setting) else "4"
    return Step(out, Process("nozzle", start, "10"), status_of(state, (slow, "throat-mismatch"), (upstream, "under-expanded")))
