"""A burner march of one point written with Cantera: what a capable user writes by hand, as the thing to beat.

Slice by slice with the trapezoidal rule, equilibrium gas with inert unburnt fuel, hydrogen injected at the entry of a duct
that opens linearly, friction, and the same order of modes: attached, shock train, thermal throat. Pressures by brentq.
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from scipy.optimize import brentq

from benchmarks.cantera_cycle import PointByPoint
from cycle.constants import STANDARD_AIR
from cycle.flow.limits import separation_pressure_ratio
from cycle.gas.fuels import FUELS, Fuel
from cycle.gas.species import REACTING, species_data, species_table

NONE, ATTACHED, TRAIN, THROAT = range(4)
"""What a point runs as."""

FUEL_TEMPERATURE = 300.0


@dataclass(frozen=True)
class Points:
    """N entries of a duct: temperature K, pressure Pa, Mach number, area m2, fuel over stoichiometric, its axial speed m/s,
    burning theta, burnt fraction, Fanning factor, exit area over entry area, length m."""

    temperature: np.ndarray
    pressure: np.ndarray
    mach: np.ndarray
    area: np.ndarray
    equivalence: np.ndarray
    speed: np.ndarray
    theta: np.ndarray
    burnt: np.ndarray
    friction: np.ndarray
    opening: np.ndarray
    length: np.ndarray

    def take(self, i: Any) -> Points:
        return Points(*(getattr(self, f.name)[i] for f in fields(self)))


def sample(n: int, seed: int = 0) -> Points:
    """Invented points, about 70 % attached, the rest in the other modes or beyond them."""
    draw = np.random.default_rng(seed).uniform
    return Points(
        draw(500.0, 900.0, n), draw(4e4, 9e4, n), draw(2.0, 3.6, n), draw(0.05, 0.1, n), draw(0.1, 1.0, n), draw(0.0, 1500.0, n),
        draw(2.0, 8.0, n), draw(0.85, 0.98, n), draw(0.001, 0.003, n), draw(1.8, 3.2, n), np.full(n, 1.2),
    )  # fmt: skip


class ChokedError(Exception):
    """No state on this branch."""


def _phase(fuel: Fuel) -> Any:
    """The program's species and reference pressure with Cantera's data. Unburnt fuel is made of helium, of which there is
    no other, in the amount that gives its mass: it cannot react, and Cantera's fastest solver holds."""
    import cantera as ct

    listed = {s.name: s for s in ct.Species.list_from_file("nasa_gas.yaml")}
    table = species_table(tuple(STANDARD_AIR), fuel)
    names = [str(species_data()["listed_as"].get(n, n)) for n in table.names if n in REACTING or n in STANDARD_AIR]
    unburnt = ct.Species("unburnt", {"He": 1e3 * fuel.molar_mass / ct.Element("He").weight})
    unburnt.thermo = listed[str(fuel.vapour)].thermo
    species = [PointByPoint._at_one_bar(s) for s in (*(listed[name] for name in names), unburnt)]
    return ct.Solution(thermo="ideal-gas", species=species)


