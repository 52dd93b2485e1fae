"""The gas of `tests.scalar_march`: constant gamma, complete combustion, or equilibrium, with Cantera's polynomials and its equilibrium.

A gas says R T, J/kg, of burning air from its enthalpy and pressure: all that a march needs. Nothing of `cycle` is used.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache

import numpy as np

RU = 8314.46261815324
AIR = {"N2": 0.7808, "O2": 0.2095, "Ar": 0.0097}
ATOMS = {"H2": (0, 2), "CH4": (1, 4), "C2H4": (2, 4)}
"""Carbon and hydrogen of the fuels."""
EQUILIBRIUM = ("N2", "O2", "Ar", "CO2", "CO", "H2O", "H2", "OH", "H", "O", "N", "NO", "NO2", "N2O", "HO2", "H2O2", "CH4")
COLD = 205.0
"""Lowest temperature of the tables, K."""

Thermal = Callable[[np.ndarray, np.ndarray, np.ndarray], np.ndarray]
"""R T, J/kg, of arrays of the burnt fuel per air, the enthalpy, J/kg, and the pressure, Pa."""


@dataclass(frozen=True)
class Perfect:
    """Constant specific heat; the burnt fuel brings `heat` J per kg of it."""

    cp: float
    R: float
    heat: float

    def air_enthalpy(self, T: float, pressure: float) -> float:
        return self.cp * T

    def fuel_enthalpy(self, T: float) -> float:
        return self.cp * T

    def released(self, burnt: np.ndarray) -> np.ndarray:
        """Heat of the burnt fuel per kg of air, which the enthalpy of a fuel does not hold here."""
        return burnt * self.heat

    def coldest(self, ratio: float, burnt: np.ndarray) -> np.ndarray:
        return np.full_like(burnt, self.cp * 50.0)

    def thermal(self, ratio: float, burnt: tuple[float, float], total: float, pressures: tuple[float, float]) -> Thermal:
        return lambda burnt, enthalpy, pressure: self.R / self.cp * enthalpy


class _Real:
    """Air and a fuel by their polynomials; enthalpies count from the elements."""

    fuel: str
    air: dict[str, float]

    def air_moles(self) -> dict[str, float]:
        """kmol per kg of air."""
        mass = sum(x * _species(s)[0] for s, x in self.air.items())
        return {s: x / mass for s, x in self.air.items()}

    def fuel_enthalpy(self, T: float) -> float:
        return float(_enthalpy(*_species(self.fuel)[1:], np.array(T))) / _species(self.fuel)[0]

    def released(self, burnt: np.ndarray) -> np.ndarray:
        return 0.0 * burnt


@dataclass(frozen=True)
class Burning(_Real):
    """Complete combustion to CO2 and H2O of the burnt fuel; the rest of it is inert."""

    fuel: str
    air: dict[str, float]

    def _moles(self, ratio: float, burnt: np.ndarray) -> dict[str, np.ndarray]:
        carbon, hydrogen = ATOMS[self.fuel]
        W = _species(self.fuel)[0]
        n = {s: value + 0.0 * burnt for s, value in self.air_moles().items()}
        made = {"O2": -(carbon + 0.25 * hydrogen), "CO2": carbon, "H2O": 0.5 * hydrogen}
        for s, each in made.items():
            n[s] = n.get(s, 0.0) + each * burnt / W
        n[self.fuel] = n.get(self.fuel, 0.0) + (ratio - burnt) / W
        return {s: value / (1.0 + ratio) for s, value in n.items()}

    def _mixed(self, ratio: float, burnt: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        n = self._moles(ratio, burnt)
        low, high = (sum(value[..., None] * _species(s)[k] for s, value in n.items()) for k in (1, 2))
        return low, high, RU * np.asarray(sum(n.values()))

    def air_enthalpy(self, T: float, pressure: float) -> float:
        low, high, _ = self._mixed(0.0, np.zeros(()))
        return float(_enthalpy(low, high, np.array(T)))

    def coldest(self, ratio: float, burnt: np.ndarray) -> np.ndarray:
        low, high, _ = self._mixed(ratio, burnt)
        return _enthalpy(low, high, np.full_like(burnt, COLD))

    def thermal(self, ratio: float, burnt: tuple[float, float], total: float, pressures: tuple[float, float]) -> Thermal:
        def found(burnt: np.ndarray, enthalpy: np.ndarray, pressure: np.ndarray) -> np.ndarray:
            low, high, R = self._mixed(ratio, burnt)
            T = np.full(np.broadcast(burnt, enthalpy).shape, 1000.0)
            for _ in range(12):
                step = (_enthalpy(low, high, T) - enthalpy) / _heat_capacity(low, high, T)
                T = np.maximum(T - step, 10.0)
                if np.all(np.abs(step) < 1e-6 * T):
                    break
            return R * T

        return found


@dataclass(frozen=True)
class Equilibrium(_Real):
    """The burnt part in equilibrium with the air, the unburnt fuel inert: tables of Cantera's equilibrium at enthalpy and pressure."""

    fuel: str
    air: dict[str, float]

    def _phase(self, ratio: float, burnt: float):  # type: ignore[no-untyped-def]
        phase, W = _phase(self.fuel), _species(self.fuel)[0]
        phase.TPX = 1000.0, 1e5, {**self.air_moles(), self.fuel: burnt / W, "inert": (ratio - burnt) / W}
        return phase

    def air_enthalpy(self, T: float, pressure: float) -> float:
        phase = self._phase(0.0, 0.0)
        phase.TP = T, pressure
        phase.equilibrate("TP", rtol=1e-10)
        return float(phase.enthalpy_mass)

    def coldest(self, ratio: float, burnt: np.ndarray) -> np.ndarray:
        return Burning(self.fuel, self.air).coldest(ratio, burnt)

    def thermal(self, ratio: float, burnt: tuple[float, float], total: float, pressures: tuple[float, float]) -> Thermal:
        along = np.mean(burnt) + 0.5 * (burnt[1] - burnt[0]) * _nodes(12 if burnt[1] > burnt[0] else 1)
        heights, logs = 0.5 + 0.5 * _nodes(22), np.log(pressures)
        across = np.mean(logs) + 0.5 * (logs[1] - logs[0]) * _nodes(8)
        table = np.empty((along.size, heights.size, across.size))
        for i, b in enumerate(along):
            phase, cold = self._phase(ratio, float(b)), float(self.coldest(ratio, np.array(b)))
            for k, lnp in enumerate(across):
                for j in reversed(range(heights.size)):
                    phase.HP = cold + heights[j] * (total - cold), np.exp(lnp)
                    phase.equilibrate("HP", rtol=1e-10)
                    table[i, j, k] = RU * phase.T / phase.mean_molecular_weight

        def found(burnt: np.ndarray, enthalpy: np.ndarray, pressure: np.ndarray) -> np.ndarray:
            burnt, enthalpy, pressure = np.broadcast_arrays(burnt, enthalpy, pressure)
            cold = self.coldest(ratio, burnt)
            shares = (_shares(along, burnt), _shares(heights, (enthalpy - cold) / (total - cold)), _shares(across, np.log(pressure)))
            rows = np.tensordot(shares[0], table, 1)
            return np.asarray(((rows @ shares[2][..., None])[..., 0] * shares[1]).sum(-1))

        return found


