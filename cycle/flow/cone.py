"""Supersonic flow over a cone at zero incidence, constant ratio of specific heats.

Source: G. I. Taylor and J. W. Maccoll, Proceedings of the Royal Society A 139 (1933) 278; the equations in
the form of J. L. Sims, NASA SP-3004 (1964). Angles are in radians.

The equations are marched from the shock inward over ln tan(theta/2), with steps that grow from the shock: a
weak shock has a thin layer behind it. The velocity away from the axis, w = u sin(theta) + v cos(theta), is
carried as an unknown of its own, d ln w/d ln tan(theta/2) = -a^2 cos(theta)/(a^2 - v^2), because for slender
cones it is far smaller than the terms it is the sum of. The surface is where w = u sin(theta).
"""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np

from cycle.arrays import Array, ArrayLike, Codes
from cycle.flow import isentropic, shocks
from cycle.flow.prandtl_meyer import mach_angle
from cycle.flow.roots import bracketed, scanned_peak

Slope = Callable[[float, Array], Array]

_STEPS = 16
DEEPEST = 0.05
"""Mach number across the ray up to which the equations go on inside the surface; a kink at it would cost the steps their order."""

_STAGES: tuple[tuple[float, tuple[float, ...]], ...] = (
    (0.0, ()),
    (1 / 3, (1 / 3,)),
    (2 / 3, (0.0, 2 / 3)),
    (1 / 3, (1 / 12, 1 / 3, -1 / 12)),
    (1 / 2, (-1 / 16, 9 / 8, -3 / 16, -3 / 8)),
    (1 / 2, (0.0, 9 / 8, -3 / 8, -3 / 4, 1 / 2)),
    (1.0, (9 / 44, -9 / 11, 63 / 44, 18 / 11, 0.0, -16 / 11)),
)
_LEAST_ROOT = 1.0e-3
_ROOT_TOLERANCE = 1.0e-12
_DETACHMENT_ROUNDS = 20
_DETACHMENT_TOLERANCE = 1.0e-9

SLENDEREST = np.radians(0.25)
"""Least cone half angle, rad: below it the pressure rise is less exact than one percent."""


class Cone(NamedTuple):
    """Flow over a cone, (N,) each; NaN where the shock is detached.

    wave_angle rad; shock_deflection, behind the shock, rad; mach behind the shock and surface_mach, 1;
    surface pressure, density and temperature over the values ahead, 1; total_pressure_ratio across the shock, 1.
    """

    wave_angle: Array
    shock_deflection: Array
    mach: Array
    surface_mach: Array
    surface_pressure_ratio: Array
    surface_density_ratio: Array
    surface_temperature_ratio: Array
    total_pressure_ratio: Array


def _march(m: Array, wave_angle: Array, ray: Array, g: Array) -> Array:
    """Velocities u, v over the limiting one and ln w on a ray behind a conical shock, (3, N)."""
    shock = shocks.shock_of_wave(m, wave_angle, g)
    kinetic = 0.5 * (g - 1.0) * shock.mach**2
    speed = np.sqrt(kinetic / (1.0 + kinetic))
    inward = wave_angle - shock.deflection
    u, v, w = speed * np.cos(inward), -speed * np.sin(inward), speed * np.sin(shock.deflection)
    start = np.log(np.tan(0.5 * wave_angle))
    span = start - np.log(np.tan(0.5 * ray))
    sound_square = 0.5 * (g - 1.0) * (1.0 - speed**2)
    to_sonic = sound_square - v**2
    # distance in which v moves away from sonic by as much again
    layer = -0.5 * to_sonic / v / (u * np.sin(wave_angle) + sound_square * w / to_sonic)
    growth = np.log1p(span / layer)
    deepest = DEEPEST * np.sqrt(sound_square)

    def slope(t: float, state: Array) -> Array:
        u, v, log_w = state
        stretch = layer * np.exp(growth * t)
        theta = 2.0 * np.arctan(np.exp(start + layer - stretch))
        sine = np.sin(theta)
        sound_square = 0.5 * (g - 1.0) * (1.0 - u**2 - v**2)
        # inside the surface (v > 0), where there is no flow, go on smoothly a little, then without compressibility: only the sign counts
        across = np.minimum(v, deepest)
        squeeze = np.where(v < deepest, sound_square / (sound_square - across**2), 1.0)
        step = -growth * stretch
        dv = -(u * sine + squeeze * np.exp(log_w))
        inward: Array = step * np.array([across * sine, dv, -squeeze * np.cos(theta)])
        return inward

    return runge_kutta(slope, np.array(np.broadcast_arrays(u, v, np.log(w))))


def runge_kutta(slope: Slope, state: Array) -> Array:
    """Sixth-order Runge-Kutta steps from t = 0 to 1: seven slopes a step.

    slope: t, state (3, N) -> d state/dt. Source: J. C. Butcher, Journal of the Australian Mathematical Society 4 (1964) 179 (from memory).
    """
    h = 1.0 / _STEPS
    for i in range(_STEPS):
        slopes: list[Array] = []
        for place, row in _STAGES:
            at = state
            for weight, k in zip(row, slopes, strict=True):
                if weight:
                    at = at + (h * weight) * k
            slopes.append(slope((i + place) * h, at))
        outer = slopes[0] + slopes[6], slopes[2] + slopes[3], slopes[4] + slopes[5]
        state = state + (h / 120.0) * (11.0 * outer[0] + 81.0 * outer[1] - 32.0 * outer[2])
    return state


