"""Station 0, or the entry of a rig: the stream as it comes."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np

from cycle import atmosphere
from cycle.arrays import Array
from cycle.flowpath.setting import Setting
from cycle.flowpath.stream import Process, Step, status_of, stream
from cycle.gas.base import Gas
from cycle.gas.constant import ConstantGas
from cycle.gas.frozen import air_gas
from cycle.gas.state import State


def saturation_pressure(temperature: Array) -> Array:
    """Saturation pressure of water over liquid, Pa (N,), at K (N,), 123 to 332 K.

    Murphy and Koop (2005), Q. J. R. Meteorol. Soc. 131, eq. 10 (coefficients from memory).
    """
    T = temperature
    warm = 54.842763 - 6763.22 / T - 4.210 * np.log(T) + 0.000367 * T
    cold = np.tanh(0.0415 * (T - 218.8)) * (53.878 - 1331.22 / T - 9.44523 * np.log(T) + 0.014025 * T)
    return np.exp(warm + cold)


def _composition(setting: Setting, T: Array, p: Array) -> Mapping[str, Array | float]:
    if not setting.has("air.relative_humidity"):
        return setting.air
    water = np.minimum(setting["air.relative_humidity"] * saturation_pressure(T) / p, 0.5)
    moist: dict[str, Array | float] = {k: x * (1.0 - water) for k, x in setting.air.items()}
    moist["H2O"] = moist.get("H2O", 0.0) + water
    return moist


def _air(setting: Setting, T: Array, p: Array, model: str) -> Gas:
    if setting.table is None:
        return ConstantGas(setting["gas.cp_compression"], setting["gas.gas_constant"])
    return air_gas(setting.table, _composition(setting, T, p), model, setting.size)


def entering_gas(setting: Setting, T: Array, p: Array) -> Gas:
    """The gas that enters: at constant gamma the compression pair, else the air of the case at T, p (N,)."""
    return _air(setting, T, p, setting.choices.get("inlet.chemistry", setting.choices["gas.model"]))


def _speed(setting: Setting, state: State) -> Array:
    if setting.choices["flight.velocity"] == "mach":
        return setting["flight.mach"] * state.sound_speed
    return setting["flight.speed"]


def _stated(setting: Setting) -> tuple[Array, Array]:
    return setting["flight.temperature"], setting["flight.pressure"]


def _standard(setting: Setting, altitude: Array) -> tuple[Array, Array]:
    air = atmosphere.atmosphere(altitude, setting["flight.temperature_offset"])
    return air.temperature, air.pressure


def _at_altitude(setting: Setting) -> tuple[Array, Array]:
    return _standard(setting, setting["flight.altitude"])


def _at_dynamic_pressure(setting: Setting) -> tuple[Array, Array]:
    """Altitude where rho u^2/2 is the one asked for; secant in altitude from an isothermal guess.

    Standard air is too cold to react, so the search holds its composition in any gas model.
    """
    asked = setting["flight.dynamic_pressure"]

    def excess(z: Array) -> Array:
        T, p = _standard(setting, z)
        state = _air(setting, T, p, "frozen").at("tp", T, p)
        return np.log(0.5 * state.density * _speed(setting, state) ** 2 / asked)

    top = np.full(setting.size, 86e3)
    z = np.full(setting.size, 20e3)
    before = excess(z)
    at, z = z, np.clip(z + 6500.0 * before, 0.0, top)
    for _ in range(60):
        miss = excess(z)
        with np.errstate(all="ignore"):
            slope = (miss - before) / (z - at)
        slope = np.where(np.isfinite(slope) & (slope < -2e-5), slope, -1.0 / 6500.0)
        step = np.where(np.abs(miss) < 1e-15, 0.0, -miss / slope)
        before, at, z = miss, z, np.clip(z + np.clip(step, -2e4, 2e4), 0.0, top)
        if np.all(np.abs(z - at) < 1e-9):
            break
    z = np.where(np.abs(excess(z)) < 1e-9, z, np.nan)
    return _standard(setting, z)


_PLACE: dict[str, Callable[[Setting], tuple[Array, Array]]] = {
    "altitude": _at_altitude,
    "dynamic_pressure": _at_dynamic_pressure,
    "pressure": _stated,
}


def flight(setting: Setting) -> Step:
    """Station 0: undisturbed flight. The captured stream fills the capture area."""
    T, p = _PLACE[setting.choices["flight.place"]](setting)
    placed = np.isfinite(T)
    T, p = np.where(placed, T, 220.0), np.where(placed, p, 1e3)
    # the air comes with the composition of the case: ambient air is too cold to react
    state = _air(setting, T, p, "frozen").at("tp", T, p)
    gas = entering_gas(setting, T, p)
    u = _speed(setting, state)
    flow = state.density * u * setting["engine.capture_area"]
    standard = setting.choices["flight.place"] != "pressure"
    figures = {"altitude": atmosphere.altitude_of_pressure(p)} if standard else {}
    return Step(stream(gas, state, u, flow), Process("flight", "0", "0", figures), status_of(state, (~placed, "no-altitude")))


def entry(setting: Setting) -> Step:
    """Entry of a direct-connect rig at station 2 or 3."""
    T, p = setting["entry.temperature"], setting["entry.pressure"]
    gas = entering_gas(setting, T, p)
    state = gas.at("tp", T, p)
    u = setting["entry.mach"] * state.sound_speed
    size: dict[str, Callable[[], Array]] = {
        "area": lambda: state.density * u * setting["entry.area"],
        "mass_flow": lambda: setting["entry.mass_flow"],
    }
    station = setting.choices["entry.station"]
    flow = size[setting.choices["entry.size"]]()
    return Step(stream(gas, state, u, flow), Process("entry", station, station), status_of(state))
