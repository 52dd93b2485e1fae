"""Supersonic flow of any gas over a cone at zero incidence.

Source: G. I. Taylor and J. W. Maccoll, Proceedings of the Royal Society A 139 (1933) 278. The entropy behind a conical shock is
uniform, so the sound speed depends on the local enthalpy alone. It is taken from the gas along that one isentrope, between the
enthalpy behind the shock, h2, and h2 + v2^2/2 (v2 normal to the shock), which the surface never reaches because the speed along
the ray rises inward; between nodes a^2 is a polynomial in h. The march, its stretching and the unknown ln w are those
of `cycle.flow.cone`. Angles are in radians.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow import cone, gas_shocks, gas_waves, shocks
from cycle.flow.roots import bracketed, scanned_peak
from cycle.gas.base import Gas
from cycle.gas.state import NOT_CONVERGED, State

_ON_SHOCK = 1.0e-12
_LEAST_ROOT = 0.04
_ROOT_TOLERANCE = 1.0e-11
_NOISE = 1.0e-12
_NODES = 0.5 - 0.5 * np.cos(np.pi * (np.arange(6) + 0.5) / 6.0)
_TO_POWERS = np.linalg.inv(np.vander(_NODES, increasing=True))
_DETACHMENT_ROUNDS = 8
_DETACHMENT_TOLERANCE = 1.0e-7

SLENDEREST = np.radians(1.0)
"""Least cone half angle, rad: there the pressure rise is exact to 3e-5 at Mach 1.1; below it the weak jump is lost in the states."""


@dataclass(frozen=True, slots=True)
class Cone:
    """Flow over a cone: the shock front, its deflection rad, the surface state and speed m/s, whether it is attached, and
    the flow between shock and surface.

    Where it is not, the states must not be used and the angles are NaN.
    """

    front: gas_shocks.Front
    shock_deflection: Array
    surface: State
    surface_velocity: Array
    attached: Flags
    layer: Layer


@dataclass(frozen=True, slots=True)
class Ray:
    """Flow on a ray: state, speed along the axis, and speed across the ray, negative toward the axis; m/s (N,)."""

    state: State
    axial_velocity: Array
    normal_velocity: Array


class Layer:
    """The flow between a conical shock at `wave_angle` (N,) and the surface."""

    def __init__(self, gas: Gas, before: State, velocity: Array, wave_angle: Array) -> None:
        self.gas, self.wave_angle = gas, wave_angle
        self.last: tuple[Array, Array] | None = None
        self.total = before.enthalpy + 0.5 * velocity**2
        self.deflection, self.front = gas_waves.shock_of_wave(gas, before, velocity, wave_angle)
        across = velocity * np.sin(wave_angle)
        self.along = velocity * np.cos(wave_angle)
        # momentum gives the small change of the normal speed better than the difference of two densities
        slowed = (self.front.state.pressure - before.pressure) / (before.density * across)
        self.normal, self.outward = across - slowed, np.cos(wave_angle) * slowed
        self.rise, self.above = 0.5 * self.normal**2, self.total - self.front.state.enthalpy
        self.powers = self._sound_speeds()

    def _sound_speeds(self) -> Array:
        """Coefficients (6, N) of a^2 over (h - h2)/(v2^2/2): exact at constant gamma, to 1e-12 in air."""
        state = self.front.state
        points = np.tile(np.arange(self.rise.size), _NODES.size)
        h = (state.enthalpy + _NODES[:, None] * self.rise).ravel()
        nodes = self.gas.take(points).at("hs", h, state.entropy[points])
        a2 = np.where(nodes.range < NOT_CONVERGED, nodes.sound_speed**2, np.nan).reshape(_NODES.size, -1)
        coefficients: Array = _TO_POWERS @ a2
        return coefficients

    def sound_square(self, u: Array, v: Array) -> Array:
        """a^2 at the ray velocities u, v, (m/s)^2, (N,)."""
        x = np.minimum(np.maximum((self.above - 0.5 * (u**2 + v**2)) / self.rise, 0.0), 1.0)
        value: Array = self.powers[-1]
        for c in self.powers[-2::-1]:
            value = value * x + c
        return value

    def to_ray(self, ray: Array) -> Array:
        """(u, v, ln w) on a ray, (3, N), by the steps of `cone.runge_kutta`; the last one is kept."""
        if self.last is None or not np.array_equal(self.last[0], ray):
            self.last = ray, self._marched(ray)
        return self.last[1]

    def _marched(self, ray: Array) -> Array:
        u, v, w = self.along, -self.normal, self.outward
        begin = np.log(np.tan(0.5 * self.wave_angle))
        a2 = self.sound_square(u, v)
        to_sonic = a2 - v**2
        layer = -0.5 * to_sonic / v / (u * np.sin(self.wave_angle) + a2 * w / to_sonic)
        growth = np.log1p((begin - np.log(np.tan(0.5 * ray))) / layer)
        deepest = cone.DEEPEST * np.sqrt(a2)

        def slope(t: float, now: Array) -> Array:
            u, v, log_w = now
            stretch = layer * np.exp(growth * t)
            theta = 2.0 * np.arctan(np.exp(begin + layer - stretch))
            a2 = self.sound_square(u, v)
            across = np.minimum(v, deepest)
            squeeze = np.where(v < deepest, a2 / (a2 - across**2), 1.0)
            sine = np.sin(theta)
            dv = -(u * sine + squeeze * np.exp(log_w))
            inward: Array = -growth * stretch * np.array([across * sine, dv, -squeeze * np.cos(theta)])
            return inward

        return cone.runge_kutta(slope, np.array([u, v, np.log(w)]))

    def inside(self, ray: Array) -> Array:
        """Logarithm of w/(u sin theta) on a ray: zero on the surface, positive inside it."""
        u, _, log_w = self.to_ray(ray)
        found: Array = log_w - np.log(u * np.sin(ray))
        return found


@np.errstate(all="ignore")
def closeness(gas: Gas, before: State, velocity: Array, wave_angle: Array, ray: Array) -> Array:
    """How far a ray lies inside the surface that a conical shock belongs to, ln of w/(u sin(ray)), (N,), 1: zero on the surface.

    gas: N points. before: the state ahead of the shock. velocity: (N,), m/s. wave_angle, ray: (N,), rad. w and u are the speeds away
    from the axis and along the ray. Source: Taylor and Maccoll (1933).
    """
    return Layer(gas, before, velocity, wave_angle).inside(ray)


def _lowest(before: State, velocity: Array, ray: Array) -> Array:
    """The shock lies outside the Mach wave and outside the cone."""
    return np.maximum(np.arcsin(np.minimum(before.sound_speed / velocity, 1.0)), ray)


def _peak_wave(gas: Gas, before: State, velocity: Array, ray: Array) -> Array:
    """Wave angle of the conical shock that comes closest to having its surface beyond a ray."""
    low = _lowest(before, velocity, ray)

    def near(wave_angle: Array, at: Codes) -> Array:
        return closeness(gas.take(at), before.take(at), velocity[at], wave_angle, ray[at])

    return scanned_peak(near, low + 1e-3 * (0.5 * np.pi - low), np.full(low.shape, 0.5 * np.pi))


def _weak_layer(gas: Gas, before: State, velocity: Array, half_angle: Array) -> tuple[Layer, Flags]:
    """The layer on a cone (N,), and whether there is one."""
    low = _lowest(before, velocity, half_angle)
    # a conical shock turns the stream further behind it, so that the wedge's limit lies between the weak and the strong solution
    high = np.array(shocks.detachment(velocity / before.sound_speed, before.isentropic_exponent).wave_angle)
    at_high = closeness(gas, before, velocity, high, half_angle)
    blunt = np.flatnonzero(~(at_high > 0.0) & np.isfinite(half_angle))
    if blunt.size:
        part = gas.take(blunt), before.take(blunt), velocity[blunt]
        high[blunt] = _peak_wave(*part, half_angle[blunt])
        at_high[blunt] = closeness(*part, high[blunt], half_angle[blunt])
    reach = high - low

    # the half angle of a weak conical shock goes with the fourth root of its distance from the Mach wave
    def layer_at(root: Array) -> Layer:
        return Layer(gas, before, velocity, low + reach * root**4)

    tried: list[tuple[Array, Layer]] = []

    def residual(root: Array) -> Array:
        tried[:] = [*tried[-1:], (root, layer_at(root))]
        return tried[-1][1].inside(half_angle)

    least = np.full(low.shape, _LEAST_ROOT)
    at_least = residual(least)
    chord = (at_high * least - at_least) / (at_high - at_least)
    root = bracketed(residual, least, np.ones(low.shape), _ROOT_TOLERANCE, enough=_NOISE, first=chord, ends=(at_least, at_high))
    attached = np.isfinite(root)
    layer = next((layer for at, layer in tried if np.array_equal(at, root)), None)
    # where there is none any layer does
    return layer or Layer(gas, before, velocity, np.where(attached, low + reach * root**4, 0.5 * np.pi)), attached


@np.errstate(all="ignore")
def cone_flow(gas: Gas, before: State, velocity: Array, half_angle: Array) -> Cone:
    """Flow of any gas over a cone with an attached shock, the weak solution.

    gas: N points. before: the state ahead. velocity: (N,), m/s. half_angle: of the cone, (N,), rad, from `SLENDEREST` to the
    detachment angle. Returns `Cone`; not attached where the stream is subsonic, the cone too blunt or too slender.
    Source: Taylor and Maccoll (1933), on the isentrope of the gas.
    """
    wanted = np.where((half_angle >= SLENDEREST) & (velocity > before.sound_speed), half_angle, np.nan)
    layer, attached = _weak_layer(gas, before, velocity, wanted)
    u = np.where(attached, layer.to_ray(half_angle)[0], 0.0)
    surface = gas.at("hs", layer.total - 0.5 * u**2, layer.front.state.entropy, start=layer.front.state)
    front = gas_shocks.Front(layer.front.state, layer.front.velocity, np.where(attached, layer.wave_angle, np.nan), attached)
    return Cone(front, np.where(attached, layer.deflection, np.nan), surface, u, attached & surface.good, layer)


@np.errstate(all="ignore")
def on_ray(gas: Gas, before: State, velocity: Array, wave_angle: Array, ray: Array, layer: Layer | None = None) -> Ray:
    """Flow on a ray between a conical shock and its cone.

    gas: N points. before: the state ahead of the shock. velocity: (N,), m/s. wave_angle: of the shock, (N,), rad. ray: (N,),
    rad, from the cone's half angle to `wave_angle`. layer: of that shock, where it is known. Returns `Ray`.
    Source: Taylor and Maccoll (1933).
    """
    layer = layer or Layer(gas, before, velocity, wave_angle)
    within = np.minimum(ray, wave_angle * (1.0 - _ON_SHOCK))
    if np.all(within < ray):
        return Ray(layer.front.state, layer.front.velocity * np.cos(layer.deflection), -layer.normal)
    u, v, _ = layer.to_ray(within)
    state = gas.at("hs", layer.total - 0.5 * (u**2 + v**2), layer.front.state.entropy, start=layer.front.state)
    return Ray(state, u * np.cos(ray) - v * np.sin(ray), v)


@np.errstate(all="ignore")
def largest_half_angle(gas: Gas, before: State, velocity: Array) -> Array:
    """Largest cone half angle with an attached shock in any gas.

    gas: N points. before: the state ahead. velocity: (N,), m/s. Returns (N,), rad; NaN below Mach 1.
    Source: Taylor and Maccoll (1933): the cone on which the weak and the strong solution meet; Newton steps from the cone
    of constant gamma.
    """
    ray = cone.detachment(velocity / before.sound_speed, before.isentropic_exponent).deflection
    step = ray
    for _ in range(_DETACHMENT_ROUNDS):
        wave_angle = _peak_wave(gas, before, velocity, ray)
        layer = Layer(gas, before, velocity, wave_angle)
        bit = 1.0e-4 * ray
        value, beyond = layer.inside(ray), layer.inside(ray + bit)
        step = bit * value / (beyond - value)
        ray = ray - step
        if not np.any(np.abs(step) > _DETACHMENT_TOLERANCE):
            break
    return np.where(np.abs(step) <= _DETACHMENT_TOLERANCE, ray, np.nan)
