"""First guesses for the equilibrium iteration: complete combustion, and everything else in equilibrium with it.

From these 4-6 Newton iterations suffice over 200-6000 K, 100 Pa-100 bar and equivalence ratios 0-3.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.constants import GAS_CONSTANT, REFERENCE_PRESSURE
from cycle.gas.elimination import product
from cycle.gas.kernel import Kernel
from cycle.gas.species import SpeciesTable, temperature_functions

LN_NODES = np.linspace(np.log(150.0), np.log(6000.0), 49)
"""ln T of the nodes between which first temperatures are interpolated."""

LN_WARMEST = float(np.log(5000.0))
"""ln of the highest first temperature."""

ABSENT = -1000.0
"""z of a basis species whose element is not there: e^z is exactly zero."""

MINOR_CAP = 0.1
"""Largest mole fraction guessed for a species that complete combustion does not give."""

FLOOR = 1e-4
"""Smallest mole fraction guessed for a product whose element is there."""

USUAL_LN_PRESSURE = 2.0
"""ln(p / 1 bar) where a first temperature has to be guessed without one."""

REDUCED = (("H2O", "H2"), ("CO2", "CO"))
"""Product and what an oxygen shortage leaves of it."""


FIT_SHARE, FIT_ONSET, FIT_WIDTH = (0.69, -0.041), (2618.0, 68.0), 294.0
"""Of `dissociated`: the share of the heat taken up far above the onset, the onset, K, its width, K; by ln(p / 1 bar)."""


def dissociated(temperature: Array, ln_p: Array | float) -> tuple[Array, Array]:
    """T K of a gas that dissociates from that of the same gas that does not, at ln(p / 1 bar), and its slope by it.

    Fitted to the equilibrium products of hydrogen and of ethylene with air, 10 kPa-3 MPa, 800-3700 K: within 1 % (rms).
    """
    share, width = FIT_SHARE[0] + FIT_SHARE[1] * ln_p, FIT_WIDTH
    beyond = np.exp((temperature - FIT_ONSET[0] - FIT_ONSET[1] * ln_p) / width)
    # not at all below about 1500 K, where the frozen value is as good as exact
    taken = np.maximum(np.log1p(beyond) - 0.02, 0.0)
    return temperature - share * width * taken, np.where(taken > 0.0, 1.0 - share * beyond / (1.0 + beyond), 1.0)


@dataclass(frozen=True, eq=False)
class Layout:
    """What complete combustion leaves of a table: reduced, (product, what an oxygen shortage leaves of it); oxygen, the row
    of O2 if it is in the basis; rows: the basis, then what a shortage leaves, then the inert species; of these h/R, K,
    and s/R at 1 bar at the nodes, (nodes, rows)."""

    reduced: tuple[tuple[int, int], ...]
    oxygen: int | None
    rows: Codes
    h: Array
    s: Array


@lru_cache(maxsize=256)
def layout_of(table: SpeciesTable) -> Layout:
    """The layout of a table, built once."""
    found = [(table.index[a], table.index[b]) for a, b in REDUCED if a in table.names and b in table.names]
    reduced = tuple((a, b) for a, b in found if a < table.basis <= b)
    rows = np.array([*range(table.basis), *(b for _, b in reduced), *range(table.reacting, len(table.names))])
    T = np.exp(LN_NODES)
    h, s = (np.ascontiguousarray((r[rows] @ temperature_functions(T) * by).T) for r, by in ((table.h, T), (table.s, 1.0)))
    return Layout(reduced, table.index["O2"] if "O2" in table.names[: table.basis] else None, rows, h, s)


class Guess:
    """Complete combustion of N points: amounts (rows, N) mol/kg of the species of `layout.rows`."""

    def __init__(self, kernel: Kernel, basis: Array, inert: Array) -> None:
        self.kernel, self.basis, self.inert, self.layout = kernel, basis, inert, layout_of(kernel.table)
        self.reduced, self.oxygen = self.layout.reduced, self.layout.oxygen
        self.amounts = np.concatenate([*self._majors(), inert])
        self.total = self.amounts.sum(0)

    def _majors(self) -> list[Array]:
        majors = self.basis.copy()
        if self.oxygen is None:
            return [majors]
        if majors[self.oxygen].min(initial=0.0) == 0.0:
            return [majors, np.zeros((len(self.reduced), majors.shape[1]))]
        short = 2.0 * np.maximum(-majors[self.oxygen], 0.0)
        reducible = sum((majors[a] for a, _ in self.reduced), np.full(short.shape, 1e-300))
        share = np.minimum(short / reducible, 1.0)
        left = [majors[a] * share for a, _ in self.reduced]
        for (a, _), amount in zip(self.reduced, left, strict=True):
            majors[a] -= amount
        majors[self.oxygen] = np.maximum(majors[self.oxygen], 0.0)
        return [majors, *(amount[None] for amount in left)]

    def entropy_of_mixing(self) -> Array:
        """-sum n ln x, mol/kg, (N,)."""
        mixing: Array = -(self.amounts * np.log(np.maximum(self.amounts / self.total, 1e-300))).sum(0)
        return mixing

    def temperature(self, at_nodes: Array, wanted: Array) -> tuple[Array, Array]:
        """T at which the frozen mixture has sum n y(T) = wanted (N,), and the slope of that sum by ln T.

        y of each species at the nodes (nodes, rows), rising with T: a parabola through three nodes."""
        at = product(at_nodes, self.amounts)
        column = np.arange(wanted.size)
        middle = within((at < wanted).sum(0), 1, LN_NODES.size - 2)
        a, b, c = (at[middle + i, column] for i in (-1, 0, 1))
        first, second = 1.0 / (b - a), 1.0 / (c - b)
        steps = (wanted - a) * (first + (wanted - b) * (second - first) / (c - a))
        T = np.exp(within(LN_NODES[middle - 1] + steps * (LN_NODES[1] - LN_NODES[0]), LN_NODES[0], LN_WARMEST))
        return T, (c - a) / (2.0 * (LN_NODES[1] - LN_NODES[0]))

    def ln_pressure(self, temperature: Array, entropy: Array) -> Array:
        """ln(p / 1 bar) of the frozen mixture at T K and s J/(kg K)."""
        s0 = ((self.kernel.table.s[self.layout.rows].T @ self.amounts) * temperature_functions(temperature)).sum(0)
        ln_p: Array = (s0 + self.entropy_of_mixing() - entropy / GAS_CONSTANT) / self.total
        return ln_p

    def composition(self, temperature: Array, ln_p: Array) -> tuple[Array, Array, Array]:
        """z (K, N), m (N,) and ln n (reacting, N) at T K and ln(p / 1 bar)."""
        kernel = self.kernel
        k, q = kernel.basis, len(self.reduced)
        g = kernel.formation_energy(temperature)
        ln_total = np.log(self.total)
        ln_x = np.log(np.maximum(self.amounts[: k + q], 1e-30)) - ln_total
        z = ln_x[:k].copy()
        for a, _ in self.reduced:
            z[a] = np.maximum(z[a], np.log(FLOOR))
        if self.oxygen is not None and self.reduced:
            z[self.oxygen] = self._oxygen(z, ln_x, g, ln_p)
        z += ln_p
        z[absent(self.kernel, self.basis)] = ABSENT
        m = ln_total - ln_p
        ln_n = product(kernel.nu, z) + m
        ln_n[k:] -= g
        np.minimum(ln_n, ln_total + np.log(MINOR_CAP), out=ln_n)
        major = self.layout.rows[: k + q]
        ln_n[major] = np.where(ln_x > np.log(MINOR_CAP), ln_x + ln_total, ln_n[major])
        return z, m, ln_n

    def _oxygen(self, z: Array, ln_x: Array, g: Array, ln_p: Array) -> Array:
        """ln of the mole fraction of O2: the excess, or what dissociation frees if that is more, or, where oxygen is
        short, the equilibrium of H2O with H2 (of CO2 with CO where there is no hydrogen)."""
        k, oxygen = self.kernel.basis, self.oxygen
        free = ln_x[oxygen]
        reducing, partner, some = np.full_like(free, -700.0), np.zeros_like(free), np.zeros(free.shape, bool)
        for i, (a, b) in reversed(list(enumerate(self.reduced))):
            there = self.basis[a] > 0.0
            reducing = np.where(there, z[a] - g[b - k] - 0.5 * ln_p, reducing)
            partner = np.where(there, ln_x[k + i], partner)
            some |= there
        dissociated = np.where(some, np.minimum((reducing - np.log(2.0)) / 1.5, np.log(0.05)), -700.0)
        rich = 2.0 * (reducing - partner)
        return np.where(self.basis[oxygen] < 0.0, np.minimum(rich, dissociated), np.maximum(free, dissociated))


def within(value: Array, low: float, high: float) -> Array:
    """`value` between the two; numpy's clip takes several times as long for few points."""
    return np.minimum(np.maximum(value, low), high)


