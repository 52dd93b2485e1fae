"""Frozen composition: a thermally perfect mixture of ideal gases with polynomial heat capacities."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property
from typing import TYPE_CHECKING, Self

import numpy as np

from cycle.arrays import Array, ArrayLike, Codes, Flags
from cycle.constants import GAS_CONSTANT
from cycle.gas.base import FixedGas, Gas
from cycle.gas.elimination import product
from cycle.gas.species import SpeciesTable, range_of, temperature_functions

if TYPE_CHECKING:
    from cycle.gas.equilibrium import EquilibriumGas
    from cycle.gas.fuels import Fuel


class FrozenGas(FixedGas):
    """A mixture whose composition does not change.

    table: the species; composition: (S, N) mol/kg in the table's order, moles per kg of mixture. h and s are those of
    an ideal mixture (NASA TM-4513 polynomials); its mixing entropy is part of s.
    """

    def __init__(self, table: SpeciesTable, composition: Array) -> None:
        self.table = table
        self.composition = composition
        self.species = table.names
        total = composition.sum(0)
        self.gas_constant = GAS_CONSTANT * total

    @cached_property
    def _present(self) -> tuple[Array, Array]:
        """Of the species that some point holds: factors of `temperature_functions` for h / T, then s, then cp, J/(mol K),
        (3 species, 20), and amounts mol/kg (species, N)."""
        rows = np.flatnonzero(self.composition.any(1))
        factors = GAS_CONSTANT * np.concatenate([self.table.h[rows], self.table.s[rows], self.table.cp[rows]])
        return factors, self.composition[rows]

    @cached_property
    def _mixing(self) -> Array:
        """Entropy of mixing, J/(kg K), (N,)."""
        with np.errstate(divide="ignore", invalid="ignore"):
            share = np.where(self.composition > 0.0, np.log(self.composition / self.composition.sum(0)), 0.0)
        mixing: Array = -GAS_CONSTANT * (self.composition * share).sum(0)
        return mixing

    def caloric(self, temperature: Array) -> tuple[Array, Array, Array]:
        """h J/kg, s at 1 bar and this composition J/(kg K), cp J/(kg K) at T (N,)."""
        factors, moles = self._present
        of_species = product(factors, temperature_functions(temperature)).reshape(3, *moles.shape)
        h, s, cp = (of_species * moles).sum(1)
        return h * temperature, s + self._mixing, cp

    def range_of(self, temperature: Array) -> Codes:
        """Range code of each temperature (N,): see `species.range_of`."""
        return range_of(temperature)

    def take(self, index: Codes | Flags) -> Self:
        """The gas of the chosen points."""
        return type(self)(self.table, self.composition[:, index])

    def fuelled(self, fuel: Fuel, ratio: Array, burnt: Array) -> FrozenGas:
        """Complete combustion: `burnt` times what the free oxygen allows becomes CO2, H2O and N2, the rest of the fuel
        stays as inert vapour. ValueError where the table was not made for this fuel."""
        table = self.table
        supplied = ratio / per_mole(table, fuel)
        oxygen = table.index["O2"]
        reacted = burnt * np.minimum(supplied, self.composition[oxygen] / fuel.oxygen_need())
        moles = self.composition.copy()
        moles[: table.basis] += table.fuel_in_basis[:, None] * reacted
        moles[oxygen] = np.maximum(moles[oxygen], 0.0)
        moles[-1] += supplied - reacted
        return FrozenGas(table, moles / (1.0 + ratio))

    def reacting(self) -> EquilibriumGas:
        """The same atoms free to react; inert species stay inert."""
        from cycle.gas.equilibrium import EquilibriumGas

        table = self.table
        basis = product(table.in_basis.T, self.composition[: table.reacting])
        return EquilibriumGas(table, basis, self.composition[table.reacting :])

    def complete(self) -> FrozenGas:
        """The products of complete combustion of the same atoms: see `complete_products`."""
        return self.reacting().complete()


def per_mole(table: SpeciesTable, fuel: Fuel) -> float:
    """Molar mass of the fuel, kg/mol; ValueError where the table was not made for this fuel."""
    if table.fuel != fuel:
        raise ValueError(f"the species table was made without the fuel {fuel.name}")
    return fuel.molar_mass


def complete_products(table: SpeciesTable, basis: Array, inert: Array) -> FrozenGas:
    """CO2, H2O, N2 and O2 with the atoms of (basis (K, N), inert (I, N)), mol/kg; an oxygen shortage leaves fuel.

    The dead state of a stream: what it is after everything has burnt that can. Where oxygen is short and the table has
    no fuel, there are no such products: NaN.
    """
    moles = np.zeros((len(table.names), basis.shape[1]))
    moles[: table.basis] = basis
    moles[table.reacting :] = inert
    oxygen = table.index["O2"]
    short = np.maximum(-moles[oxygen], 0.0)
    if table.fuel is None:
        moles[:, short > 1e-9] = np.nan
        return FrozenGas(table, moles)
    excess = short / table.fuel.oxygen_need()
    moles[: table.basis] -= table.fuel_in_basis[:, None] * excess
    moles[-1] += excess
    return FrozenGas(table, np.maximum(moles, 0.0))


def air_gas(table: SpeciesTable, mole_fractions: Mapping[str, ArrayLike], model: str, n: int) -> Gas:
    """Air of N points as a gas of the model "frozen" or "equilibrium".

    mole_fractions: by species name, each scalar or (N,), scaled to a sum of 1. KeyError for an unknown model or species.
    """
    air = FrozenGas(table, table.moles(mole_fractions, n))
    return {"frozen": lambda: air, "equilibrium": air.reacting}[model]()
