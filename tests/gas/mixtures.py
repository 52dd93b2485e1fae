"""Gases that the tests of this folder share: standard air with a built-in fuel."""

from __future__ import annotations

import numpy as np

from cycle.arrays import Array
from cycle.constants import STANDARD_AIR
from cycle.gas.equilibrium import EquilibriumGas
from cycle.gas.frozen import FrozenGas, air_gas
from cycle.gas.fuels import FUELS
from cycle.gas.species import species_table
from cycle.gas.state import State


def reacting(fuel: str, phi: Array, burnt: Array | None = None) -> EquilibriumGas:
    """Standard air with a fuel at equivalence ratio phi (N,), all or part of it free to react."""
    chosen = FUELS[fuel]
    table = species_table(tuple(STANDARD_AIR), chosen)
    air = air_gas(table, STANDARD_AIR, "equilibrium", phi.size)
    gas = air.fuelled(chosen, phi * chosen.stoichiometric_ratio(STANDARD_AIR), np.ones(phi.size) if burnt is None else burnt)
    assert isinstance(gas, EquilibriumGas)
    return gas


def frozen_air(n: int, fuel: str = "hydrogen") -> FrozenGas:
    """Standard air of N points that this fuel may be added to."""
    gas = air_gas(species_table(tuple(STANDARD_AIR), FUELS[fuel]), STANDARD_AIR, "frozen", n)
    assert isinstance(gas, FrozenGas)
    return gas


def broad(fuel: str, n: int, seed: int) -> tuple[EquilibriumGas, Array, Array]:
    """Gas, T and p over 200-6000 K, 100 Pa-100 bar, equivalence ratio 0-3, some of them exactly 0 and 1, and with
    unburnt fuel; a third of the points below 700 K, where equilibrium is stiff."""
    rng = np.random.default_rng(seed)
    phi = rng.uniform(0.0, 3.0, n)
    phi[: n // 20], phi[n // 20 : n // 10] = 0.0, 1.0
    T = np.where(rng.random(n) < 0.33, rng.uniform(200.0, 700.0, n), rng.uniform(200.0, 6000.0, n))
    return reacting(fuel, phi, rng.uniform(0.5, 1.0, n)), T, 10.0 ** rng.uniform(2.0, 7.0, n)


def duct_targets(state: State, mach: Array) -> tuple[Array, Array, Array]:
    """Impulse F, mass flux G and total enthalpy of a stream in this state at this Mach number."""
    u = mach * state.sound_speed
    G = state.density * u
    return state.pressure + G * u, G, state.enthalpy + 0.5 * u * u
