"""Speed of the gas models against Cantera, in one process. Run: python -m benchmarks.thermochemistry"""

from __future__ import annotations

import numpy as np

from benchmarks.cantera_cycle import PointByPoint
from benchmarks.timing import Row, at_most, printed, ratio, reported, seconds
from cycle.constants import STANDARD_AIR
from cycle.gas.equilibrium import EquilibriumGas
from cycle.gas.frozen import air_gas
from cycle.gas.fuels import FUELS
from cycle.gas.species import species_table
from cycle.gas.state import State

MANY, SUBSAMPLE = 10_000, 300


def products(fuel: str, n: int, seed: int = 1) -> tuple[EquilibriumGas, np.ndarray, np.ndarray]:
    """Burnt gases at equivalence ratios 0.1-1.2, with T 500-3500 K and p 10 kPa-3 MPa."""
    rng = np.random.default_rng(seed)
    chosen = FUELS[fuel]
    air = air_gas(species_table(tuple(STANDARD_AIR), chosen), STANDARD_AIR, "equilibrium", n)
    gas = air.fuelled(chosen, rng.uniform(0.1, 1.2, n) * chosen.stoichiometric_ratio(STANDARD_AIR), np.ones(n))
    assert isinstance(gas, EquilibriumGas)
    return gas, rng.uniform(500.0, 3500.0, n), 10.0 ** rng.uniform(4.0, 6.5, n)


def states(fuel: str = "ethylene") -> list[Row]:
    """(h, p) and (s, p) of 10,000 points against Cantera's time for a subsample of them, which starts from the right
    composition: to its favour."""
    gas, T, p = products(fuel, MANY)
    known = gas.at("tp", T, p)
    solver = PointByPoint(fuel).gas
    rows = []
    for kind, target in (("hp", known.enthalpy), ("sp", known.entropy)):
        moles = known.moles[[gas.table.index[_ours(name)] for name in solver.species_names]]

        def alone(kind: str = kind, target: np.ndarray = target, moles: np.ndarray = moles) -> None:
            for i in range(SUBSAMPLE):
                solver.TPX = 1500.0, p[i], moles[:, i]
                setattr(solver, kind.upper(), (target[i], p[i]))
                solver.equilibrate(kind.upper(), rtol=1e-9)

        share = ratio(lambda kind=kind, target=target: gas.at(kind, target, p), alone, repeats=3) * SUBSAMPLE / MANY
        rows.append(at_most(f"({kind[0]}, p) of {MANY} {fuel} states, time a state", share, "of Cantera's", 1 / 20, "Cantera"))
    return rows


def _ours(name: str) -> str:
    return "C2H2" if name.startswith("C2H2") else name


def times(fuel: str, n: int) -> list[Row]:
    """Time a state and iterations of each kind at n points."""
    gas, T, p = products(fuel, n)
    known = gas.at("tp", T, p)
    mach = np.random.default_rng(2).uniform(1.2, 3.0, n)
    u = mach * known.sound_speed
    G = known.density * u
    near = gas.at("tp", T * 1.05, p * 1.05)
    ht = known.enthalpy + 0.5 * u * u
    jobs: dict[str, tuple[tuple[np.ndarray, ...], State | None]] = {
        "hp": ((known.enthalpy, p), None),
        "sp": ((known.entropy, p), None),
        "vp": ((1.0 / known.density, p), None),
        "hs": ((known.enthalpy, known.entropy), None),
        "momentum": ((p + G * u, G, ht, G), near),
    }
    rows = []
    for kind, (targets, start) in jobs.items():
        t = seconds(lambda k=kind, q=targets, s=start: gas.at(k, *q, start=s), 3 if n > 100 else 25) / n
        rows.append(reported(f"{kind}, {fuel}, N = {n}", t * 1e6, "us a state"))
        counts = gas.solve(kind, *targets, start=start).iterations
        rows.append(reported(f"{kind}, {fuel}, N = {n}: iterations, mean (largest {counts.max()})", float(counts.mean()), "-"))
    return rows


def rows() -> list[Row]:
    """All rows of this benchmark."""
    found = states("ethylene") + states("hydrogen")
    for n in (MANY, 1):
        found += times("hydrogen", n) + times("ethylene", n)
    return found


if __name__ == "__main__":
    print(printed(rows()))
