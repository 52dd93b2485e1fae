"""A scramjet cycle of one point written with Cantera: what a capable user writes by hand, as the thing to beat.

Equilibrium air to a given burner entry pressure at a kinetic-energy efficiency, constant-area combustion in equilibrium
on the supersonic branch, shifting isentropic expansion to ambient pressure. At most 16 equilibrium solves a point. The
species are those of the program's own table.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

import numpy as np

from cycle.constants import STANDARD_AIR, STANDARD_GRAVITY
from cycle.gas.fuels import FUELS
from cycle.gas.species import REACTING, atoms_of, species_data, species_table

SOLVED, NOT_COMPRESSED, CHOKED, FAILED = range(4)
"""What a point ended as."""

TOLERANCE = 1e-9


@dataclass(frozen=True)
class Points:
    """N flight and engine points: Mach number, ambient temperature K and pressure Pa, kinetic-energy efficiency, burner
    entry pressure Pa, equivalence ratio; fuel at 300 K."""

    mach: np.ndarray
    temperature: np.ndarray
    pressure: np.ndarray
    efficiency: np.ndarray
    entry_pressure: np.ndarray
    equivalence_ratio: np.ndarray


def sample(n: int, seed: int = 0) -> Points:
    """Invented points over Mach 5-12 at 25-75 kPa dynamic pressure, some of them choked."""
    rng = np.random.default_rng(seed)
    mach, q = rng.uniform(5.0, 12.0, n), rng.uniform(25e3, 75e3, n)
    return Points(
        mach, rng.uniform(215.0, 260.0, n), q / (0.7 * mach**2), rng.uniform(0.96, 0.99, n), rng.uniform(30e3, 120e3, n),
        rng.uniform(0.1, 1.2, n),
    )  # fmt: skip


@dataclass
class PointByPoint:
    """The loop. fuel: a built-in gaseous fuel; solves counts equilibrium solves."""

    fuel: str
    solves: int = 0
    gas: Any = field(init=False, repr=False)

    def __post_init__(self) -> None:
        import cantera as ct

        chosen = FUELS[self.fuel]
        table = species_table(tuple(STANDARD_AIR), chosen)
        names = [self._listed(name) for name in table.names if name in REACTING or name in STANDARD_AIR]
        listed = {s.name: s for s in ct.Species.list_from_file("nasa_gas.yaml")}
        self.gas = ct.Solution(thermo="ideal-gas", species=[self._at_one_bar(listed[name]) for name in names])
        self.fuel_gas = ct.Solution(thermo="ideal-gas", species=[self._at_one_bar(listed[str(chosen.vapour)])])
        self.gas.TPX = 300.0, 1e5, STANDARD_AIR
        self.air = self.gas.Y
        self.atoms = atoms_of(str(chosen.vapour))
        self.moles = STANDARD_AIR["O2"] / chosen.oxygen_need()
        self.ratio = self.moles * self.fuel_gas.mean_molecular_weight / self.gas.mean_molecular_weight
        self.fuel_gas.TP = 300.0, 1e5
        self.fuel_enthalpy = self.fuel_gas.h

    @staticmethod
    def _listed(name: str) -> str:
        return str(species_data()["listed_as"].get(name, name))

    @staticmethod
    def _at_one_bar(species: Any) -> Any:
        import cantera as ct

        c = species.thermo.coeffs
        thermo = ct.NasaPoly2(200.0, 6000.0, 1e5, c) if c[0] < 6000.0 else ct.NasaPoly2(200.0, 6000.0, 1e5, [1000.0, *c[8:], *c[8:]])
        copy = ct.Species(species.name, species.composition)
        copy.thermo = thermo
        return copy

    def run(self, points: Points) -> tuple[np.ndarray, np.ndarray]:
        """Codes and specific impulses (s, NaN where there is none) of all points."""
        columns = (points.mach, points.temperature, points.pressure, points.efficiency, points.entry_pressure, points.equivalence_ratio)
        found = [self.one(*row) for row in zip(*columns, strict=True)]
        return np.array([code for code, _ in found]), np.array([impulse for _, impulse in found])

    def one(self, mach: float, T0: float, p0: float, efficiency: float, p3: float, phi: float) -> tuple[int, float]:
        """Code and specific impulse of one point."""
        import cantera as ct

        try:
            return self._walk(mach, T0, p0, efficiency, p3, phi)
        except (ct.CanteraError, ValueError):
            return FAILED, float("nan")

    def _equilibrate(self, pair: str) -> None:
        self.solves += 1
        self.gas.equilibrate(pair, rtol=TOLERANCE)

    def _walk(self, mach: float, T0: float, p0: float, efficiency: float, p3: float, phi: float) -> tuple[int, float]:
        gas = self.gas
        gas.TPY = T0, p0, self.air
        u0 = mach * gas.sound_speed
        ht = gas.h + 0.5 * u0 * u0
        gas.HP = ht - 0.5 * efficiency * u0 * u0, p0
        self._equilibrate("HP")
        gas.SP = gas.s, p3
        self._equilibrate("SP")
        if ht <= gas.h:
            return NOT_COMPRESSED, float("nan")
        u3 = np.sqrt(2.0 * (ht - gas.h))
        f = phi * self.ratio
        air_flux = gas.density * u3
        ht4 = (ht + f * self.fuel_enthalpy) / (1.0 + f)
        if not self._burn(phi, air_flux * (1.0 + f), p3 + air_flux * u3, ht4, p3):
            return CHOKED, float("nan")
        gas.SP = gas.s, p0
        self._equilibrate("SP")
        thrust = (1.0 + f) * np.sqrt(2.0 * (ht4 - gas.h)) - u0
        return SOLVED, float(thrust / (f * STANDARD_GRAVITY))

    def _complete(self, phi: float) -> dict[str, float]:
        """Complete combustion, an oxygen shortage shared by carbon and hydrogen."""
        n = phi * self.moles
        carbon, hydrogen = self.atoms.get("C", 0.0) * n, self.atoms["H"] * n / 2.0
        left = STANDARD_AIR["O2"] - carbon - hydrogen / 2.0
        share = 2.0 * max(-left, 0.0) / (carbon + hydrogen)
        burnt = {"H2O": hydrogen * (1.0 - share), "H2": hydrogen * share, "O2": max(left, 0.0)}
        if carbon:
            burnt |= {"CO2": carbon * (1.0 - share), "CO": carbon * share}
        return {**STANDARD_AIR, **burnt}

    def _burn(self, phi: float, G: float, F: float, ht: float, p3: float) -> bool:
        """Bring the gas to the supersonic end of a constant-area burner; false where it chokes."""
        from scipy.optimize import brentq

        gas = self.gas
        gas.TPX = 1500.0, p3, self._complete(phi)

        def excess(p: float) -> float:
            u = (F - p) / G
            gas.HP = ht - 0.5 * u * u, p
            self._equilibrate("HP")
            return float(gas.density * u / G - 1.0)

        low = excess(p3)
        sonic = F / 2.22
        high = excess(sonic)
        if low * high > 0.0:
            s, density = gas.s, gas.density
            gas.SP = s, sonic * 1.001
            self._equilibrate("SP")
            sonic = F / (1.0 + np.log(1.001) / np.log(gas.density / density))
            if low * excess(sonic) > 0.0:
                return False
        excess(brentq(excess, p3, sonic, rtol=1e-10))
        return True