def _nodes(count: int) -> np.ndarray:
    """Chebyshev's points in -1 to 1."""
    return -np.cos(np.pi * (np.arange(count) + 0.5) / count)


def _shares(nodes: np.ndarray, at: np.ndarray) -> np.ndarray:
    """Lagrange's weights of Chebyshev nodes for places `at`; one more dimension than these."""
    if nodes.size == 1:
        return np.ones((*at.shape, 1))
    k = np.arange(nodes.size)
    away = at[..., None] - nodes
    away = np.where(away == 0.0, 1e-300, away)
    weights = (-1.0) ** k * np.sin(np.pi * (k + 0.5) / k.size) / away
    return np.asarray(weights / weights.sum(-1, keepdims=True))


def _enthalpy(low: np.ndarray, high: np.ndarray, T: np.ndarray) -> np.ndarray:
    """J per unit of the coefficients, whose last axis is that of the powers."""
    found = []
    for c in (low, high):
        a = [c[..., k] for k in range(6)]
        found.append(a[5] + T * (a[0] + T * (a[1] / 2 + T * (a[2] / 3 + T * (a[3] / 4 + T * (a[4] / 5))))))
    return np.asarray(RU * np.where(T >= 1000.0, found[1], found[0]))


def _heat_capacity(low: np.ndarray, high: np.ndarray, T: np.ndarray) -> np.ndarray:
    found = [c[..., 0] + T * (c[..., 1] + T * (c[..., 2] + T * (c[..., 3] + T * c[..., 4]))) for c in (low, high)]
    return np.asarray(RU * np.where(T >= 1000.0, found[1], found[0]))


@cache
def _data():  # type: ignore[no-untyped-def]
    import cantera as ct

    return {s.name: s for s in ct.Species.list_from_file("nasa_gas.yaml") if s.name in {*EQUILIBRIUM, *ATOMS}}


@cache
def _species(name: str) -> tuple[float, np.ndarray, np.ndarray]:
    """Molar mass, and the coefficients below and above 1000 K."""
    species = _data()[name]
    c = species.thermo.coeffs
    # argon has one range to 6000 K
    return species.molecular_weight, np.asarray(c[8:15]), np.asarray(c[1:8] if c[0] == 1000.0 else c[8:15])


@cache
def _phase(fuel: str):  # type: ignore[no-untyped-def]
    """Cantera's gas of these species and the fuel a second time, of an element of its own, which cannot react."""
    import cantera as ct

    thermo = _data()[fuel].input_data["thermo"]
    ranges, data = list(thermo["temperature-ranges"]), [[float(a) for a in row] for row in thermo["data"]]
    names = ", ".join(dict.fromkeys((*EQUILIBRIUM, fuel)))
    text = f"""
elements: [{{symbol: Fu, atomic-weight: {_species(fuel)[0]}}}]
phases:
- {{name: gas, thermo: ideal-gas, elements: [N, O, Ar, C, H, Fu], species: [{{nasa_gas.yaml/species: [{names}]}}, {{species: [inert]}}]}}
species:
- {{name: inert, composition: {{Fu: 1}}, thermo: {{model: NASA7, temperature-ranges: {ranges}, data: {data}}}}}
"""
    return ct.Solution(yaml=text)
