"""How far a burner without a duct is from choking."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from cycle.arrays import Array
from cycle.flow import heating, states
from cycle.flowpath import combustor
from cycle.flowpath.setting import Setting
from cycle.flowpath.stream import Stream


def choking_margin(entering: Stream, setting: Setting, ratio: Array) -> Array:
    """Total enthalpy left to the sonic point at constant area with `ratio` of fuel, over a*^2; all (N,)."""
    with np.errstate(all="ignore"):
        return _margin(entering, combustor.mix(entering, setting, ratio))[0]


def _margin(entering: Stream, mixed: combustor.Mixed) -> tuple[Array, heating.SonicPoint]:
    flux, impulse = mixed.mass_flow / entering.area, entering.state.pressure + mixed.momentum / entering.area
    point = heating.sonic_point(mixed.gas, impulse, flux, mixed.total_enthalpy)
    return (point.total_enthalpy - mixed.total_enthalpy) / point.state.sound_speed**2, point


def _room_at_constant_area(entering: Stream, mixed: combustor.Mixed, setting: Setting) -> Array:
    margin, point = _margin(entering, mixed)
    # the sonic point of a slow stream can lie beyond the data: far away, wherever it is
    return np.where(point.state.good | (entering.mach > 1.0), margin, np.inf)


def _room_with_loss(entering: Stream, mixed: combustor.Mixed, setting: Setting) -> Array:
    if setting.choices["combustor.exit"] not in ("same-area", "exit_area_ratio"):
        return np.ones(setting.size)
    before = states.rest(entering.gas, entering.total_enthalpy, entering.state.entropy)
    total = mixed.gas.at("hp", mixed.total_enthalpy, before.pressure * setting["combustor.pressure_ratio"])
    critical = states.sonic(mixed.gas, mixed.total_enthalpy, total.entropy, total)
    area = entering.area * setting.get("combustor.exit_area_ratio", 1.0)
    return critical.density * critical.sound_speed * area / mixed.mass_flow - 1.0


def _room_at_constant_pressure(entering: Stream, mixed: combustor.Mixed, setting: Setting) -> Array:
    """At constant pressure the area opens as it must; nothing chokes."""
    return np.ones(setting.size)


_ROOM: dict[str, Callable[[Stream, combustor.Mixed, Setting], Array]] = {
    "constant-area": _room_at_constant_area,
    "constant-pressure": _room_at_constant_pressure,
    "pressure-loss": _room_with_loss,
}


def choking_room(entering: Stream, setting: Setting, ratio: Array) -> Array:
    """How far the burner is from choking with `ratio` of fuel, (N,): positive passes, negative chokes, NaN unknown.

    At constant area the total enthalpy left to the sonic point over a*^2; with a stated loss the critical over the
    actual mass flux, less 1.
    """
    with np.errstate(all="ignore"):
        return _ROOM[setting.choices["combustor.process"]](entering, combustor.mix(entering, setting, ratio), setting)
