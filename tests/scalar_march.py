"""A plain march of one duct, to confirm what the program finds of its modes: one point, one place after another, scipy's integrator.

Written from the balances: attached d(pA + mu) = p dA - Cf (rho u^2/2) P dx with energy, a separated core at one pressure with
d(mu) = -Cf (rho u^2/2) P dx, fuel entering with its enthalpy and impulse. Nothing of `cycle` is used.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from functools import lru_cache
from itertools import pairwise

import numpy as np
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from tests.scalar_gas import Burning, Mixture, Perfect

_CHOKED = 1e-7
"""Impulse above the sonic one, over it, at which a march counts as choked."""


@dataclass(frozen=True)
class Injection:
    x: float
    share: float
    speed: float
    theta: float
    length: float

    def burnt(self, x: float) -> float:
        place = min(max((x - self.x) / self.length, 0.0), 1.0)
        return self.theta * place / (1.0 + (self.theta - 1.0) * place)


@dataclass(frozen=True)
class Duct:
    """One duct of circular section: what enters it, its areas (x, A m2), its fuel."""

    gas: Perfect | Burning
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
    pieces: tuple[tuple[float, float], ...] = field(init=False)

    def __post_init__(self) -> None:
        ends = {x for x, _ in self.sections} | {i.x for i in self.injections} | {i.x + i.length for i in self.injections}
        object.__setattr__(self, "pieces", tuple(pairwise(sorted(x for x in ends if 0.0 <= x <= self.end))))

    @property
    def end(self) -> float:
        return self.sections[-1][0]

    @property
    def entry_area(self) -> float:
        return self.sections[0][1]

    @property
    def impulse(self) -> float:
        return self.pressure * self.entry_area + self.mass_flow * self.velocity

    def area(self, x: float) -> tuple[float, float]:
        """A m2 and dA/dx m at x; the slope of the piece that begins there."""
        for (a, A), (b, B) in pairwise(self.sections):
            if x < b or b == self.end:
                slope = (B - A) / (b - a)
                return A + slope * (x - a), slope
        raise ValueError(x)

    @lru_cache(maxsize=1 << 14)  # noqa: B019
    def at(self, x: float, inside: float) -> tuple[Mixture, float, float, float, float]:
        """Mixture, total enthalpy J/kg, mass flow kg/s, area m2 and drag over rho u^2, m, at x; `inside` is a place of the same piece,
        which says what is injected."""
        entered = [i for i in self.injections if i.x < inside]
        ratio = self.ratio * sum(i.share for i in entered)
        share = sum(i.share * i.burnt(x) for i in entered)
        burnt = self.burnt * share * self.ratio / ratio if ratio else 0.0
        start = self.gas.mixed(0.0, 0.0).enthalpy(self.temperature) + 0.5 * self.velocity**2
        brought = self.gas.fuel_enthalpy(self.fuel_temperature) + self.gas.released(burnt)
        area, slope = self.area(inside)
        area += slope * (x - inside)
        drag = self.friction * math.sqrt(math.pi * area)
        return self.gas.mixed(ratio, burnt), (start + ratio * brought) / (1.0 + ratio), self.mass_flow * (1.0 + ratio), area, drag

    def kick(self, x: float) -> float:
        """Impulse of the fuel injected at x, N."""
        return sum(self.mass_flow * self.ratio * i.share * i.speed for i in self.injections if i.x == x)

    def after(self, x: float) -> Iterator[tuple[float, float]]:
        """Pieces from x on."""
        return ((max(a, x), b) for a, b in self.pieces if b > x)


@dataclass(frozen=True)
class March:
    """Rows x, p, u, m u, M^2 of an attached march, and where it chokes (None: it does not)."""

    rows: np.ndarray
    choked: float | None


def attached(duct: Duct, x: float, impulse: float, fast: bool, steps: int = 8) -> March:
    """March downstream from x, where the stream has `impulse` N; fuel injected at x itself is yet to come where x is 0. steps: of each
    piece of the duct, at least."""
    F, rows = impulse, []
    for a, b in duct.after(x):
        middle = 0.5 * (a + b)
        F += duct.kick(a) if a > x or a == 0.0 else 0.0

        def state(x: float, F: float, middle: float = middle) -> tuple[float, float, float, float, float]:
            mixture, total, m, area, drag = duct.at(x, middle)
            T, u = mixture.at_impulse(total, F / m, fast)
            return m / (u * area) * mixture.R * T, u, m, m * u / area * drag, mixture.mach2(T, u)

        def rate(x: float, y: np.ndarray, middle: float = middle, slope: float = duct.area(middle)[1]) -> list[float]:
            p, _, _, drag, _ = state(x, y[0], middle)
            return [p * slope - drag]

        def room(x: float, y: np.ndarray, middle: float = middle) -> float:
            mixture, total, m, _, _ = duct.at(x, middle)
            return y[0] / (m * mixture.impulse(total, mixture.sonic(total))) - 1.0 - _CHOKED

        if room(a, np.array([F])) <= 0.0:
            return March(np.array(rows), a)
        room.terminal = True  # type: ignore[attr-defined]
        found = solve_ivp(rate, (a, b), [F], method="RK45", rtol=1e-7, atol=1e-9 * F, events=room, max_step=(b - a) / steps)
        for place, value in zip(found.t, found.y[0], strict=True):
            p, u, m, _, mach2 = state(place, value)
            rows.append((place, p, u, m * u, mach2))
        if found.status == 1:
            return March(np.array(rows), float(found.t[-1]))
        F = float(found.y[0, -1])
    return March(np.array(rows), None)


def core(duct: Duct, pressure: float, steps: int = 24) -> np.ndarray:
    """Rows x, Ac/A, M^2, momentum N of the separated core at one pressure; NaN from where it has no momentum or enthalpy left. steps: of
    each piece of the duct, a multiple of four."""
    momentum, rows = duct.impulse - pressure * duct.entry_area, []
    for a, b in duct.pieces:
        middle = 0.5 * (a + b)
        momentum += duct.kick(a)

        def state(x: float, momentum: float, middle: float = middle) -> tuple[float, float, float]:
            mixture, total, m, area, drag = duct.at(x, middle)
            u = momentum / m
            T = mixture.temperature(total - 0.5 * u * u)
            rho = pressure / (mixture.R * T)
            return m / (rho * u * area), mixture.mach2(T, u), -rho * u * u * drag

        x = np.linspace(a, b, steps + 1).tolist()
        values = _momenta(lambda place, value, state=state: state(place, value)[2], x, momentum) if duct.friction else [momentum] * len(x)
        rows += [(place, *state(place, value)[:2], value) for place, value in zip(x, values, strict=True)]
        momentum = values[-1]
    return np.array(rows)


def _momenta(rate: Callable[[float, float], float], x: list[float], y: float) -> list[float]:
    """y at evenly spaced places, by the classical Runge-Kutta step over four intervals each and its cubic in between."""
    found = [y]
    for k in range(0, len(x) - 1, 4):
        h = x[k + 4] - x[k]
        first = rate(x[k], y)
        second = rate(x[k + 2], y + 0.5 * h * first)
        third = rate(x[k + 2], y + 0.5 * h * second)
        last = rate(x[k + 4], y + h * third)
        for t in (0.25, 0.5, 0.75, 1.0):
            middle, end = t**2 - 2.0 / 3.0 * t**3, -0.5 * t**2 + 2.0 / 3.0 * t**3
            found.append(y + h * ((t - 1.5 * t**2 + 2.0 / 3.0 * t**3) * first + middle * (second + third) + end * last))
        y = found[-1]
    return found


def normal_shock(duct: Duct) -> float:
    """Pressure behind a normal shock at station 2, Pa."""
    mixture = duct.gas.mixed(0.0, 0.0)
    total = mixture.enthalpy(duct.temperature) + 0.5 * duct.velocity**2
    T, u = mixture.at_impulse(total, duct.impulse / duct.mass_flow, fast=False)
    return duct.mass_flow / (u * duct.entry_area) * mixture.R * T


def korkegi(mach: float) -> float:
    return 1.0 + 0.3 * mach**2 if mach <= 4.5 else 0.17 * mach**2.5


def attached_verdict(duct: Duct) -> str:
    if attached(duct, 0.0, duct.impulse, fast=True).choked is not None:
        return "chokes"
    run = attached(duct, 0.0, duct.impulse, fast=True, steps=100)
    if run.choked is not None:
        return "chokes"
    return "separates" if run.rows[:, 1].max() > korkegi(duct.mach) * duct.pressure else "stands"


FINE = 192
"""Steps of each piece of the duct with which the place is found where a core fills it."""


def train_verdict(duct: Duct, tried: int = 40) -> str:
    """The smallest pressure above p2 at which the core just fills the duct, and what becomes of the stream there."""
    low, high = duct.pressure * (1.0 + 1e-5), normal_shock(duct) * (1.0 - 1e-6)

    def fullest(pressure: float, steps: int = 24) -> float:
        rows = core(duct, pressure, steps)
        return float(rows[rows[:, 0] > 0.0, 1].max()) - 1.0

    pressures = np.geomspace(low, high, tried)
    before = fullest(pressures[0])
    for a, b in pairwise(pressures):
        after = fullest(b)
        if before * after <= 0.0:
            # a core near Mach 1 wants its place finer than the search
            p = float(brentq(fullest, 0.99 * a, 1.01 * b, (FINE,), xtol=1e-9 * a))
            rows = core(duct, p, FINE)
            x, _, mach2, momentum = rows[int(np.argmax(np.where(rows[:, 0] > 0.0, rows[:, 1], 0.0)))]
            if mach2 <= 1.0:
                return "subsonic"
            if x == duct.end:
                return "stands"
            return "chokes" if attached(duct, x, momentum + p * duct.area(x)[0], fast=True).choked is not None else "stands"
        before = after
    return "no pressure"


def throat_verdict(duct: Duct) -> str:
    """Whether the impulse that arrives lets a subsonic stream through, and a core joins the critical one.

    A subsonic stream that starts with all of the impulse, behind a normal shock at the burner entry, is the weakest one there is: where
    it chokes, no subsonic stream passes.
    """
    if attached(duct, 0.0, duct.impulse, fast=False).choked is not None:
        return "unstarted"
    mixture = duct.gas.mixed(0.0, 0.0)
    total = mixture.enthalpy(duct.temperature) + 0.5 * duct.velocity**2
    low, high = duct.mass_flow * mixture.impulse(total, mixture.sonic(total)), duct.impulse
    for _ in range(30):
        half = 0.5 * (low + high)
        low, high = (half, high) if attached(duct, 0.0, half, fast=False).choked is not None else (low, half)
    critical = attached(duct, 0.0, low, fast=False)
    if critical.choked is None or len(critical.rows) == 0:
        return "no throat"
    if _behind_throat(duct, high * (1.0 + 1e-6)) == "chokes":
        return "chokes behind the throat"
    rows = critical.rows
    lacking = [_core_momentum(duct, p, x) - momentum for x, p, _, momentum, _ in rows]
    return "stands" if min(lacking) <= 0.0 <= max(lacking) else "no core"


def _behind_throat(duct: Duct, impulse: float) -> str:
    """What the supersonic branch does behind a throat that the subsonic one, of this impulse at the entry, just passes.

    It starts at Mach 1 a little behind the place where the subsonic one comes nearest to it: from there it makes for the branch of the
    throat itself, whatever the slope of that.
    """
    rows = attached(duct, 0.0, impulse, fast=False, steps=100).rows
    x = float(rows[np.argmax(rows[:, 4]), 0]) + 0.01 * duct.end
    if x >= duct.end:
        return "passes"
    mixture, total, m, _, _ = duct.at(x, x)
    sonic = m * mixture.impulse(total, mixture.sonic(total))
    return "chokes" if attached(duct, x, sonic * (1.0 + 10.0 * _CHOKED), fast=True, steps=40).choked is not None else "passes"


def _core_momentum(duct: Duct, pressure: float, x: float) -> float:
    """Momentum at x of the core at a pressure, N."""
    rows = core(duct, pressure) if duct.friction else None
    if rows is None:
        return (
            duct.impulse - pressure * duct.entry_area + sum(duct.kick(i.x) for i in {i.x: i for i in duct.injections}.values() if i.x < x)
        )
    return float(np.interp(x, rows[:, 0], rows[:, 3]))


def mode(duct: Duct) -> str:
    """The mode in which a duct runs, "none" where no one stands."""
    for name, verdict in (
        ("scramjet", attached_verdict),
        ("scramjet-shock-train", train_verdict),
        ("ramjet-thermal-throat", throat_verdict),
    ):
        if verdict(duct) == "stands":
            return name
    return "none"