def absent(kernel: Kernel, basis: Array) -> Flags:
    """(K, N) true where a basis species' own element is not there; never O2, whose amount is a signed balance."""
    gone: Flags = basis <= 0.0
    oxygen = layout_of(kernel.table).oxygen
    if oxygen is not None:
        gone[oxygen] = False
    return gone


def _from_enthalpy(guess: Guess, named: dict[str, Array]) -> Array:
    T, _ = guess.temperature(guess.layout.h, named["enthalpy"] / GAS_CONSTANT)
    return dissociated(T, _ln_pressure(named))[0]


def _ln_pressure(named: dict[str, Array]) -> Array | float:
    return np.log(named["pressure"] / REFERENCE_PRESSURE) if "pressure" in named else USUAL_LN_PRESSURE


def _from_entropy(guess: Guess, named: dict[str, Array]) -> Array:
    wanted = named["entropy"] / GAS_CONSTANT - guess.entropy_of_mixing()
    ln_p = _ln_pressure(named)
    T, _ = guess.temperature(guess.layout.s, wanted + guess.total * ln_p)
    return dissociated(T, ln_p)[0]


def _from_volume(guess: Guess, named: dict[str, Array]) -> Array:
    return within(named["volume"] * named["pressure"] / (GAS_CONSTANT * guess.total), 300.0, 5000.0)