class March:
    """One point at a time."""

    def __init__(self) -> None:
        self.fuel = FUELS["hydrogen"]
        self.gas = _phase(self.fuel)
        self.solves, self.air = 0, dict(STANDARD_AIR)
        self.gas.TPX = 300.0, 1e5, self.air
        self.air_mass = self.gas.mean_molecular_weight

    # ------------------------------------------------------------------ the duct
    def enter(self, point: Points) -> None:
        """Take up a point: its entering stream, and what the duct is made of."""
        self.point, gas = point, self.gas
        gas.TPX = point.temperature, point.pressure, self.air
        self.equilibrate("TP")
        self.u2 = point.mach * self.sound()[0]
        self.flow_2 = gas.density * self.u2 * point.area
        self.ht_2 = gas.h + 0.5 * self.u2**2
        self.ratio = point.equivalence * float(self.fuel.stoichiometric_ratio(STANDARD_AIR))
        self.flow = self.flow_2 * (1.0 + self.ratio)
        self.ht = (self.ht_2 + self.ratio * float(self.fuel.total_enthalpy(FUEL_TEMPERATURE))) / (1.0 + self.ratio)
        self.impulse_2 = point.pressure * point.area + self.flow_2 * self.u2
        self.brought = self.flow_2 * self.ratio * point.speed
        self.limit = float(separation_pressure_ratio(np.array(point.mach)))

    def area(self, x: float) -> float:
        return self.point.area * (1.0 + (self.point.opening - 1.0) * x / self.point.length)

    @property
    def slope(self) -> float:
        return self.point.area * (self.point.opening - 1.0) / self.point.length

    def drag(self, x: float) -> float:
        return self.point.friction * np.sqrt(np.pi / self.area(x))

    def load(self, x: float, T: float, p: float) -> None:
        """Atoms and inert fuel at x."""
        part, theta = x / self.point.length, self.point.theta
        burnt = max(self.point.burnt * theta * part / (1.0 + (theta - 1.0) * part), 1e-10)
        fuel = self.ratio * self.air_mass / (1e3 * self.fuel.molar_mass)
        self.gas.TPX = T, p, {**self.air, "H2": burnt * fuel, "unburnt": (1.0 - burnt) * fuel}

    # ------------------------------------------------------------------ states
    def equilibrate(self, pair: str) -> None:
        import cantera as ct

        self.solves += 1
        try:
            self.gas.equilibrate(pair, rtol=1e-10, max_steps=2000)
        except ct.CanteraError as error:
            raise ChokedError from error

    def volume(self, u: float, p: float) -> float:
        """Of the equilibrium state at p on the energy line."""
        if not u > 0.0:
            raise ChokedError
        self.gas.HP = self.ht - 0.5 * u * u, p
        self.equilibrate("HP")
        return 1.0 / self.gas.density

    def sound(self) -> tuple[float, float]:
        """Sound speed, m/s, and isentropic exponent by a central difference."""
        gas, d = self.gas, 2e-4
        s, p, density, here = gas.s, gas.P, gas.density, gas.state
        found = []
        for sign in (1.0, -1.0):
            gas.SP = s, p * (1.0 + sign * d)
            self.equilibrate("SP")
            found.append(gas.density)
        gas.state = here
        exponent = np.log((1.0 + d) / (1.0 - d)) / np.log(found[0] / found[1])
        return float(np.sqrt(exponent * p / density)), float(exponent)

    def pressure(self, u_of: Any, x: float, guess: float, width: float) -> float:
        """The pressure near a guess at which mass flows; its bracket grows until the sign changes."""
        flux = self.flow / self.area(x)

        def miss(p: float) -> float:
            u = u_of(p)
            return u / self.volume(u, p) / flux - 1.0

        low, high = guess * (1.0 - width), guess * (1.0 + width)
        f_low, f_high = miss(low), miss(high)
        for _ in range(40):
            if f_low * f_high <= 0.0:
                break
            step = high - low
            if abs(f_low) < abs(f_high):
                low = max(low - step, low / 1.3)
                f_low = miss(low)
            else:
                high += step
                f_high = miss(high)
        else:
            raise ChokedError
        p: float = brentq(miss, low, high, rtol=1e-11, xtol=1e-9)
        miss(p)
        return p

    def supersonic(self, u: float) -> bool:
        return bool(u > self.sound()[0])

    # ------------------------------------------------------------------ marching
    def slices(self, xs: np.ndarray, u: float, p: float, guess: float, width: float) -> tuple[list[float], list[float]]:
        """Velocities and pressures at xs from the first on; guess and width: for the first slice."""
        us, ps = [u], [p]
        for i in range(len(xs) - 1):
            a, b = float(xs[i]), float(xs[i + 1])
            mean, h = 0.5 * (self.area(a) + self.area(b)), b - a
            known = ps[-1] * mean + self.flow * us[-1] * (1.0 - 0.5 * self.drag(a) * h)
            held = self.flow * (1.0 + 0.5 * self.drag(b) * h)
            if i:
                guess, width = ps[-1] ** 2 / ps[-2], max(0.05 * abs(ps[-1] / ps[-2] - 1.0), 1e-6)
            self.load(b, self.gas.T, guess)
            q = self.pressure(lambda p, k=known, m=mean, f=held: (k - p * m) / f, b, guess, width)
            us.append((known - q * mean) / held)
            ps.append(q)
        return us, ps

    def sonic(self, x: float, u: float, p: float) -> tuple[float, float, float, float]:
        """u*, p*, F* and the exponent at x."""
        self.load(x, 2000.0, p)
        exponent = 1.2
        for _ in range(12):
            p = self.pressure(lambda _, v=u: v, x, p, 1e-3)
            a, exponent = self.sound()
            new = np.sqrt(2.0 * (a * a + 0.5 * (exponent - 1.0) * u * u) / (exponent + 1.0))
            change, u = abs(new / u - 1.0), float(new)
            if change < 1e-7:
                break
        p = self.pressure(lambda _, v=u: v, x, p, 1e-5)
        return u, p, p * self.area(x) + self.flow * u, exponent

    # ------------------------------------------------------------------ modes
    def run(self, point: Points, count: int) -> tuple[int, float]:
        """Mode and exit impulse p A + m u, N, with `count` slices of each march."""
        self.enter(point)
        for attempt in (self.attached, self.train, self.throat):
            try:
                return attempt(count)
            except ChokedError:
                continue
        return NONE, float("nan")

    def out(self, mode: int, us: list[float], ps: list[float]) -> tuple[int, float]:
        return mode, ps[-1] * self.area(self.point.length) + self.flow * us[-1]

    def attached(self, count: int) -> tuple[int, float]:
        F, area, p2 = self.impulse_2 + self.brought, self.point.area, float(self.point.pressure)
        self.load(0.0, float(self.point.temperature), p2)
        p = self.pressure(lambda q: (F - q * area) / self.flow, 0.0, p2, 1e-2)
        us, ps = self.slices(np.linspace(0.0, self.point.length, count + 1), (F - p * area) / self.flow, p, p * 1.01, 2e-3)
        if not self.supersonic(us[-1]) or (np.diff(us) / us[1:]).min() < -0.25 or max(ps) > self.limit * p2:
            raise ChokedError
        return self.out(ATTACHED, us, ps)

    def core(self, p3: float, xs: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Core area over duct area and velocity at xs, at p3."""
        momentum = self.impulse_2 - p3 * self.point.area + self.brought
        share, us, before = [], [], 0.0
        for i, x in enumerate(xs):
            u = momentum / self.flow
            for _ in range(2):
                self.load(float(x), 1800.0, p3)
                v = self.volume(u, p3)
                force = self.drag(float(x)) * self.area(float(x)) * u * u / v
                lost = 0.5 * (before + force) * (xs[i] - xs[i - 1]) if i else 0.0
                u = (momentum - lost) / self.flow
            momentum, before = momentum - lost, force
            share.append(self.flow * v / u / self.area(float(x)))
            us.append(u)
        return np.array(share), np.array(us)

    def train(self, count: int) -> tuple[int, float]:
        xs = np.linspace(0.0, self.point.length, count + 1)

        def miss(ln_p: float) -> tuple[float, float, float]:
            share, us = self.core(float(np.exp(ln_p)), xs)
            i = int(np.clip(share.argmax(), 1, count - 1))
            fit = np.polyfit(xs[i - 1 : i + 2] - xs[i], np.log(share[i - 1 : i + 2]), 2)
            top = float(np.clip(-0.5 * fit[1] / fit[0], -xs[1], xs[1]))
            return float(np.polyval(fit, top)), float(xs[i] + top), float(np.interp(xs[i] + top, xs, us))

        at = np.log(self.point.pressure * self.limit)
        value, x, u = miss(at)
        new = at + float(np.clip(value / 0.5, -0.2, 0.2))
        for _ in range(12):
            last, at, before = at, new, value
            value, x, u = miss(at)
            if abs(value) < 1e-10:
                break
            slope = (value - before) / (at - last)
            new = at - float(np.clip(value / min(slope, -0.05), -0.3, 0.3))
        else:
            raise ChokedError
        p3 = float(np.exp(at))
        self.load(x, 1800.0, p3)
        self.volume(u, p3)
        if not self.supersonic(u) or p3 <= self.point.pressure:
            raise ChokedError
        us, ps = self.slices(np.linspace(x, self.point.length, count + 1), u, p3, p3 * 0.9999, 1e-3)
        if not self.supersonic(us[-1]):
            raise ChokedError
        return self.out(TRAIN, us, ps)

    def throat(self, count: int) -> tuple[int, float]:
        length = float(self.point.length)
        u = 850.0
        p = 3.0 * self.flow * u / self.area(0.0) / 3.0

        def excess(x: float) -> float:
            nonlocal u, p
            d = 1e-4 * length
            (ua, pa, fa, _), (ub, pb, fb, _) = self.sonic(x - d, u, p), self.sonic(x + d, u, p)
            u, p = 0.5 * (ua + ub), 0.5 * (pa + pb)
            return (fb - fa) / (2.0 * d) - p * self.slope + self.flow * u * self.drag(x)

        xs = np.linspace(0.03, 0.97, 8) * length
        values = [excess(float(x)) for x in xs]
        falls = [i for i in range(7) if values[i] > 0.0 >= values[i + 1]]
        if not falls:
            raise ChokedError
        x = brentq(excess, xs[falls[0]], xs[falls[0] + 1], xtol=1e-8 * length)
        u, p, F, _ = self.sonic(x, u, p)
        ends = []
        for branch, end in ((1.0, length), (-1.0, 0.0)):
            xs = np.linspace(x, end, count + 1)
            guess = self.first(x, float(xs[1]), u, p, F, branch)
            self.load(x, 2000.0, p)
            self.volume(u, p)
            ends.append(self.slices(xs, u, p, *guess))
        (us, ps), (ub, pb) = ends
        if pb[-1] * self.point.area + self.flow * ub[-1] - self.brought > self.impulse_2:
            raise ChokedError
        return self.out(THROAT, us, ps)

    def first(self, x: float, to: float, u: float, p: float, F: float, branch: float) -> tuple[float, float]:
        """Pressure guess and bracket of the first slice from Mach 1: a parabola of F(u) about the next sonic state."""
        u1, p1, F1, g = self.sonic(to, u, p)
        h, bend = to - x, self.flow * (g + 1.0) / (g * u1)
        b = 0.5 * self.flow * (self.slope * h / self.area(to) + self.drag(x) * h)
        c = F1 - F - 0.5 * (p + p1) * self.slope * h + 0.5 * self.flow * self.drag(x) * (u + u1) * h
        away = (-b + branch * np.sqrt(max(b * b - 2.0 * bend * c, 0.0))) / bend
        return (F1 + 0.5 * bend * away**2 - self.flow * (u1 + away)) / self.area(to), abs(0.1 * away / u1)
