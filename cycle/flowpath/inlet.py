"""Inlet by performance: how good the compression is, and where it ends.

Most qualities fix the entropy at station 2 by the flight state alone; the end of compression then finds the state on that
isentrope. The adiabatic efficiency and the viscous correlation tie both and are iterated.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from cycle.arrays import Array, Flags
from cycle.flow import limits, states
from cycle.flowpath.setting import Setting
from cycle.flowpath.stream import Process, Step, Stream, status_of, stream
from cycle.gas.state import State

Ended = tuple[State, Flags]
"""State at 2 and whether the end of compression can be reached on the isentrope."""


def _kinetic_energy(flight: Stream, setting: Setting) -> State:
    """h(s2, p0) = ht - eta u0^2/2. Heiser and Pratt (1994), ch. 5 (from memory)."""
    h = flight.total_enthalpy - setting["inlet.kinetic_energy_efficiency"] * 0.5 * flight.velocity**2
    return flight.gas.at("hp", h, flight.state.pressure)


def _from_recovery(flight: Stream, recovery: Array) -> State:
    total = states.rest(flight.gas, flight.total_enthalpy, flight.state.entropy)
    return flight.gas.at("hp", flight.total_enthalpy, total.pressure * recovery).after(total)


def _recovery(flight: Stream, setting: Setting) -> State:
    return _from_recovery(flight, setting["inlet.total_pressure_recovery"])


def _military(flight: Stream, setting: Setting) -> State:
    """MIL-E-5008B, from the flight Mach number."""
    return _from_recovery(flight, limits.ram_recovery(flight.mach))


def _diffuser(flight: Stream, setting: Setting) -> State:
    """h(pt2, s0) = h0 + eta (ht - h0). Hill and Peterson (from memory)."""
    h = flight.state.enthalpy + setting["inlet.diffuser_efficiency"] * 0.5 * flight.velocity**2
    reached = states.rest(flight.gas, h, flight.state.entropy)
    return flight.gas.at("hp", flight.total_enthalpy, reached.pressure).after(reached)


_OF_ENTROPY: dict[str, Callable[[Stream, Setting], State]] = {
    "kinetic_energy_efficiency": _kinetic_energy,
    "total_pressure_recovery": _recovery,
    "military_recovery": _military,
    "diffuser_efficiency": _diffuser,
}
"""Quality -> a state that has the entropy of station 2."""


def _always(state: State) -> Flags:
    return np.ones(state.pressure.shape, np.bool_)


def _to_pressure(flight: Stream, setting: Setting, entropy: Array) -> Ended:
    state = flight.gas.at("sp", entropy, flight.state.pressure * setting["inlet.pressure_ratio"])
    return state, _always(state)


def _to_temperature(flight: Stream, setting: Setting, entropy: Array) -> Ended:
    temperature = flight.state.temperature * setting["inlet.temperature_ratio"]
    state = flight.gas.at("ts", temperature, entropy, start=flight.state)
    cold = flight.gas.at("tp", temperature, flight.state.pressure).enthalpy < flight.total_enthalpy
    return state, state.good | cold


def _to_mach(flight: Stream, setting: Setting, entropy: Array) -> Ended:
    at_rest = states.rest(flight.gas, flight.total_enthalpy, entropy)
    state = states.at_mach(flight.gas, flight.total_enthalpy, entropy, setting["inlet.exit_mach"], at_rest)
    return state.after(at_rest), _always(state)


def _to_contraction(flight: Stream, setting: Setting, entropy: Array) -> Ended:
    at_rest = states.rest(flight.gas, flight.total_enthalpy, entropy)
    critical = states.sonic(flight.gas, flight.total_enthalpy, entropy, at_rest)
    flux = flight.flux * setting["inlet.contraction_ratio"]
    state, reached = states.at_flux(flight.gas, flight.total_enthalpy, entropy, flux, _always(critical), critical)
    return state.after(at_rest, critical), reached | ~critical.good


End = Callable[[Stream, Setting, Array], Ended]
"""End of the compression on the isentrope of an entropy (N,)."""

_END: dict[str, End] = {
    "pressure_ratio": _to_pressure,
    "temperature_ratio": _to_temperature,
    "exit_mach": _to_mach,
    "contraction_ratio": _to_contraction,
}


Missed = tuple[Array, State, Flags, State]
"""What lacks at an entropy, the end of the compression there, whether it is reached, and the state back at p0."""


def _adiabatic(flight: Stream, setting: Setting, end: End) -> Ended:
    """(h2 - hX) = eta (h2 - h0), X at p0 with the entropy of 2. Heiser and Pratt (1994), ch. 4 (from memory).

    At constant pressure ratio and low efficiency no entropy may satisfy it: the compression asked for is then beyond what this
    efficiency can reach.
    """
    eta, h0 = setting["inlet.adiabatic_efficiency"], flight.state.enthalpy

    def miss(entropy: Array) -> Missed:
        state, reached = end(flight, setting, entropy)
        back = flight.gas.at("sp", entropy, flight.state.pressure)
        return back.enthalpy - state.enthalpy + eta * (state.enthalpy - h0), state, reached, back

    return _settled(flight, miss)


def _viscous(flight: Stream, setting: Setting, end: End) -> Ended:
    """Kinetic-energy efficiency by `limits.mach_loss_efficiency` of the Mach number at the end of the compression, which it moves."""

    def miss(entropy: Array) -> Missed:
        state, reached = end(flight, setting, entropy)
        back = flight.gas.at("sp", entropy, flight.state.pressure)
        mach = states.velocity(flight.total_enthalpy, state) / state.sound_speed
        eta = limits.mach_loss_efficiency(flight.mach, np.minimum(np.nan_to_num(mach), flight.mach))
        return back.enthalpy - flight.total_enthalpy + eta * 0.5 * flight.velocity**2, state, reached, back

    return _settled(flight, miss)


def _settled(flight: Stream, miss: Callable[[Array], Missed]) -> Ended:
    """End of the compression where nothing lacks: secant in the entropy."""
    at = flight.state.entropy
    before, first, lossless, _ = miss(at)
    state, reached = first, np.ones(at.shape, np.bool_)
    done = np.zeros(at.shape, np.bool_)
    with np.errstate(all="ignore"):
        entropy = at - before / flight.state.temperature
        for _ in range(40):
            value, state, reached, back = miss(entropy)
            slope = (value - before) / (entropy - at)
            step = np.where(value == 0.0, 0.0, -value / np.where(np.isfinite(slope) & (slope != 0.0), slope, back.temperature))
            span = 0.5 * flight.state.specific_heat
            done |= np.abs(step) < 1e-12 * flight.state.specific_heat
            if done.all():
                break
            before, at = np.where(done, before, value), np.where(done, at, entropy)
            entropy = np.where(done, entropy, entropy + np.clip(step, -span, span))
    # where the first state lies beyond the data, what follows from it says nothing
    state = replace(state, range=np.where(state.good | first.good, state.range, first.range))
    # what is not reached without loss is not reached with it
    return state, lossless & reached & (done | ~first.good)


_TIED: dict[str, Callable[[Stream, Setting, End], Ended]] = {"adiabatic_efficiency": _adiabatic, "viscous_correlation": _viscous}
"""Qualities that need the end of the compression."""


_LEAST = {"pressure_ratio": 1.0, "temperature_ratio": 1.0}
"""Ends of the compression below which nothing is compressed."""


def inlet(flight: Stream, setting: Setting) -> Step:
    """Station 0 to 2 without heat exchange at full capture.

    Not solved: over-compressed where the compression takes more than the kinetic energy, or passes the sonic limit of
    the contraction; under-compressed where the stream ends below its flight pressure.
    """
    end, quality = _END[setting.choices["inlet.end"]], setting.choices["inlet.quality"]
    with np.errstate(all="ignore"):
        if quality in _TIED:
            state, reached = _TIED[quality](flight, setting, end)
        else:
            like = _OF_ENTROPY[quality](flight, setting)
            state, reached = end(flight, setting, like.entropy)
            state, reached = state.after(like), reached | ~like.good
        u = states.velocity(flight.total_enthalpy, state)
        lost = state.enthalpy >= flight.total_enthalpy
        weak = (state.pressure < flight.state.pressure * (1.0 - 1e-9)) & state.good
        name = setting.choices["inlet.end"]
        weak |= setting["inlet.exit_mach"] > flight.mach if name == "exit_mach" else setting[f"inlet.{name}"] < _LEAST.get(name, 0.0)
    status = status_of(state, (weak, "under-compressed"), (lost & state.good, "over-compressed"), (~reached, "over-compressed"))
    return Step(stream(flight.gas, state, u, flight.mass_flow), Process("inlet", "0", "2"), status)
