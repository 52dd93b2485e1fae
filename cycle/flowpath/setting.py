"""What a case asks, as arrays over the points of a batch: the only thing components read."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.constants import STANDARD_AIR
from cycle.gas.fuels import FUELS, Fuel, user_fuel
from cycle.gas.species import SpeciesTable, species_table

if TYPE_CHECKING:
    from collections.abc import Callable


@dataclass(frozen=True, slots=True)
class Setting:
    """Inputs of N points: numbers by key, each (N,), SI; choices by key or group; the fuel; the species of the case.

    fuel is None where only a heating value is known; table is None at constant gamma.
    """

    size: int
    choices: Mapping[str, str]
    numbers: Mapping[str, Array]
    air: Mapping[str, float]
    fuel: Fuel | None
    table: SpeciesTable | None

    def __getitem__(self, key: str) -> Array:
        return self.numbers[key]

    def get(self, key: str, default: float) -> Array:
        """A number, or `default` where the case does not hold it; (N,)."""
        found = self.numbers.get(key)
        return np.full(self.size, default) if found is None else found

    def has(self, key: str) -> bool:
        """Whether the case holds a number."""
        return key in self.numbers

    def take(self, index: Codes | Flags) -> Setting:
        """The setting of the chosen points."""
        numbers = {k: v[index] for k, v in self.numbers.items()}
        size = int(np.zeros(self.size)[index].size)
        return Setting(size, self.choices, numbers, self.air, self.fuel, self.table)

    @property
    def constant_gamma(self) -> bool:
        """Whether the gas is the textbook one."""
        return self.choices["gas.model"] == "constant-gamma"

    @property
    def heating_value(self) -> Array:
        """Lower heating value of the fuel, J/kg, (N,)."""
        if self.fuel is None:
            return self["fuel.heating_value"]
        return np.full(self.size, self.fuel.lower_heating_value())

    @property
    def stoichiometric_ratio(self) -> Array:
        """Fuel-air ratio that burns all oxygen, (N,); NaN where the fuel has no formula. Dry composition of the case."""
        if self.fuel is None:
            return np.full(self.size, np.nan)
        return np.full(self.size, _stoichiometric_ratio(self.fuel, tuple(self.air.items())))


@lru_cache(maxsize=64)
def _stoichiometric_ratio(fuel: Fuel, air: tuple[tuple[str, float], ...]) -> float:
    """Asked for several times in a walk."""
    return float(fuel.stoichiometric_ratio(dict(air)))


def _by_formula(numbers: Mapping[str, float], choices: Mapping[str, str], texts: Mapping[str, str]) -> Fuel:
    given = {name: numbers.get(f"fuel.{name}") for name in _FUEL_NUMBERS}
    return user_fuel(texts["fuel.formula"], choices["fuel.phase"], **given)  # type: ignore[arg-type]


_FUEL_NUMBERS = (
    "formation_enthalpy", "heating_value", "vapour_specific_heat", "liquid_specific_heat", "heat_of_vaporisation",
    "standard_entropy",
)  # fmt: skip

_FIXED_IN_BATCH = tuple(f"fuel.{name}" for name in _FUEL_NUMBERS)
"""Numbers that make the fuel what it is where it has a formula: one value for a whole batch."""


def why_fixed(key: str, choices: Mapping[str, str]) -> str:
    """Why a number has one value for a whole batch, "" where it may vary. Parameters: key; choices of the case."""
    if key == "combustor.slices":
        return "the ducts of a batch are cut alike: slices cannot vary within a batch"
    own = key in _FIXED_IN_BATCH and choices["fuel.identity"] == "formula"
    return "what a fuel of your own is cannot vary within a batch" if own else ""


_IDENTITY: dict[str, Callable[[Mapping[str, float], Mapping[str, str], Mapping[str, str]], Fuel | None]] = {
    "name": lambda numbers, choices, texts: FUELS[choices["fuel.name"]],
    "formula": _by_formula,
    "heating_value": lambda numbers, choices, texts: None,
}


def setting(
    numbers: Mapping[str, float],
    choices: Mapping[str, str],
    texts: Mapping[str, str],
    fractions: Mapping[str, float],
    arrays: Mapping[str, Array],
    size: int,
) -> Setting:
    """The setting of `size` points: a case's numbers with `arrays` (each (size,), SI) in their place."""
    fuel = _IDENTITY[choices["fuel.identity"]](numbers, choices, texts)
    air = dict(fractions) or dict(STANDARD_AIR)
    rows = np.repeat(np.array([*numbers.values()], np.float64)[:, None], size, axis=1)
    spread = dict(zip(numbers, rows, strict=True)) | dict(arrays)
    table = None
    if choices["gas.model"] != "constant-gamma":
        wet = ("H2O",) if choices.get("air.moisture") == "relative_humidity" else ()
        table = species_table(tuple(dict.fromkeys((*air, *wet))), fuel)
    return Setting(size, choices, spread, air, fuel, table)
