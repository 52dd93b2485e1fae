"""A plain march of one duct, to confirm what the program finds of its modes: one place after another, by the classical Runge-Kutta step.

Written from the balances: attached d(pA + mu) = p dA - Cf (rho u^2/2) P dx with energy, a separated core at one pressure with
d(mu) = -Cf (rho u^2/2) P dx, fuel entering with its enthalpy and impulse. Nothing of `cycle` is used.

At a place the duct's mass flow, area and total enthalpy are known, so that R T of the stream that fills it is a function of u^2 alone.
A polynomial holds it: a straight line at constant gamma, and the impulse per mass, f = u + R T/u, gives u from a quadratic equation.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from functools import cached_property
from itertools import pairwise

import numpy as np
from numpy.polynomial import chebyshev

from tests.scalar_gas import Burning, Equilibrium, Perfect, Thermal

_COUNT = 24
_NODES = -np.cos(np.pi * np.arange(_COUNT) / (_COUNT - 1))
_POWERS = np.linalg.inv(chebyshev.chebvander(_NODES, _COUNT - 1)).T @ np.array(
    [np.pad(chebyshev.cheb2poly([0.0] * k + [1.0]), (0, _COUNT - 1 - k))[::-1] for k in range(_COUNT)]
)
"""From values at the nodes to the powers of the polynomial through them, the highest first."""


@dataclass(frozen=True)
class Injection:
    x: float
    share: float
    speed: float
    theta: float
    length: float

    def burnt(self, x: np.ndarray) -> np.ndarray:
        place = np.clip((x - self.x) / self.length, 0.0, 1.0)
        return self.theta * place / (1.0 + (self.theta - 1.0) * place)


@dataclass(frozen=True)
class Place:
    """What is known at x of whatever stream fills the duct there: mass flow, area and its slope, drag over u; R T in powers of u^2."""

    x: float
    mass_flow: float
    area: float
    slope: float
    drag: float
    powers: tuple[float, ...]
    middle: float
    half: float

    def tangent(self, w: float) -> tuple[float, float]:
        """R T, J/kg, at u^2 = w as a + b u^2 near it."""
        s = (w - self.middle) / self.half
        value = rate = 0.0
        for power in self.powers:
            rate = rate * s + value
            value = value * s + power
        rate /= self.half
        return value - rate * w, rate

    def state(self, impulse: float, fast: bool, w: float) -> tuple[float, float, float]:
        """u^2, R T, and f^2 over the sonic one less 1 (below 0: there is no such stream, the state is the sonic one), from a guess w."""
        f = impulse / self.mass_flow
        sign = 1.0 if fast else -1.0
        for _ in range(40):
            a, b = self.tangent(w)
            room = f * f - 4.0 * (1.0 + b) * a
            u = (f + sign * math.sqrt(max(room, 0.0))) / (2.0 * (1.0 + b))
            w, before = u * u, w
            if abs(w - before) < 1e-13 * w:
                break
        return w, a + b * w, room / (4.0 * (1.0 + b) * a)

    def sonic(self) -> tuple[float, float, float]:
        """u^2, R T and impulse, N, at Mach 1: the least impulse of all."""
        w = self.middle
        for _ in range(60):
            a, b = self.tangent(w)
            w, before = a / (1.0 + b), w
            if abs(w - before) < 1e-13 * w:
                break
        a, b = self.tangent(w)
        return w, a + b * w, self.mass_flow * 2.0 * math.sqrt(a * (1.0 + b))

    def impulse(self, w: float) -> float:
        a, b = self.tangent(w)
        return self.mass_flow * (math.sqrt(w) + (a + b * w) / math.sqrt(w))

    def force(self, w: float, thermal: float) -> float:
        """d(pA + mu)/dx, N/m, of the attached stream."""
        u = math.sqrt(w)
        return self.mass_flow * thermal / (u * self.area) * self.slope - self.drag * u

    def pressure(self, w: float, thermal: float) -> float:
        return self.mass_flow * thermal / (math.sqrt(w) * self.area)


@dataclass(frozen=True)
class Row:
    """A station of an attached march: piece and place, u^2, R T, impulse, room above the sonic impulse (of squares, over it)."""

    piece: int
    place: Place
    w: float
    thermal: float
    impulse: float
    room: float

    @property
    def pressure(self) -> float:
        return self.place.pressure(self.w, self.thermal)


@dataclass(frozen=True)
class Piece:
    """A part of the duct in which nothing begins or ends; places at the ends and the middles of its steps, close at both ends of it."""

    a: float
    b: float
    thermal: Thermal
    kick: float
    """Impulse of the fuel that enters at a, N."""
    places: tuple[Place, ...]
    known: tuple[np.ndarray, ...]
    """x, area, burnt fuel per air and total enthalpy at the places."""


@dataclass(frozen=True)
class Duct:
    """One duct of circular section: what enters it, its areas (x, A m2), its fuel. steps: of each piece."""

    gas: Perfect | Burning | Equilibrium
    pressure: float
    temperature: float
    velocity: float
    mach: float
    mass_flow: float
    sections: tuple[tuple[float, float], ...]
    injections: tuple[Injection, ...]
    ratio: float
    burnt: float
    fuel_temperature: float
    friction: float
    steps: int = 40
    pieces: tuple[Piece, ...] = field(init=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "pieces", tuple(self._piece(a, b) for a, b in pairwise(self._ends())))

    def _ends(self) -> list[float]:
        ends = {x for x, _ in self.sections} | {i.x for i in self.injections} | {i.x + i.length for i in self.injections}
        return sorted(x for x in ends if 0.0 <= x <= self.end)

    @property
    def end(self) -> float:
        return self.sections[-1][0]

    @property
    def entry_area(self) -> float:
        return self.sections[0][1]

    @property
    def impulse(self) -> float:
        return self.pressure * self.entry_area + self.mass_flow * self.velocity

    @cached_property
    def air_enthalpy(self) -> float:
        """Total, J/kg."""
        return self.gas.air_enthalpy(self.temperature, self.pressure) + 0.5 * self.velocity**2

    @cached_property
    def pressures(self) -> tuple[float, float]:
        """Bounds of the tables: far below the entry's, and above that behind a normal shock."""
        widest = max(A for _, A in self.sections) / self.entry_area
        return 0.04 * self.pressure / widest, 1.2 * self.impulse / self.entry_area

    def entered(self, inside: float) -> float:
        """Fuel per air injected ahead of a place inside a piece."""
        return self.ratio * sum(i.share for i in self.injections if i.x < inside)

    def burnt_ratio(self, x: np.ndarray) -> np.ndarray:
        """Burnt fuel per air."""
        return np.asarray(self.ratio * self.burnt * sum(i.share * i.burnt(x) for i in self.injections)) + 0.0 * x

    def total_enthalpy(self, x: np.ndarray, inside: float) -> np.ndarray:
        ratio = self.entered(inside)
        brought = ratio * self.gas.fuel_enthalpy(self.fuel_temperature) + self.gas.released(self.burnt_ratio(x))
        return np.asarray((self.air_enthalpy + brought) / (1.0 + ratio))

    def area(self, x: np.ndarray, inside: float) -> tuple[np.ndarray, float]:
        """A m2 at x and dA/dx m of the piece in which `inside` lies."""
        (a, A), (b, B) = next(pair for pair in pairwise(self.sections) if inside < pair[1][0])
        slope = (B - A) / (b - a)
        return A + slope * (x - a), slope

    @cached_property
    def _tables(self) -> dict[float, Thermal]:
        return {}

    def _thermal(self, inside: float) -> Thermal:
        """R T of what flows in a piece; pieces between the same injectors share a table."""
        ratio = self.entered(inside)
        if ratio not in self._tables:
            begins = max((i.x for i in self.injections if i.x < inside), default=0.0)
            ends = min((i.x for i in self.injections if i.x > inside), default=self.end)
            low, high = self.burnt_ratio(np.array([begins, ends]))
            total = float(np.max(self.total_enthalpy(np.array([begins, ends]), inside)))
            self._tables[ratio] = self.gas.thermal(ratio, (float(low), float(high)), total, self.pressures)
        return self._tables[ratio]

    def _piece(self, a: float, b: float) -> Piece:
        ends = a + (b - a) * 0.5 * (1.0 - np.cos(np.pi * np.arange(self.steps + 1) / self.steps))
        ends[-1] = b
        x = np.sort(np.concatenate([ends, 0.5 * (ends[1:] + ends[:-1])]))
        kick = sum(self.mass_flow * self.ratio * i.share * i.speed for i in self.injections if i.x == a)
        inside = 0.5 * (a + b)
        known = x, self.area(x, inside)[0], self.burnt_ratio(x), self.total_enthalpy(x, inside)
        return Piece(a, b, self._thermal(inside), kick, self.places(x, inside), known)

    def places(self, x: np.ndarray, inside: float) -> tuple[Place, ...]:
        """Places at x in the piece in which `inside` lies."""
        ratio, thermal = self.entered(inside), self._thermal(inside)
        m, (A, slope) = self.mass_flow * (1.0 + ratio), self.area(x, inside)
        burnt, total = self.burnt_ratio(x), self.total_enthalpy(x, inside)
        high = 2.0 * (total - self.gas.coldest(ratio, burnt))
        top = np.full_like(x, self.pressures[1])
        low = (m * thermal(burnt, total, top) / (A * top)) ** 2
        w = (0.5 * (low + high))[:, None] + (0.5 * (high - low))[:, None] * _NODES
        values = np.tile(thermal(burnt, total, np.full_like(x, self.pressure))[:, None], _COUNT)
        for _ in range(8):
            pressure = np.clip(m * values / (np.sqrt(w) * A[:, None]), *self.pressures)
            values, before = thermal(burnt[:, None], total[:, None] - 0.5 * w, pressure), values
            if np.all(np.abs(values - before) < 1e-12 * values):
                break
        powers = (values @ _POWERS)[:, -2 if isinstance(self.gas, Perfect) else 0 :].tolist()
        drag = (self.friction * m * np.sqrt(np.pi / A)).tolist()
        known = zip(x.tolist(), A.tolist(), drag, powers, (0.5 * (low + high)).tolist(), (0.5 * (high - low)).tolist(), strict=True)
        return tuple(Place(at, m, area, slope, D, tuple(row), middle, half) for at, area, D, row, middle, half in known)

    def normal_shock(self) -> float:
        """Pressure behind a normal shock at the entry, Pa."""
        place = self.air_place
        w, thermal, _ = place.state(self.impulse, False, place.sonic()[0])
        return place.pressure(w, thermal)

    @cached_property
    def air_place(self) -> Place:
        """The entry, ahead of whatever is injected there."""
        return self.places(np.array([0.0]), -1.0)[0] if any(i.x == 0.0 for i in self.injections) else self.pieces[0].places[0]

    def mach_of(self, piece: int, x: float, w: float, pressure: float) -> float:
        """Mach number of a stream of u^2 = w at a pressure in a piece: a^2 = R T/(1 - d(RT)/dh - d ln(RT)/d ln p)."""
        inside = 0.5 * (self.pieces[piece].a + self.pieces[piece].b)
        at = np.array(x)
        burnt, h = self.burnt_ratio(at), self.total_enthalpy(at, inside) - 0.5 * w
        thermal, p = self.pieces[piece].thermal, np.array(pressure)
        dh, RT = 1e-3 * h.__abs__() + 100.0, thermal(burnt, h, p)
        by_h = (thermal(burnt, h + dh, p) - thermal(burnt, h - dh, p)) / (2.0 * dh)
        by_p = np.log(thermal(burnt, h, p * 1.01) / thermal(burnt, h, p / 1.01)) / (2.0 * math.log(1.01))
        return float(np.sqrt(w * (1.0 - by_h - by_p) / RT))


