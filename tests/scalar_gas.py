"""The gas of `tests.scalar_march`, one state at a time: constant gamma, or complete combustion with Cantera's polynomials."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache, lru_cache

import numpy as np
from scipy.optimize import brentq

RU = 8314.46261815324
AIR = {"N2": 0.7808, "O2": 0.2095, "Ar": 0.0097}
ATOMS = {"H2": (0, 2), "CH4": (1, 4), "C2H4": (2, 4)}
"""Carbon and hydrogen of the fuels."""


@dataclass(frozen=True)
class Perfect:
    """Constant specific heat; the burnt fuel brings `heat` J per kg of it."""

    cp: float
    R: float
    heat: float

    def mixed(self, ratio: float, burnt: float) -> Mixture:
        return Mixture(lambda T: self.cp * T, lambda T: self.cp, self.R)

    def released(self, burnt: float) -> float:
        return burnt * self.heat

    def fuel_enthalpy(self, T: float) -> float:
        return self.cp * T


@dataclass(frozen=True)
class Burning:
    """Air of `AIR` and a fuel that burns completely to CO2 and H2O as far as it burns; the rest of it is inert."""

    fuel: str

    def mixed(self, ratio: float, burnt: float) -> Mixture:
        carbon, hydrogen = ATOMS[self.fuel]
        air = sum(x * _molar_mass(s) for s, x in AIR.items())
        n = {s: x / air for s, x in AIR.items()}
        fuel = ratio / _molar_mass(self.fuel)
        moles = min(burnt * fuel, n["O2"] / (carbon + 0.25 * hydrogen))
        n["O2"] -= moles * (carbon + 0.25 * hydrogen)
        n |= {self.fuel: fuel - moles, "CO2": carbon * moles, "H2O": 0.5 * hydrogen * moles}
        weights = {s: value / (1.0 + ratio) for s, value in n.items()}
        low, high = (sum(value * _coefficients(s)[i] for s, value in weights.items()) for i in (0, 1))
        R = RU * sum(weights.values())

        def enthalpy(T: float) -> float:
            a = high if T >= 1000.0 else low
            return float(RU * (a[5] + T * (a[0] + T * (a[1] / 2 + T * (a[2] / 3 + T * (a[3] / 4 + T * a[4] / 5))))))

        def heat_capacity(T: float) -> float:
            a = high if T >= 1000.0 else low
            return float(RU * (a[0] + T * (a[1] + T * (a[2] + T * (a[3] + T * a[4])))))

        return Mixture(enthalpy, heat_capacity, R)

    def released(self, burnt: float) -> float:
        return 0.0

    def fuel_enthalpy(self, T: float) -> float:
        a = _coefficients(self.fuel)[0 if T < 1000.0 else 1]
        return float(RU * T * (a[0] + T * (a[1] / 2 + T * (a[2] / 3 + T * (a[3] / 4 + T * a[4] / 5))) + a[5] / T) / _molar_mass(self.fuel))


@cache
def _species() -> dict[str, tuple[float, tuple[np.ndarray, np.ndarray]]]:
    import cantera as ct

    wanted = {"N2", "O2", "Ar", "CO2", "H2O", *ATOMS}
    found = {}
    for species in ct.Species.list_from_file("nasa_gas.yaml"):
        if species.name in wanted:
            c = species.thermo.coeffs
            low, high = np.asarray(c[8:15]), np.asarray(c[1:8])
            # argon has one range to 6000 K
            found[species.name] = (species.molecular_weight, (low, high if c[0] == 1000.0 else low))
    return found


def _molar_mass(name: str) -> float:
    return _species()[name][0]


def _coefficients(name: str) -> tuple[np.ndarray, np.ndarray]:
    return _species()[name][1]


@dataclass(frozen=True)
class Mixture:
    """The gas at one place: h(T) J/kg, cp(T), R J/(kg K)."""

    enthalpy: Callable[[float], float]
    heat_capacity: Callable[[float], float]
    R: float

    def temperature(self, h: float) -> float:
        T = 1000.0
        for _ in range(30):
            step = (self.enthalpy(T) - h) / self.heat_capacity(T)
            T -= step
            if abs(step) < 1e-9 * T:
                return T
        raise ValueError(f"no temperature of enthalpy {h}")

    def mach2(self, T: float, u: float) -> float:
        cp = self.heat_capacity(T)
        return u * u * (cp - self.R) / (cp * self.R * T)

    def impulse(self, total: float, T: float) -> float:
        """(p A + m u)/m of the stream of total enthalpy `total` at T."""
        u = math.sqrt(2.0 * (total - self.enthalpy(T)))
        return u + self.R * T / u

    @lru_cache(maxsize=1 << 10)  # noqa: B019
    def sonic(self, total: float) -> float:
        """Temperature at Mach 1: 2 (ht - h) = gamma R T, by steps of constant cp."""
        T = 1000.0
        for _ in range(60):
            cp = self.heat_capacity(T)
            gamma = cp / (cp - self.R)
            step = (2.0 * (total - self.enthalpy(T)) - gamma * self.R * T) / (2.0 * cp + gamma * self.R)
            T += step
            if abs(step) < 1e-12 * T:
                return T
        raise ValueError(f"no sonic state of total enthalpy {total}")

    def at_impulse(self, total: float, impulse: float, fast: bool) -> tuple[float, float]:
        """T K and u m/s of the supersonic or the subsonic stream of an impulse; the sonic one where it has not enough."""
        sonic = self.sonic(total)
        T = sonic
        if impulse > self.impulse(total, sonic):
            end = 60.0 if fast else self.temperature(total) * (1.0 - 1e-12)
            T = float(brentq(lambda t: self.impulse(total, t) - impulse, end, sonic, xtol=1e-9, rtol=1e-13))
        return T, math.sqrt(2.0 * (total - self.enthalpy(T)))
