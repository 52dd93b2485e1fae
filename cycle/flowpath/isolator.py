"""The isolator ahead of the burner: its section, the boundary layer that enters it, and its friction.

Shape and one dimension are inputs; the area is that of the stream at station 2, and all else follows from it. Friction is taken from
the impulse of the stream ahead of the burner: F3 = F2 - friction, with p A of the whole section in F.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from cycle.arrays import Array, Flags
from cycle.flow import heating
from cycle.flowpath import combustor
from cycle.flowpath.setting import Setting
from cycle.flowpath.stream import SOLVED, STATUS_CODE, Booking, Process, Step, Steps, Stream, stream
from cycle.gas.state import merge

_RECOVERY = 0.89
"""Turbulent recovery factor, Pr^(1/3) of air."""

_ROUNDS = 4
"""Rounds of friction and the speed behind it: each leaves less than the friction's share of the impulse of the last one's error."""


@dataclass(frozen=True, slots=True)
class Section:
    """Section of an isolator, each (N,), m: height (of a circle the diameter), perimeter and hydraulic diameter; NaN where no
    rectangle has the stated hydraulic diameter."""

    height: Array
    perimeter: Array
    hydraulic_diameter: Array


def section(setting: Setting, area: Array) -> Section:
    """Section of the isolator with the area of the stream, m2 (N,).

    setting: states the shape; of a rectangle its width, its height, or (older cases) its hydraulic diameter, of which the shorter side
    is the height. Source: plane geometry, D = 4 A / P.
    """
    if setting.choices["isolator.shape"] == "circular":
        diameter = np.sqrt(4.0 * area / np.pi)
        return Section(diameter, np.pi * diameter, diameter)
    if setting.has("isolator.height"):
        height = setting["isolator.height"]
    elif setting.has("isolator.width"):
        height = area / setting["isolator.width"]
    else:
        quarter = area / setting["isolator.hydraulic_diameter"]
        with np.errstate(invalid="ignore"):
            height = quarter - np.sqrt(quarter**2 - area)
    perimeter = 2.0 * (height + area / height)
    return Section(height, perimeter, 4.0 * area / perimeter)


def viscosity(temperature: Array) -> Array:
    """Dynamic viscosity of air, Pa s (N,). temperature: (N,), K. Source: Sutherland's law, U.S. Standard Atmosphere 1976, eq. 51."""
    mu: Array = 1.458e-6 * temperature**1.5 / (temperature + 110.4)
    return mu


def plate_momentum_thickness(entering: Stream, length: Array) -> Array:
    """Momentum thickness of a turbulent boundary layer that has run a length along an adiabatic flat plate, m (N,).

    entering: the stream at its edge. length: (N,), m. theta/x = 0.037 (rho'/rho) Re'^(-1/5), primed at the reference temperature
    T' = T + 0.72 (Tr - T), Tr = T (1 + 0.89 (g - 1)/2 M^2). Source: flat plate, Schlichting, Boundary-Layer Theory; reference
    temperature, Eckert, J. Aeronautical Sciences 22 (1955) 585, at an adiabatic wall; both from memory.
    """
    state = entering.state
    hot = 1.0 + 0.72 * _RECOVERY * 0.5 * (state.isentropic_exponent - 1.0) * entering.mach**2
    reynolds = entering.flux / hot * length / viscosity(state.temperature * hot)
    return 0.037 * length / hot * reynolds**-0.2


def momentum_thickness(entering: Stream, setting: Setting) -> Array | None:
    """Momentum thickness of the boundary layer that enters the isolator, m (N,): as stated or of a run length; None where neither is."""
    if setting.has("isolator.momentum_thickness"):
        return setting["isolator.momentum_thickness"]
    if setting.has("isolator.boundary_layer_length"):
        return plate_momentum_thickness(entering, setting["isolator.boundary_layer_length"])
    return None


def momentum_reynolds(entering: Stream, thickness: Array) -> Array:
    """Reynolds number on the momentum thickness, (N,), 1. entering: the stream at its edge. thickness: (N,), m. Source: definition."""
    return entering.flux * thickness / viscosity(entering.state.temperature)


@dataclass(frozen=True, slots=True)
class Worn:
    """The stream that the isolator's friction leaves, that force, N (N,), and whether the stream passes it at all (N,)."""

    stream: Stream
    friction: Array
    passes: Flags