def attached(duct: Duct, piece: int, x: float, impulse: float, fast: bool, throat: bool = False) -> tuple[list[Row], float | None]:
    """Rows from x in a piece, where the stream has `impulse` N (the kick of the piece is in it), and where it chokes (None: it does not).

    throat: whether x is one, from which steps grow.
    """
    rows: list[Row] = []
    for k in range(piece, len(duct.pieces)):
        part = duct.pieces[k]
        impulse += part.kick if k > piece else 0.0
        places = part.places if k > piece or x <= part.a else _from(duct, part, x, 1e-3 if throat else 0.02)
        w = rows[-1].w if rows else (1.2 if fast else 0.8) * places[0].sonic()[0]
        for i in range(0, len(places), 2):
            if i > 0:
                impulse = _step(places[i - 2 : i + 1], impulse, fast, w)
            w, thermal, room = places[i].state(impulse, fast, w)
            if room < (-1e-9 if rows else -1e-7):
                before = rows[-1] if rows else Row(k, places[i], w, thermal, impulse, 0.0)
                return rows, before.place.x + (places[i].x - before.place.x) * before.room / (before.room - room)
            rows.append(Row(k, places[i], w, thermal, impulse, room))
    return rows, None


def _from(duct: Duct, part: Piece, x: float, first: float) -> tuple[Place, ...]:
    """Places of the rest of a piece; `first` is the first step over the piece, which grows until it meets the steps of the piece."""
    ends, step, last = [x], first * (part.b - part.a), part.b - part.a
    nodes = [place for place in part.places[::2] if place.x > x + 1e-12 * duct.end]
    while nodes and step < nodes[0].x - ends[-1]:
        ends.append(ends[-1] + step)
        last, step = step, 1.5 * step
        nodes = [place for place in nodes if place.x > ends[-1] + 0.3 * last] or nodes[-1:]
    ends.append(nodes[0].x if nodes else part.b)
    found = np.array(ends)
    new = duct.places(np.sort(np.concatenate([found, 0.5 * (found[1:] + found[:-1])])), 0.5 * (part.a + part.b))
    return new[:-1] + tuple(place for place in part.places if place.x >= ends[-1] - 1e-12 * duct.end)


