"""Species data and the species table of a case: polynomials, stoichiometry and the basis of the equilibrium.

The polynomials (NASA TM-4513, 1993; seven coefficients, 200-1000-6000 K) are shipped as `species.json`, so nothing but
numpy is needed to solve; a test holds the file equal to Cantera's to the last digit. Entropies are those at 1 bar.
Two things are done to them here:

* the constants of integration of the upper range are moved (by about 1e-9 of the value, 6e-8 at most) so that h and s are
  continuous at 1000 K: otherwise some states near it have no temperature or two;
* below 200 K and above 6000 K cp is held at its value there, so that an iteration that passes through does not meet
  what the polynomials do outside their range. A state that ends above 6000 K or below 150 K is out of range all the same.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from functools import cache, lru_cache
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from cycle.arrays import Array, ArrayLike, Codes
from cycle.constants import GAS_CONSTANT, REFERENCE_TEMPERATURE
from cycle.gas.state import EXTRAPOLATED, INSIDE, OUT_OF_RANGE

if TYPE_CHECKING:
    from cycle.gas.fuels import Fuel

DATA_FILE = Path(__file__).with_name("species.json")

COLDEST, LOWEST, MIDDLE, HIGHEST = 150.0, 200.0, 1000.0, 6000.0
"""Limits of the data, K: held heat capacity from, polynomials from, joint of the two ranges, end."""

ROUNDING = 1e-12
"""Relative slack of these limits: T comes out of an iteration in ln T."""

REACTING = (
    "N2", "O2", "CO2", "CO", "H2O", "H2", "OH", "H", "O", "N", "NO", "NO2", "N2O", "HO2", "H2O2",
    "CH4", "NH3", "HCN", "C2H2", "C2H4",
)  # fmt: skip
"""Species that take part in equilibrium where their elements are present."""

PREFERRED_BASIS = ("H2O", "CO2", "N2", "O2", "H2", "CO")
"""Basis species in order of choice. Stable products keep the reduced matrix regular where the matrix of elements is
singular: cold and stoichiometric."""

FUNCTIONS, RANGE_FUNCTIONS = 20, 7
"""Number of functions of T, and of those of one range of the polynomials: 200-1000 K, then 1000-6000 K, then the rest."""

_LOW, _HIGH, _COLD, _HOT = slice(0, 7), slice(7, 14), slice(14, 17), slice(17, 20)
_HELD = slice(0, 3)


@cache
def species_data() -> dict[str, dict[str, object]]:
    """The shipped data file: atomic weights (kg/kmol) and, for each gas species and graphite, atoms and two coefficient rows."""
    data: dict[str, dict[str, object]] = json.loads(DATA_FILE.read_text(encoding="utf-8"))
    return data


@cache
def data_hash() -> str:
    """SHA-256 of the species data, hexadecimal: stored with a walk, so that a change of data is seen."""
    return hashlib.sha256(DATA_FILE.read_bytes()).hexdigest()


def atomic_mass(element: str) -> float:
    """kg/mol of an element symbol; KeyError where the data has no such element."""
    return float(species_data()["atomic_weight"][element]) / 1000.0  # type: ignore[arg-type]


def atoms_of(species: str) -> dict[str, float]:
    """Atoms per molecule of a listed species; KeyError for an unlisted one."""
    entry: dict[str, dict[str, float]] = species_data()["species"][species]  # type: ignore[assignment]
    return dict(entry["atoms"])


def mass_of(atoms: dict[str, float]) -> float:
    """kg/mol of a molecule from its atoms."""
    return sum(atomic_mass(element) * count for element, count in atoms.items())


def temperature_functions(temperature: Array, out: Array | None = None) -> Array:
    """The functions of T that the polynomials multiply, each kept only inside its range.

    temperature: K, (N,); returns (20, N): seven for 200-1000 K [1 1/t ln t t t2 t3 t4] with t = T / 1000 K, the same
    seven from 1000 to 6000 K, and [1 1/t ln t] below 200 K and again above 6000 K, where cp is held.
    """
    f = np.empty((FUNCTIONS, temperature.size)) if out is None else out
    range_functions(temperature, f[_LOW])
    upper, cold, hot = temperature >= MIDDLE, temperature < LOWEST, temperature > HIGHEST
    np.multiply(f[_HELD], cold, out=f[_COLD])
    np.multiply(f[_HELD], hot, out=f[_HOT])
    np.multiply(f[_LOW], upper & ~hot, out=f[_HIGH])
    f[_LOW] *= ~(upper | cold)
    return f


def range_functions(temperature: Array, out: Array) -> Array:
    """The seven functions of one range, whether or not T is inside it: `out` (7, N) filled from K, (N,)."""
    one, inverse, logarithm, t, square, cube, fourth = out
    one.fill(1.0)
    np.multiply(temperature, 1e-3, out=t)
    np.divide(1.0, t, out=inverse)
    np.log(t, out=logarithm)
    np.multiply(t, t, out=square)
    np.multiply(square, t, out=cube)
    np.multiply(square, square, out=fourth)
    return out


def range_of(temperature: Array) -> Codes:
    """Range code of each temperature (N,), K: inside 200-6000 K, extrapolated down to 150 K, else out of range."""
    at_least = 1.0 - ROUNDING
    inside = (temperature >= LOWEST * at_least) & (temperature <= HIGHEST / at_least)
    held = (temperature >= COLDEST * at_least) & ~inside & (temperature < LOWEST)
    return np.where(inside, INSIDE, np.where(held, EXTRAPOLATED, OUT_OF_RANGE))


def _range_rows(a: ArrayLike) -> Array:
    """(3, 7): h/RT, s/R and cp/R of one range as factors of [1 1/t ln t t t2 t3 t4], from its seven coefficients."""
    a = np.asarray(a, dtype=np.float64)
    h, s, cp = rows = np.zeros((3, 7))
    power = np.arange(1, 5)
    cp[0], cp[3:] = a[0], a[1:5] * 1e3**power
    h[0], h[1], h[3:] = a[0], a[5] / 1e3, cp[3:] / (power + 1)
    s[0], s[2], s[3:] = a[6] + a[0] * np.log(1e3), a[0], cp[3:] / power
    return rows


@cache
def listed_rows(species: str) -> Array:
    """(3, 20): h/RT, s/R (1 bar) and cp/R of a listed species as factors of `temperature_functions`. NASA TM-4513."""
    data = species_data()
    entry: dict[str, ArrayLike] = (data["species"] | data["condensed"])[species]  # type: ignore[assignment]
    low, high = _range_rows(entry["low"]), _range_rows(entry["high"])
    at_joint = temperature_functions(np.array([MIDDLE]))[_HIGH, 0]
    h_gap, s_gap, _ = (low - high) @ at_joint
    high[0, 1] += h_gap
    high[1, 0] += s_gap
    rows = np.hstack([low, high, _held(low, LOWEST), _held(high, HIGHEST)])
    rows.flags.writeable = False
    return rows


def _held(rows: Array, temperature: float) -> Array:
    """(3, 3): h/RT, s/R and cp/R as factors of [1 1/t ln t], cp held at its value at this end of a range."""
    t = temperature / 1e3
    h, s, cp = rows @ np.array([1.0, 1.0 / t, np.log(t), t, t**2, t**3, t**4])
    return np.array([[cp, (h - cp) * t, 0.0], [s - cp * np.log(t), 0.0, cp], [cp, 0.0, 0.0]])


def held_rows(enthalpy: float, entropy: float, specific_heat: float) -> Array:
    """(3, 20) of a species with constant cp; all in J/mol (J/(mol K)), enthalpy and entropy at 298.15 K and 1 bar."""
    h, s, cp = enthalpy / GAS_CONSTANT, entropy / GAS_CONSTANT, specific_heat / GAS_CONSTANT
    a = [cp, 0.0, 0.0, 0.0, 0.0, h - cp * REFERENCE_TEMPERATURE, s - cp * np.log(REFERENCE_TEMPERATURE)]
    rows = _range_rows(a)
    return np.hstack([rows, rows, rows[:, _HELD], rows[:, _HELD]])


def evaluate(rows: Array, temperature: ArrayLike) -> tuple[Array, Array, Array]:
    """h J/mol, s J/(mol K) at 1 bar, cp J/(mol K) from (3, 20) rows at temperature K of any shape, in that shape."""
    T = np.asarray(temperature, dtype=np.float64)
    h, s, cp = GAS_CONSTANT * (rows @ temperature_functions(T.ravel())).reshape(3, *T.shape)
    return h * T, s, cp


@dataclass(frozen=True, eq=False)
class SpeciesTable:
    """The species of a case. Row order: basis species, other reacting species, inert species.

    names (S,); basis: number K of basis species; reacting: number of reacting species, basis included; elements: of all
    species; atoms (S, E); molar_mass kg/mol (S,); in_basis (reacting, K): each reacting species as a sum of basis
    species with the same atoms; h, s, cp (S, 20): factors of `temperature_functions` for h/RT, s/R at 1 bar, cp/R;
    fuel: the fuel whose vapour is the last row, inert so that unburnt fuel shares T and p but does not react;
    fuel_in_basis (K,): the atoms of one mole of that fuel as moles of basis species.
    """

    names: tuple[str, ...]
    basis: int
    reacting: int
    elements: tuple[str, ...]
    atoms: Array
    molar_mass: Array
    in_basis: Array
    h: Array
    s: Array
    cp: Array
    fuel: Fuel | None
    fuel_in_basis: Array
    index: dict[str, int] = field(repr=False)
    whole: bool = True
    """Whether it is a table as made, not a part of one."""

    def __reduce__(self) -> tuple[Any, ...]:
        """Tables are kept once and known by identity: a pickled one is found again, or made again from its names."""
        if not self.whole:
            return SpeciesTable, tuple(getattr(self, f.name) for f in fields(self))
        last = len(self.names) - (self.fuel is not None)
        return _assembled, (self.names[: self.reacting], self.basis, self.names[self.reacting : last], self.fuel)

    @property
    def inert(self) -> int:
        """Number of inert species."""
        return len(self.names) - self.reacting

    def part(self, rows: Codes) -> SpeciesTable:
        """The table of the species `rows` alone, in order; those left out must hold a basis species that is left out."""
        basis = rows[rows < self.basis]
        names = tuple(self.names[i] for i in rows)
        reacting = int(np.sum(rows < self.reacting))
        return SpeciesTable(
            names, basis.size, reacting, self.elements, self.atoms[rows], self.molar_mass[rows],
            np.ascontiguousarray(self.in_basis[np.ix_(rows[:reacting], basis)]), self.h[rows], self.s[rows], self.cp[rows],
            self.fuel, self.fuel_in_basis[basis], {name: i for i, name in enumerate(names)}, False,
        )  # fmt: skip

    def moles(self, mole_fractions: Mapping[str, ArrayLike], n: int) -> Array:
        """(S, N) mol/kg from mole fractions (each scalar or (N,), scaled to a sum of 1). KeyError: unknown species."""
        x = np.zeros((len(self.names), n))
        for name, value in mole_fractions.items():
            x[self.index[name]] = value
        scaled: Array = x / (self.molar_mass @ x)
        return scaled


def unburnt_name(fuel: Fuel) -> str:
    """Name of the row of a fuel's unburnt vapour."""
    return f"unburnt {fuel.name}"