def _from_passage(guess: Guess, named: dict[str, Array]) -> Array:
    """h + (G v)^2/2 = ht at the specific heat of rest: a quadratic in T."""
    rest, slope = guess.temperature(guess.layout.h, named["total enthalpy"] / GAS_CONSTANT)
    cp = GAS_CONSTANT * slope / rest
    twice = (GAS_CONSTANT * guess.total * named["mass flux"] / named["pressure"]) ** 2
    # without a flux the root is 0/0 in its usual form
    T = 2.0 * cp * rest / (cp + np.sqrt(cp**2 + 2.0 * twice * cp * rest))
    return dissociated(T, _ln_pressure(named))[0]


def _given(guess: Guess, named: dict[str, Array]) -> Array:
    return named["temperature"]


TEMPERATURES: dict[str, Callable[[Guess, dict[str, Array]], Array]] = {
    "tp": _given,
    "ts": _given,
    "hp": _from_enthalpy,
    "hv": _from_enthalpy,
    "hs": _from_enthalpy,
    "sp": _from_entropy,
    "vp": _from_volume,
    "passage": _from_passage,
}
"""First temperature of each closure that can be started from nothing."""


def first_temperature_pressure(kind: str, guess: Guess, named: dict[str, Array]) -> tuple[Array, Array]:
    """T K and ln(p / 1 bar), each (N,), from the targets by name. ValueError for a closure that needs a start."""
    if kind not in TEMPERATURES:
        raise ValueError(f"the closure {kind} has two branches: it needs a state to start from")
    T = TEMPERATURES[kind](guess, named)
    if "pressure" in named:
        return T, np.log(named["pressure"] / REFERENCE_PRESSURE)
    if "volume" in named:
        return T, np.log(guess.total * GAS_CONSTANT * T / (named["volume"] * REFERENCE_PRESSURE))
    return T, np.clip(guess.ln_pressure(T, named["entropy"]), -15.0, 15.0)


ROUNDS = 2
"""Rounds of `on_rayleigh_line`: a third saves no Newton steps."""


def on_rayleigh_line(guess: Guess, impulse: Array, flux: Array, total_enthalpy: Array, supersonic: Flags) -> tuple[Array, Array, Array]:
    """T K, v m3/kg and distance from Mach 1 of the guessed mixture where p + G^2 v = F and h + G^2 v^2/2 = ht.

    Inputs and results (N,). In rounds: with R and cp held v solves a quadratic (Shapiro, 1953, ch. 7), whose discriminant
    over F^2, ((M^2 - 1) / (1 + gamma M^2))^2, is the distance returned; negative where the line does not reach ht.
    """
    side, square = np.where(supersonic, 1.0, -1.0), flux**2
    volume = np.where(supersonic, 0.8, 0.25) * impulse / square
    for _ in range(ROUNDS):
        enthalpy = total_enthalpy - 0.5 * square * volume**2
        frozen, slope = guess.temperature(guess.layout.h, enthalpy / GAS_CONSTANT)
        T, share = dissociated(frozen, np.log(np.maximum(impulse - square * volume, 1.0) / REFERENCE_PRESSURE))
        by_cp = guess.total * frozen / slope * share
        curvature = square * (1.0 - 0.5 * by_cp)
        zeroth = GAS_CONSTANT * guess.total * T + by_cp * 0.5 * square * volume**2
        distance = 1.0 - 4.0 * curvature * zeroth / impulse**2
        volume = 0.5 * impulse * (1.0 + side * np.sqrt(np.maximum(distance, 0.0))) / curvature
    return (impulse - square * volume) * volume / (GAS_CONSTANT * guess.total), volume, distance