@np.errstate(invalid="ignore", divide="ignore", over="ignore")
def _inside(m: Array, wave_angle: Array, ray: Array, g: Array) -> Array:
    """Logarithm of w/(u sin theta) on a ray: zero on the surface, positive inside it."""
    u, _, log_w = _march(m, wave_angle, ray, g)
    found: Array = log_w - np.log(u * np.sin(ray))
    return found


def _peak_wave(m: Array, ray: Array, g: Array) -> Array:
    """Wave angle of the conical shock that comes closest to having its surface beyond a ray."""
    lowest = np.maximum(mach_angle(m), ray)

    def near(wave_angle: Array, at: Codes) -> Array:
        return _inside(m[at], wave_angle, ray[at], g[at])

    return scanned_peak(near, lowest, np.full(m.shape, 0.5 * np.pi))


def detachment(mach: ArrayLike, gamma: ArrayLike) -> shocks.Detachment:
    """Largest cone half angle with an attached shock, and the wave angle there.

    mach: (N,), 1, above 1. gamma: (N,), 1. Returns `Detachment`, `deflection` being the half angle; NaN below Mach 1.
    Source: Taylor and Maccoll (1933): the cone on which the weak and the strong solution meet.
    """
    shaped = np.broadcast_arrays(*isentropic.operands(mach, gamma))
    shape = shaped[0].shape
    m, g = (np.ravel(part) for part in shaped)
    ray = shocks.detachment(m, g).deflection
    wave_angle, step = ray, ray
    for _ in range(_DETACHMENT_ROUNDS):
        wave_angle = _peak_wave(m, ray, g)
        bit = 1.0e-4 * ray
        value, beyond = (_inside(m, wave_angle, r, g) for r in (ray, ray + bit))
        step = bit * value / (beyond - value)
        ray = ray - step
        if not np.any(np.abs(step) > _DETACHMENT_TOLERANCE):
            break
    settled = np.abs(step) <= _DETACHMENT_TOLERANCE
    return shocks.Detachment(*(np.where(settled, part, np.nan).reshape(shape) for part in (ray, wave_angle)))


def _upper_wave(m: Array, cone: Array, g: Array) -> Array:
    """A wave angle between the weak and the strong solution, where there are any."""
    wedge = shocks.detachment(m, g)
    # a conical shock turns the stream further behind it, so the wedge's limit is inside the cone's
    wave_angle = np.array(wedge.wave_angle)
    beyond = cone > wedge.deflection
    wave_angle[beyond] = _peak_wave(m[beyond], cone[beyond], g[beyond])
    return wave_angle


def _weak_wave(m: Array, cone: Array, g: Array) -> Array:
    # the shock lies outside the Mach wave and outside the cone
    lowest = np.maximum(mach_angle(m), cone)
    reach = _upper_wave(m, cone, g) - lowest

    # the half angle of a weak conical shock goes with the fourth root of its distance from the Mach wave
    def residual(root: Array) -> Array:
        return _inside(m, lowest + reach * root**4, cone, g)

    # a detached cone leaves the residual negative throughout, which has no root: NaN
    root = bracketed(residual, _LEAST_ROOT, np.ones(m.shape), _ROOT_TOLERANCE)
    return lowest + reach * root**4


def cone_flow(mach: ArrayLike, half_angle: ArrayLike, gamma: ArrayLike) -> Cone:
    """Flow over a cone with an attached shock, the weak solution.

    mach: ahead of the shock, (N,), 1, above 1. half_angle: of the cone, (N,), rad, from `SLENDEREST` to the
    detachment angle. gamma: (N,), 1. Returns `Cone`, NaN where the shock is detached or the cone too slender.
    Source: Taylor and Maccoll (1933); NASA SP-3004 (1964).
    """
    m, g = isentropic.operands(mach, gamma)
    m, cone, g = np.broadcast_arrays(m, np.asarray(half_angle, dtype=np.float64), g)
    m, cone, g = np.where(m > 1.0, m, np.nan), np.where(cone >= SLENDEREST, cone, np.nan), np.asarray(g)
    flat = m.ravel(), cone.ravel(), g.ravel()
    wave_angle = _weak_wave(*flat)
    shock = shocks.shock_of_wave(flat[0], wave_angle, flat[2])
    with np.errstate(invalid="ignore", divide="ignore"):
        u, _, _ = _march(flat[0], wave_angle, flat[1], flat[2])
    surface = np.sqrt(2.0 / (flat[2] - 1.0) * u**2 / ((1.0 - u) * (1.0 + u)))
    pressure, temperature = (
        law(surface, flat[2]) / law(flat[0], flat[2]) for law in (isentropic.pressure_ratio, isentropic.temperature_ratio)
    )
    pressure = pressure * shock.total_pressure_ratio
    whole = Cone(
        wave_angle=wave_angle,
        shock_deflection=shock.deflection,
        mach=shock.mach,
        surface_mach=surface,
        surface_pressure_ratio=pressure,
        surface_density_ratio=pressure / temperature,
        surface_temperature_ratio=temperature,
        total_pressure_ratio=shock.total_pressure_ratio,
    )
    return Cone(*(part.reshape(m.shape) for part in whole))