@lru_cache(maxsize=64)
def species_table(air_species: tuple[str, ...], fuel: Fuel | None = None, only: tuple[str, ...] | None = None) -> SpeciesTable:
    """The table for air of these species and this fuel.

    air_species: names of the air's constituents; those that cannot react (Ar, He ...) become inert rows. fuel: its atoms
    join the reacting set and its vapour becomes an inert row. only: restricts the reacting species to these names.
    The reacting set follows from the elements of these choices alone, never from values in a batch.
    Raises ValueError for an unknown air species, or where no basis can be formed (carbon or hydrogen without oxygen).
    """
    unknown = [name for name in air_species if name not in species_data()["species"]]
    if unknown:
        raise ValueError(f"no thermodynamic data for {', '.join(unknown)}")
    inert = [name for name in air_species if name not in REACTING]
    present = {element for name in air_species if name in REACTING for element in atoms_of(name)}
    if fuel is not None:
        present |= set(fuel.atoms)
    allowed = REACTING if only is None else only
    reacting = [name for name in allowed if set(atoms_of(name)) <= present]
    basis = _choose_basis(reacting, sorted(present))
    rest = [name for name in reacting if name not in basis]
    return _assembled((*basis, *rest), len(basis), tuple(inert), fuel)


def _choose_basis(reacting: list[str], elements: list[str]) -> list[str]:
    chosen: list[str] = []
    for name in PREFERRED_BASIS:
        rows = [[atoms_of(one).get(e, 0.0) for e in elements] for one in [*chosen, name]]
        if name in reacting and np.linalg.matrix_rank(rows) == len(rows):
            chosen.append(name)
    if len(chosen) < len(elements):
        raise ValueError(f"no stable basis species for the elements {' '.join(elements)}: is there oxygen?")
    return chosen


@lru_cache(maxsize=64)
def _assembled(reacting: tuple[str, ...], basis: int, inert: tuple[str, ...], fuel: Fuel | None) -> SpeciesTable:
    names = [*reacting, *inert]
    molecules = [atoms_of(name) for name in names]
    rows = [listed_rows(name) for name in names]
    if fuel is not None:
        names.append(unburnt_name(fuel))
        molecules.append(fuel.atoms)
        rows.append(fuel.vapour_rows())
    elements = tuple(sorted({e for molecule in molecules for e in molecule}))
    atoms = np.array([[molecule.get(e, 0.0) for e in elements] for molecule in molecules])
    to_basis = np.linalg.pinv(atoms[:basis])
    in_basis = np.round(atoms @ to_basis, 12)
    stacked = np.array(rows)
    return SpeciesTable(
        tuple(names), basis, len(reacting), elements, atoms, np.array([mass_of(m) for m in molecules]),
        in_basis[: len(reacting)].copy(), stacked[:, 0].copy(), stacked[:, 1].copy(), stacked[:, 2].copy(),
        fuel, in_basis[-1] if fuel is not None else np.zeros(basis), {name: i for i, name in enumerate(names)},
    )  # fmt: skip
