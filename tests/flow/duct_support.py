"""Ducts for the tests of the march: a plain way to state one, and random ones."""

from __future__ import annotations

import numpy as np

from cycle.constants import STANDARD_AIR
from cycle.flow import limits
from cycle.flow.duct.layout import AreaLaw, Duct, Injectors, Supply, Walls, duct_of
from cycle.gas.base import Gas
from cycle.gas.constant import ConstantGas
from cycle.gas.frozen import air_gas
from cycle.gas.fuels import FUELS
from cycle.gas.species import species_table

GAMMA, R = 1.4, 287.0
CP = GAMMA * R / (GAMMA - 1.0)
ENTRY_AREA = 0.05


def constant(n: int) -> ConstantGas:
    return ConstantGas(np.full(n, CP), np.full(n, R))


def perfect_duct(
    mach, x, ratio, *, heat=0.0, friction=0.0, theta=3.0, length=None, n=1, temperature=600.0, section="circular", width=None, place=0.0
):
    """Constant gamma; heat: J per kg of stream in full, released along the duct from `place`, without mass."""
    gas = constant(n)
    state = gas.at("tp", np.full(n, temperature), np.full(n, 5e4))
    u = np.broadcast_to(np.asarray(mach, float), (n,)) * state.sound_speed
    area = np.full(n, ENTRY_AREA)
    return duct_of(
        gas, state.enthalpy + 0.5 * u**2, u, state.pressure, state.density * u * area, area,
        AreaLaw(np.asarray(x, float), np.asarray(ratio, float), section, width),
        Injectors([place], [1.0], [0.0], [theta], None if length is None else [length]),
        Supply(None, np.ones(n), 0.0, heat, 1.0, 0.0), Walls(friction),
    )  # fmt: skip


def random_ducts(n: int, model: str, fuel_name: str = "hydrogen", seed: int = 0, staged: bool = True) -> tuple[Duct, np.ndarray]:
    """Ducts with two corners, two injectors (or one) and friction, rich in every mode, and their separation limits."""
    rng = np.random.default_rng(seed)
    draw = rng.uniform
    fuel, heat, enthalpy = None, 120e6, 1100.0 * 300.0
    if model == "constant-gamma":
        gas: Gas = ConstantGas(np.full(n, 1100.0), np.full(n, R))
        ratio = draw(0.0, 0.03, n)
    else:
        fuel, heat = FUELS[fuel_name], 0.0
        gas = air_gas(species_table(tuple(STANDARD_AIR), fuel), STANDARD_AIR, model, n)
        enthalpy = float(fuel.total_enthalpy(300.0))
        ratio = draw(0.0, 1.4, n) * float(fuel.stoichiometric_ratio(STANDARD_AIR))
    mach = draw(1.8, 4.5, n)
    state = gas.at("tp", draw(450.0, 1100.0, n), draw(3e4, 2e5, n))
    u, area = mach * state.sound_speed, draw(0.05, 0.1, n)
    first = draw(1.0, 1.8, n)
    middle = draw(0.2, 0.8, n)
    x = np.vstack([np.zeros(n), draw(0.05, 0.15, n), middle, middle + draw(0.2, 0.6, n)])
    law = AreaLaw(x, np.vstack([np.ones(n), np.ones(n), first, first * draw(1.0, 1.8, n)]))
    share = draw(0.2, 0.8, n) if staged else np.ones(n)
    place, shares = np.vstack([np.zeros(n), middle * draw(0.5, 1.0, n)]), np.vstack([share, 1.0 - share])
    injectors = Injectors(place, shares, draw(0.0, 1500.0, (2, n)), draw(1.5, 8.0, (2, n)), draw(0.3, 1.5, (2, n)))
    duct = duct_of(
        gas, state.enthalpy + 0.5 * u**2, u, state.pressure, state.density * u * area, area, law, injectors,
        Supply(fuel, ratio, enthalpy, heat, draw(0.8, 1.0, n)), Walls(draw(0.0, 0.004, n)),
    )  # fmt: skip
    return duct, limits.separation_pressure_ratio(mach)