def _step(places: tuple[Place, ...], F: float, fast: bool, w: float) -> float:
    first, middle, last = places
    h = last.x - first.x
    w, thermal, _ = first.state(F, fast, w)
    k1 = first.force(w, thermal)
    w, thermal, _ = middle.state(F + 0.5 * h * k1, fast, w)
    k2 = middle.force(w, thermal)
    w, thermal, _ = middle.state(F + 0.5 * h * k2, fast, w)
    k3 = middle.force(w, thermal)
    w, thermal, _ = last.state(F + h * k3, fast, w)
    k4 = last.force(w, thermal)
    return F + h / 6.0 * (k1 + 2.0 * k2 + 2.0 * k3 + k4)


@dataclass(frozen=True)
class Core:
    """The separated core at one pressure: along all places of all pieces, momentum N and Ac/A, one array a piece."""

    pressure: float
    momentum: tuple[np.ndarray, ...]
    fill: tuple[np.ndarray, ...]


def cores(duct: Duct, pressures: Sequence[float]) -> list[Core]:
    """The cores at some pressures, in one go; the drag depends on the momentum and is found by going over it."""
    p = np.array(pressures)[:, None]
    now = duct.impulse - p * duct.entry_area
    momentum, fill = [], []
    for part in duct.pieces:
        x, A, burnt, total = part.known
        m, values = part.places[0].mass_flow, now + part.kick + 0.0 * x
        for _ in range(20):
            u = np.maximum(values, 1e-3 * duct.impulse) / m
            RT = part.thermal(burnt, total - 0.5 * u * u, p)
            if not duct.friction:
                break
            drag = p / RT * u * u * duct.friction * np.sqrt(np.pi * A)
            values, before = now + part.kick - _integral(x, drag), values
            if np.all(np.abs(values - before) < 1e-12 * duct.impulse):
                break
        momentum.append(values)
        fill.append(m * RT / (p * u * A))
        now = values[:, -1:]
    return [Core(float(p[i, 0]), tuple(each[i] for each in momentum), tuple(each[i] for each in fill)) for i in range(p.size)]


def core(duct: Duct, pressure: float) -> Core:
    return cores(duct, [pressure])[0]


def _integral(x: np.ndarray, y: np.ndarray) -> np.ndarray:
    """Of y along its last axis from x[0] on, by the parabola through the three places of each step."""
    h = x[2::2] - x[:-2:2]
    a, b, c = y[..., :-2:2], y[..., 1::2], y[..., 2::2]
    found = np.zeros_like(y)
    found[..., 2::2] = np.cumsum(h / 6.0 * (a + 4.0 * b + c), -1)
    found[..., 1::2] = found[..., :-2:2] + h / 24.0 * (5.0 * a + 8.0 * b - c)
    return found
