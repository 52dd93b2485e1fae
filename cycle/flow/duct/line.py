"""The energy line: at a place of the duct everything but the flow is known, so the velocity alone fixes the state.

h = ht - u^2/2 and v = u A/m. The impulse F(u) = p A + m u is regular there, with its minimum F* at Mach 1:

    dF/du = m (1 - 1/M^2)/(1 + G),  G the Grueneisen parameter,

from dp = -[(a/v)^2 dv + (G/v) u du]/(1 + G) along the line (derived from the definitions of a and G). At constant gamma
F = c1 u + c2/u exactly, c2 = (m/g)(a^2 + (g-1)/2 u^2): Shapiro (1953), ch. 4, the impulse function.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow.duct.layout import Mixture, flat
from cycle.gas.state import State


@dataclass(frozen=True, eq=False)
class Model:
    """F(u) near a state: c0 + c1 u + c2/u with its value, slope and very nearly its curvature; each (n, N), N and m/s."""

    c0: Array
    c1: Array
    c2: Array

    def __call__(self, u: Array) -> Array:
        """F at u."""
        return self.c0 + self.c1 * u + self.c2 / u

    def take(self, index: Codes | Flags) -> Model:
        """The models of the chosen points."""
        return Model(self.c0[:, index], self.c1[:, index], self.c2[:, index])


def model_about_sonic(impulse: Array, u: Array) -> Model:
    """F* (w + 1/w)/2, w = u/u*: exact at constant gamma, near enough elsewhere to start from."""
    return Model(np.zeros_like(u), 0.5 * impulse / u, 0.5 * impulse * u)


@dataclass(frozen=True, eq=False)
class OnLine:
    """States of n places of N points on their energy lines. u m/s, mach_squared and impulse N are (n, N); state has the
    n N points flattened."""

    u: Array
    state: State
    mach_squared: Array
    impulse: Array

    def take(self, index: Codes) -> OnLine:
        """The places of the chosen points."""
        rows, n = self.u.shape
        if index.size == n and (index == np.arange(n)).all():
            return self
        state = self.state.take(flat(rows, n, index))
        return OnLine(self.u[:, index], state, self.mach_squared[:, index], self.impulse[:, index])

    @property
    def good(self) -> Flags:
        """(n, N) true where the state may be used."""
        good: Flags = self.state.good.reshape(self.u.shape)
        return good

    @property
    def pressure(self) -> Array:
        """Pa, (n, N)."""
        return self.state.pressure.reshape(self.u.shape)

    def model(self, mass_flow: Array) -> Model:
        """F(u) about these states; mass_flow (n, N)."""
        s, u = self.state, self.u
        pv = s.pressure / s.density
        cv = s.specific_heat + pv / s.temperature * s.volume_by_temperature**2 / s.volume_by_pressure
        grueneisen = (-pv / (s.temperature * cv) * s.volume_by_temperature / s.volume_by_pressure).reshape(u.shape)
        slope = mass_flow * (1.0 - 1.0 / self.mach_squared) / (1.0 + grueneisen)
        g, a2 = s.isentropic_exponent.reshape(u.shape), u**2 / self.mach_squared
        c2 = mass_flow * (a2 + 0.5 * (g - 1.0) * u**2) / g
        c1 = slope + c2 / u**2
        return Model(self.impulse - c1 * u - c2 / u, c1, c2)


def at_velocity(mixture: Mixture, u: Array, start: State | None = None, pressure: Array | None = None) -> OnLine:
    """States at the velocities u (n, N), m/s.

    start: states of the same places whose composition is near; pressure: a guess, Pa (n, N), with which its temperature
    is set; without it the start's own pressure is kept.
    """
    h = (mixture.total_enthalpy - 0.5 * u**2).ravel()
    v = (u * mixture.area / mixture.mass_flow).ravel()
    if start is not None:
        p = start.pressure if pressure is None else pressure.ravel()
        T = np.clip(start.temperature * p * v * start.density / start.pressure, 150.0, 6000.0)
        start = replace(start, temperature=T, pressure=p, density=1.0 / v)
    state = mixture.gas.at("hv", h, v, start=start)
    p = state.pressure.reshape(u.shape)
    return OnLine(u, state, (u / state.sound_speed.reshape(u.shape)) ** 2, p * mixture.area + mixture.mass_flow * u)


@dataclass(frozen=True, eq=False)
class Sonic:
    """Mach 1 on the energy lines of (n, N) places: impulse F* N, velocity m/s, pressure Pa; state: near it, flattened."""

    impulse: Array
    velocity: Array
    pressure: Array
    state: State

    @property
    def good(self) -> Flags:
        """(n, N)."""
        good: Flags = self.state.good.reshape(self.velocity.shape)
        return good

    def take(self, index: Codes) -> Sonic:
        """The places of the chosen points."""
        rows, n = self.velocity.shape
        state = self.state.take(flat(rows, n, index))
        return Sonic(self.impulse[:, index], self.velocity[:, index], self.pressure[:, index], state)


def sonic(mixture: Mixture, start: State | None = None, velocity: Array | None = None, rounds: int = 2) -> Sonic:
    """Mach 1 of every place, by rounds of u* = a_t sqrt(2/(g+1)) with the exponent of the last state; F* is then corrected
    to second order for the last change of u, so that its error is of the third."""
    shape = mixture.area.shape
    u, pressure = velocity, None
    if start is None or u is None:
        start, u, pressure = _first(mixture)
    for _ in range(rounds):
        found = at_velocity(mixture, u, start, pressure)
        start, pressure = found.state, None
        g = start.isentropic_exponent.reshape(shape)
        a2 = start.sound_speed.reshape(shape) ** 2
        wanted = np.sqrt(2.0 * (a2 + 0.5 * (g - 1.0) * u**2) / (g + 1.0))
        change, u = wanted - u, wanted
    impulse = found.impulse - mixture.mass_flow * (g + 1.0) / (g * u) * 0.5 * change**2
    return Sonic(impulse, u, (impulse - mixture.mass_flow * u) / mixture.area, start)


_FIRST_EXPONENT = 1.25
"""Isentropic exponent of burnt gas to start from; common practice."""

_FIRST_SPEED = 700.0
"""p*/(rho* u*) of burnt gas to start from, m/s."""


def _first(mixture: Mixture) -> tuple[State, Array, Array]:
    """A state near rest, and the velocity and pressure of Mach 1 that follow from it."""
    shape, g = mixture.area.shape, _FIRST_EXPONENT
    flux = mixture.mass_flow / mixture.area
    p = flux * _FIRST_SPEED
    rest = mixture.gas.at("hp", mixture.total_enthalpy.ravel(), p.ravel())
    at = (rest.pressure / rest.density).reshape(shape)
    u = np.sqrt(2.0 * g / (g + 1.0) * at)
    return rest, u, flux * at * 2.0 / (g + 1.0) / u
