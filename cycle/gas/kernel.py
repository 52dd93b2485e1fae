"""What the equilibrium of one species table needs, prepared once: reactions from the basis and the reduced system.

Notation of the equilibrium modules. The unknowns of a point are, for the basis species k,

    z_k = ln(partial pressure of k / 1 bar),   m = ln(sum of moles) - ln(p / 1 bar),   ln T,   ln p,

and ln n_j of every reacting species (mol/kg). In equilibrium ln n_j = sum_k nu_jk z_k + m - g_j(T), with nu_jk moles of
basis species k in one mole of j and g_j = dG_j / RT of its formation from the basis. Amounts b_k of the basis species
and the inert amounts are given: sum_j nu_jk n_j = b_k, sum_j n_j + inert = (p / 1 bar) e^m.
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from cycle.arrays import Array
from cycle.gas.elimination import product
from cycle.gas.species import HIGHEST, LOWEST, MIDDLE, RANGE_FUNCTIONS, SpeciesTable, range_functions, temperature_functions


@dataclass(frozen=True, eq=False)
class Thermo:
    """Dimensionless quantities at N temperatures.

    g, h, cp: of forming each non-basis reacting species from the basis, per RT or R, (reacting - K, N);
    base_cp, base_h, base_s: of the basis and then the inert species, (K + inert, N).
    """

    g: Array
    h: Array
    cp: Array
    base_cp: Array
    base_h: Array
    base_s: Array


@dataclass(frozen=True, eq=False)
class Kernel:
    """nu (reacting, K); nu_and_one (reacting, K+1): the factors of z and m in ln n; weights (K+1, reacting): its
    transpose; formed: the weights of the non-basis species; pairs ((K+1)^2, reacting): n_j times these sums gives the
    reduced matrix; rows: factors behind `Thermo`, whose fields are its `parts`; low, high, inside: the same for
    temperatures all in 200-1000 K, 1000-6000 K, 200-6000 K; formation: the rows of g alone."""

    table: SpeciesTable
    nu: Array
    nu_and_one: Array
    pairs: Array
    weights: Array
    formed: Array
    rows: Array
    formation: Array
    parts: tuple[slice, ...]
    low: Array
    high: Array
    inside: Array

    @property
    def basis(self) -> int:
        """Number K of basis species."""
        return self.table.basis

    def thermo(self, temperature: Array, functions: Array | None = None, out: Array | None = None) -> Thermo:
        """All of `Thermo` at temperature K (N,); functions (20, N) and out (rows, N) are reused where given."""
        coldest, hottest = temperature.min(initial=HIGHEST), temperature.max(initial=LOWEST)
        one_range = self.high if coldest >= MIDDLE else self.low if hottest < MIDDLE else None
        if not (coldest >= LOWEST and hottest <= HIGHEST):
            rows, f = self.rows, temperature_functions(temperature, functions)
        elif one_range is None:
            rows, f = self.inside, temperature_functions(temperature, functions)[: 2 * RANGE_FUNCTIONS]
        else:
            room = np.empty((RANGE_FUNCTIONS, temperature.size)) if functions is None else functions[:RANGE_FUNCTIONS]
            rows, f = one_range, range_functions(temperature, room)
        p = product(rows, f, out)
        return Thermo(*[p[part] for part in self.parts])

    def formation_energy(self, temperature: Array) -> Array:
        """g of the non-basis species only, (reacting - K, N)."""
        return product(self.formation, temperature_functions(temperature))


@lru_cache(maxsize=64)
def kernel_of(table: SpeciesTable) -> Kernel:
    """The kernel of a table, built once."""
    k, reacting = table.basis, table.reacting
    formation = [(rows[:reacting] - table.in_basis @ rows[:k])[k:] for rows in (table.h, table.s, table.cp)]
    h, s, cp = formation
    base = np.r_[0:k, reacting : len(table.names)]
    rows = np.vstack([h - s, h, cp, table.cp[base], table.h[base], table.s[base]])
    weights = np.vstack([table.in_basis.T, np.ones(reacting)])
    pairs = (weights[:, None] * weights[None, :]).reshape((k + 1) ** 2, reacting)
    ends = np.cumsum([0, *[reacting - k] * 3, *[len(base)] * 3])
    parts = tuple(slice(a, b) for a, b in itertools.pairwise(ends))
    low, high = (rows[:, a : a + RANGE_FUNCTIONS].copy() for a in (0, RANGE_FUNCTIONS))
    inside = rows[:, : 2 * RANGE_FUNCTIONS].copy()
    nu_and_one = np.ascontiguousarray(weights.T)
    return Kernel(table, table.in_basis, nu_and_one, pairs, weights, weights[:, k:].copy(), rows, h - s, parts, low, high, inside)
