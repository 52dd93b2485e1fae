"""First guesses for the equilibrium iteration: complete combustion, and everything else in equilibrium with it.

From these 4-6 Newton iterations suffice over 200-6000 K, 100 Pa-100 bar and equivalence ratios 0-3.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from cycle.arrays import Array, Flags
from cycle.constants import GAS_CONSTANT, REFERENCE_PRESSURE
from cycle.gas.elimination import dot, product
from cycle.gas.kernel import Kernel
from cycle.gas.species import temperature_functions

ABSENT = -1000.0
"""z of a basis species whose element is not there: e^z is exactly zero."""

MINOR_CAP = 0.1
"""Largest mole fraction guessed for a species that complete combustion does not give."""

FLOOR = 1e-4
"""Smallest mole fraction guessed for a product whose element is there."""

REDUCED = (("H2O", "H2"), ("CO2", "CO"))
"""Product and what an oxygen shortage leaves of it."""


class Guess:
    """Complete combustion of N points: amounts (rows, N) mol/kg of the species `rows`, basis first, then those an
    oxygen shortage leaves, then the inert ones."""

    def __init__(self, kernel: Kernel, basis: Array, inert: Array) -> None:
        table = kernel.table
        self.kernel, self.basis, self.inert = kernel, basis, inert
        found = [(table.index[a], table.index[b]) for a, b in REDUCED if a in table.names and b in table.names]
        self.reduced = [(a, b) for a, b in found if a < table.basis <= b]
        self.oxygen = table.index["O2"] if "O2" in table.names[: table.basis] else None
        self.rows = [*range(table.basis), *(b for _, b in self.reduced), *range(table.reacting, len(table.names))]
        self.amounts = np.concatenate([*self._majors(), inert])
        self.total = self.amounts.sum(0)

    def _majors(self) -> list[Array]:
        majors = self.basis.copy()
        if self.oxygen is None:
            return [majors]
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

    def temperature(self, rows: Array, wanted: Callable[[Array], Array]) -> Array:
        """T at which the frozen mixture has sum n y(T) = wanted(T), y given by `rows` (S, 20); damped above 2500 K
        because dissociation takes up the heat."""
        table = self.kernel.table
        slope, value = table.cp[self.rows].T @ self.amounts, rows[self.rows].T @ self.amounts
        T = np.full(self.total.shape, 1500.0)
        for _ in range(4):
            f = temperature_functions(T)
            step = (wanted(T) - dot(value, f)) / dot(slope, f)
            T = np.clip(T * np.exp(np.clip(step, -0.7, 0.7)), 150.0, 5000.0)
        return np.where(T > 2500.0, 1250.0 + 0.5 * T, T)

    def ln_pressure(self, temperature: Array, entropy: Array) -> Array:
        """ln(p / 1 bar) of the frozen mixture at T K and s J/(kg K)."""
        s0 = ((self.kernel.table.s[self.rows].T @ self.amounts) * temperature_functions(temperature)).sum(0)
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
        major = self.rows[: k + q]
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


def absent(kernel: Kernel, basis: Array) -> Flags:
    """(K, N) true where a basis species' own element is not there; never O2, whose amount is a signed balance."""
    gone: Flags = basis <= 0.0
    if "O2" in kernel.table.names[: kernel.basis]:
        gone[kernel.table.index["O2"]] = False
    return gone


def _from_enthalpy(guess: Guess, named: dict[str, Array]) -> Array:
    return guess.temperature(guess.kernel.table.h, lambda T: named["enthalpy"] / (GAS_CONSTANT * T))


def _from_entropy(guess: Guess, named: dict[str, Array]) -> Array:
    wanted = named["entropy"] / GAS_CONSTANT - guess.entropy_of_mixing()
    wanted = wanted + guess.total * np.log(named["pressure"] / REFERENCE_PRESSURE)
    return guess.temperature(guess.kernel.table.s, lambda T: wanted)


def _from_volume(guess: Guess, named: dict[str, Array]) -> Array:
    T: Array = np.clip(named["volume"] * named["pressure"] / (GAS_CONSTANT * guess.total), 300.0, 5000.0)
    return T


def _given(guess: Guess, named: dict[str, Array]) -> Array:
    return named["temperature"]


TEMPERATURES: dict[str, Callable[[Guess, dict[str, Array]], Array]] = {
    "tp": _given,
    "ts": _given,
    "hp": _from_enthalpy,
    "hs": _from_enthalpy,
    "sp": _from_entropy,
    "vp": _from_volume,
}
"""First temperature of each closure that can be started from nothing."""


def first_temperature_pressure(kind: str, guess: Guess, named: dict[str, Array]) -> tuple[Array, Array]:
    """T K and ln(p / 1 bar), each (N,), from the targets by name. ValueError for a closure that needs a start."""
    if kind not in TEMPERATURES:
        raise ValueError(f"the closure {kind} has two branches: it needs a state to start from")
    T = TEMPERATURES[kind](guess, named)
    if "pressure" in named:
        return T, np.log(named["pressure"] / REFERENCE_PRESSURE)
    return T, np.clip(guess.ln_pressure(T, named["entropy"]), -15.0, 15.0)
