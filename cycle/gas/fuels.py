"""Fuels: what is burnt, how it is stored, and what follows from that (heating value, stoichiometric ratio)."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from typing import Literal

import numpy as np

from cycle.arrays import Array, ArrayLike
from cycle.constants import GAS_CONSTANT, REFERENCE_PRESSURE, REFERENCE_TEMPERATURE
from cycle.gas.species import atoms_of, evaluate, held_rows, listed_rows, mass_of

Phase = Literal["gas", "liquid"]

ELEMENTS = ("C", "H", "N", "O")
"""Elements a fuel may hold."""

MAX_FORMULA_LENGTH = 40
MAX_ATOMS = 200.0
_TERM = re.compile(r"([CHNO])(\d{1,3}(?:\.\d{1,6})?)?")


@dataclass(frozen=True)
class Fuel:
    """A fuel as stored.

    formula: ((element, atoms), ...) of C, H, N, O; formation_enthalpy: J/mol in the stored phase at 298.15 K;
    vapour: a species of the data file whose polynomials hold for the gas, or None: then vapour_specific_heat,
    J/(kg K), is held; heat_of_vaporisation: J/kg at 298.15 K, 0 for a stored gas; liquid_specific_heat: J/(kg K);
    standard_entropy: J/(mol K) of the stored phase at 298.15 K and 1 bar, None where unknown; source: of these data.
    """

    name: str
    formula: tuple[tuple[str, float], ...]
    phase: Phase
    formation_enthalpy: float
    vapour: str | None
    vapour_specific_heat: float | None
    heat_of_vaporisation: float
    liquid_specific_heat: float | None
    standard_entropy: float | None
    source: str

    @property
    def atoms(self) -> dict[str, float]:
        """Atoms per molecule of the formula."""
        return dict(self.formula)

    @property
    def molar_mass(self) -> float:
        """kg/mol of the formula."""
        return mass_of(self.atoms)

    def vapour_rows(self) -> Array:
        """(3, 20) h/RT, s/R, cp/R of the vapour for the species table.

        With a held heat capacity the vapour's standard entropy is that of the stored gas where it is known and 0
        otherwise; at a fixed amount of vapour this constant cancels in every entropy difference.
        """
        if self.vapour is not None:
            return listed_rows(self.vapour)
        enthalpy = self.formation_enthalpy + self.heat_of_vaporisation * self.molar_mass
        entropy = self.standard_entropy if self.phase == "gas" and self.standard_entropy is not None else 0.0
        return held_rows(enthalpy, entropy, float(self.vapour_specific_heat or 0.0) * self.molar_mass)

    def _stored(self, temperature: ArrayLike) -> tuple[Array, Array]:
        """h J/mol and s J/(mol K) of the stored phase at 1 bar."""
        if self.phase == "gas":
            h, s, _ = evaluate(self.vapour_rows(), temperature)
            return h, s
        T = np.asarray(temperature, dtype=np.float64)
        cp = float(self.liquid_specific_heat or 0.0) * self.molar_mass
        h = self.formation_enthalpy + cp * (T - REFERENCE_TEMPERATURE)
        return h, (self.standard_entropy or 0.0) + cp * np.log(T / REFERENCE_TEMPERATURE)

    def total_enthalpy(self, temperature: ArrayLike) -> Array:
        """J/kg of the fuel as supplied at temperature K (any shape); elements at 298.15 K are zero.

        Gas: NASA TM-4513 polynomials or held cp. Liquid: formation enthalpy and held cp.
        """
        return self._stored(temperature)[0] / self.molar_mass

    def entropy(self, temperature: ArrayLike, pressure: ArrayLike) -> Array:
        """J/(kg K) of the fuel as supplied at temperature K and pressure Pa (broadcast); NaN where it is unknown.

        Gas: ideal. Liquid: incompressible, so the pressure does not enter.
        """
        if self.standard_entropy is None:
            return np.full(np.broadcast_shapes(np.shape(temperature), np.shape(pressure)), np.nan)
        ratio = np.asarray(pressure, dtype=np.float64) / REFERENCE_PRESSURE
        expansion = GAS_CONSTANT * np.log(ratio) if self.phase == "gas" else np.zeros(ratio.shape)
        return (self._stored(temperature)[1] - expansion) / self.molar_mass

    def lower_heating_value(self) -> float:
        """J/kg at 298.15 K, water as vapour, fuel as stored: enthalpy of formation of the fuel less its products."""
        return molar_heat(self.atoms, formation_enthalpy=self.formation_enthalpy) / self.molar_mass

    def oxygen_need(self) -> float:
        """mol O2 per mol of fuel for CO2, H2O and N2."""
        return oxygen_need(self.atoms)

    def stoichiometric_ratio(self, mole_fractions: Mapping[str, ArrayLike]) -> Array:
        """kg of fuel per kg of air that uses up the air's oxygen.

        mole_fractions: of the air by species name, each scalar or (N,); combustibles in it claim their oxygen first,
        oxygen bound in CO2 and H2O does not count. Returns (N,) or 0-d; zero where there is no free oxygen.
        """
        free: Array = np.zeros(())
        mass: Array = np.zeros(())
        for name, x in mole_fractions.items():
            atoms, share = atoms_of(name), np.asarray(x, dtype=np.float64)
            free = free - oxygen_need({e: n for e, n in atoms.items() if e in ELEMENTS}) * share
            mass = mass + mass_of(atoms) * share
        return np.maximum(free, 0.0) / self.oxygen_need() * self.molar_mass / mass


def oxygen_need(atoms: Mapping[str, float]) -> float:
    """mol O2 that takes these atoms to CO2, H2O and N2; negative for an oxidiser."""
    return atoms.get("C", 0.0) + atoms.get("H", 0.0) / 4.0 - atoms.get("O", 0.0) / 2.0


def products_enthalpy(atoms: Mapping[str, float]) -> float:
    """J/mol at 298.15 K of the CO2, H2O vapour and N2 from one molecule, the O2 used counted as negative."""
    at_reference = {name: _formation_enthalpy(name) for name in ("CO2", "H2O", "N2", "O2")}
    amounts = {"CO2": atoms.get("C", 0.0), "H2O": atoms.get("H", 0.0) / 2.0, "N2": atoms.get("N", 0.0) / 2.0}
    return sum(n * at_reference[name] for name, n in amounts.items()) - oxygen_need(atoms) * at_reference["O2"]


def molar_heat(atoms: Mapping[str, float], heating_value: float | None = None, formation_enthalpy: float | None = None) -> float:
    """Heat of burning one molecule at 298.15 K, J/mol, by the one that is given: J/kg, or J/mol of formation."""
    if formation_enthalpy is None:
        return float(heating_value or 0.0) * mass_of(dict(atoms))
    return formation_enthalpy - products_enthalpy(atoms)


def entropy_of_burning(atoms: Mapping[str, float]) -> float:
    """Entropy at 298.15 K and 1 bar of the CO2, H2O vapour and N2 from one molecule less that of the O2 it takes, J/(mol K)."""
    amounts = {"CO2": atoms.get("C", 0.0), "H2O": atoms.get("H", 0.0) / 2.0, "N2": atoms.get("N", 0.0) / 2.0, "O2": -oxygen_need(atoms)}
    return sum(n * _standard_entropy(name) for name, n in amounts.items())


@cache
def _formation_enthalpy(species: str) -> float:
    return float(evaluate(listed_rows(species), REFERENCE_TEMPERATURE)[0])


def _standard_entropy(species: str) -> float:
    return float(evaluate(listed_rows(species), REFERENCE_TEMPERATURE)[1])


def parse_formula(text: str) -> tuple[tuple[str, float], ...]:
    """Atoms of a formula such as "C10H16" or "C12.3H22.1", C H N O only, in that order.

    Raises ValueError for other elements, other characters, a length above 40 or more than 200 atoms of a kind, and for
    a formula that needs no oxygen to burn.
    """
    if not 0 < len(text) <= MAX_FORMULA_LENGTH or "".join(m.group() for m in _TERM.finditer(text)) != text:
        raise ValueError(f"fuel formula {text[:MAX_FORMULA_LENGTH]!r}: expected element symbols of C, H, N, O with counts, such as C10H16")
    atoms = dict.fromkeys(ELEMENTS, 0.0)
    for element, count in _TERM.findall(text):
        atoms[element] += float(count or 1.0)
    if max(atoms.values()) > MAX_ATOMS:
        raise ValueError(f"fuel formula {text!r}: more than {MAX_ATOMS:.0f} atoms of one element")
    if oxygen_need(atoms) <= 0.0:
        raise ValueError(f"fuel formula {text!r}: it needs no oxygen to burn")
    return tuple((element, n) for element, n in atoms.items() if n > 0.0)


def user_fuel(
    formula: str,
    phase: Phase,
    *,
    formation_enthalpy: float | None = None,
    heating_value: float | None = None,
    vapour_specific_heat: float,
    liquid_specific_heat: float | None = None,
    heat_of_vaporisation: float | None = None,
    standard_entropy: float | None = None,
    name: str | None = None,
    source: str = "case",
) -> Fuel:
    """A fuel of the user's own.

    formula: such as "C10H16"; phase: as stored. Exactly one of formation_enthalpy (J/mol, stored phase, 298.15 K) and
    heating_value (J/kg, lower, fuel as stored). vapour_specific_heat J/(kg K); a liquid also needs liquid_specific_heat
    J/(kg K) and heat_of_vaporisation J/kg. standard_entropy J/(mol K) of the stored phase, None if unknown.
    Raises ValueError naming what is missing, given twice, or not positive.
    """
    atoms = parse_formula(formula)
    if (formation_enthalpy is None) == (heating_value is None):
        raise ValueError("give exactly one of formation enthalpy and heating value")
    if phase == "liquid" and (liquid_specific_heat is None or heat_of_vaporisation is None):
        raise ValueError("a liquid fuel needs its specific heat and its heat of vaporisation")
    if phase == "gas" and (liquid_specific_heat is not None or heat_of_vaporisation is not None):
        raise ValueError("a gaseous fuel has no liquid specific heat or heat of vaporisation")
    positive = {
        "vapour specific heat": vapour_specific_heat,
        "liquid specific heat": liquid_specific_heat,
        "heat of vaporisation": heat_of_vaporisation,
        "heating value": heating_value,
    }
    for label, value in positive.items():
        if value is not None and not value > 0.0:
            raise ValueError(f"{label} must be positive")
    if formation_enthalpy is None:
        molecule = dict(atoms)
        formation_enthalpy = float(heating_value or 0.0) * mass_of(molecule) + products_enthalpy(molecule)
    return Fuel(
        name or formula, atoms, phase, formation_enthalpy, None, vapour_specific_heat, heat_of_vaporisation or 0.0,
        liquid_specific_heat, standard_entropy, source,
    )  # fmt: skip


def _listed_gas(name: str, species: str) -> Fuel:
    return Fuel(
        name, tuple(atoms_of(species).items()), "gas", _formation_enthalpy(species), species, None, 0.0, None,
        _standard_entropy(species), "NASA TM-4513 (1993)",
    )  # fmt: skip


def _kerosene() -> Fuel:
    atoms = parse_formula("C12H23")
    liquid_enthalpy = -303467.44
    return Fuel(
        "kerosene", atoms, "liquid", liquid_enthalpy, "Jet-A(g)", None,
        (_formation_enthalpy("Jet-A(g)") - liquid_enthalpy) / mass_of(dict(atoms)),
        350.3344 / mass_of(dict(atoms)), 448.1092,
        "kerosene-type, C12H23: NASA TM-4513 (1993), Jet-A(L) at 298.15 K for the liquid, Jet-A(g) for the vapour",
    )  # fmt: skip


def _jp10() -> Fuel:
    return Fuel(
        "jp-10", parse_formula("C10H16"), "liquid", -122.8e3, None, 2800.0, 360.0e3, 1580.0, None,
        "exo-tetrahydrodicyclopentadiene: formation enthalpy, heat of vaporisation and specific heats (vapour: a mean "
        "of 300-1500 K) from memory",
    )  # fmt: skip


FUELS: dict[str, Fuel] = {
    "hydrogen": _listed_gas("hydrogen", "H2"),
    "methane": _listed_gas("methane", "CH4"),
    "ethylene": _listed_gas("ethylene", "C2H4"),
    "propane": _listed_gas("propane", "C3H8"),
    "kerosene": _kerosene(),
    "jp-10": _jp10(),
}
"""The built-in fuels by the name a case gives them."""