def worn(entering: Stream, setting: Setting) -> Worn | None:
    """The stream behind the friction of the isolator's wall, None without friction.

    entering: station 2. Mass, energy and area are kept and the impulse falls by Cf (rho u)(u2 + u)/4 P L: the mean of the wall shear
    at both ends. It is taken ahead of a shock train too, where the core meets less wall. A point that friction chokes keeps its stream.
    Source: Shapiro (1953), ch. 6 (from memory).
    """
    if not setting.has("isolator.friction_coefficient") or not np.any(setting["isolator.friction_coefficient"] > 0.0):
        return None
    area, flux, h = entering.area, entering.flux, entering.total_enthalpy
    wall = 0.25 * setting["isolator.friction_coefficient"] * flux * section(setting, area).perimeter * setting["isolator.length"]
    wall = np.nan_to_num(wall)
    before = entering.state.pressure + flux * entering.velocity
    behind, passes = entering.velocity, np.ones(area.shape, np.bool_)
    with np.errstate(all="ignore"):
        for _ in range(_ROUNDS):
            force = wall * (entering.velocity + behind)
            found = heating.heated(entering.gas, before - force / area, flux, h, entering.mach > 1.0)
            passes &= found.passes & found.state.good
            behind = np.where(passes, flux / found.state.density, entering.velocity)
    state = found.state
    after = stream(entering.gas, state, flux / state.density, entering.mass_flow)
    return Worn(_kept(passes, after, entering), np.where(passes, force, 0.0), passes)


def _kept(passes: Flags, after: Stream, entering: Stream) -> Stream:
    if passes.all():
        return after
    velocity = np.where(passes, after.velocity, entering.velocity)
    return stream(entering.gas, merge(passes, after.state, entering.state), velocity, entering.mass_flow)


def _booked(friction: Array, wall_force: Array) -> Booking:
    zero = np.zeros_like(friction)
    return Booking(zero, zero, zero, zero, zero, friction, wall_force)


def straight(entering: Stream, setting: Setting) -> Step:
    """Station 2 to 3 ahead of a burner that is no duct: the inlet throat itself, less the isolator's friction."""
    found = worn(entering, setting)
    if found is None:
        return Step(entering, Process("isolator", "2", "3"), np.zeros(setting.size, np.int64))
    process = Process("isolator", "2", "3", booking=_booked(found.friction, np.zeros(setting.size)), solves_momentum=True)
    return Step(found.stream, process, np.where(found.passes, SOLVED, STATUS_CODE["unstarted"]))


Duct = Callable[[Stream, Setting], Steps]


def ahead_of(duct: Duct) -> Duct:
    """A duct from station 2 by 3 to 4 whose stream has the isolator's friction behind it; what enters the isolator is in its figures."""

    def whole(entering: Stream, setting: Setting) -> Steps:
        entering = entering if setting.constant_gamma else combustor.burner_gas(entering, setting)
        found = worn(entering, setting)
        steps = duct(entering if found is None else found.stream, setting)
        first, *rest = steps.steps
        first = replace(first, process=_told(first.process, entering if found is None else found.stream, setting))
        if found is None:
            return replace(steps, steps=(first, *rest))
        held = first.process.booking
        first = replace(first, process=replace(first.process, booking=_booked(found.friction, _wall_force(held, setting.size))))
        return replace(steps, steps=tuple(_held(step, found.passes) for step in (first, *rest)))

    return whole


def _wall_force(booking: Booking | None, size: int) -> Array:
    return np.zeros(size) if booking is None else booking.wall_force


def _held(step: Step, passes: Flags) -> Step:
    return replace(step, status=np.where(passes, step.status, STATUS_CODE["unstarted"]))


def _told(process: Process, entering: Stream, setting: Setting) -> Process:
    """The process with what the length of its shock train comes from."""
    thickness = momentum_thickness(entering, setting) if setting.has("isolator.length") else None
    if thickness is None:
        return process
    own = {
        "isolator_height": section(setting, entering.area).height,
        "momentum_thickness": thickness,
        "momentum_reynolds": momentum_reynolds(entering, thickness),
        "train_mach": entering.mach,
    }
    return replace(process, figures={**process.figures, **own})
