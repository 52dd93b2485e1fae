"""Constant gamma: cp and R are numbers of the case, enthalpy is cp T. The textbook gas."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Self

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.constants import REFERENCE_TEMPERATURE
from cycle.gas.base import FixedGas, Gas, inside_everywhere

if TYPE_CHECKING:
    from cycle.gas.fuels import Fuel


@dataclass(frozen=True)
class ConstantGas(FixedGas):
    """h = cp T, s = cp ln(T / 298.15 K) - R ln(p / 1 bar).

    cp, gas_constant: J/(kg K), (N,). combustion: the pair that holds once fuel is added, expansion: in the nozzle; None
    keeps this one.
    """

    cp: Array
    gas_constant: Array
    species: tuple[str, ...] = ()

    @property
    def composition(self) -> Array:  # type: ignore[override]
        """No species: (0, N)."""
        return np.empty((0, self.size))

    def caloric(self, temperature: Array) -> tuple[Array, Array, Array]:
        """h = cp T, s and cp: see the class."""
        return self.cp * temperature, self.cp * np.log(temperature / REFERENCE_TEMPERATURE), self.cp

    def range_of(self, temperature: Array) -> Codes:
        """Inside everywhere."""
        return inside_everywhere(temperature)

    @property
    def temperatures(self) -> tuple[float, float]:
        """No data limit it; what asks for less than nothing lies beyond."""
        return 1e-6, 1e9

    def take(self, index: Codes | Flags) -> Self:
        """The gas of the chosen points."""
        return type(self)(self.cp[index], self.gas_constant[index])

    def fuelled(self, fuel: Fuel, ratio: Array, burnt: Array) -> Gas:
        """This gas itself: a change of heat capacity is `with_cp`."""
        return self

    def with_cp(self, cp: Array) -> ConstantGas:
        """The gas after a change of pair at the same R; (N,) J/(kg K)."""
        return ConstantGas(np.broadcast_to(cp, self.cp.shape), self.gas_constant)
