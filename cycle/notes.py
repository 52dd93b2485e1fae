"""What is to be known of a solution beside its figures, as sentences: fuel that is heated for nothing."""

from __future__ import annotations

import math
from dataclasses import dataclass

from cycle.arrays import Array
from cycle.constants import REFERENCE_TEMPERATURE
from cycle.units import format_number, show
from cycle.walk import March

STORAGE = REFERENCE_TEMPERATURE
"""Temperature at which a fuel is stored, K: ambient, for gases and liquids; common practice."""

ALLOWANCE = 20.0
"""Warmth above storage that a hot day or a pump may give, K; common practice."""


@dataclass(frozen=True, slots=True)
class HeatedFuel:
    """Fuel above its storage temperature though no wall gives it that heat.

    temperature: of the fuel, K; impulse: specific impulse, s; stored: that of the same case with the fuel at `STORAGE`, NaN where it
    has none; status: of that case.
    """

    temperature: float
    impulse: float
    stored: float
    status: str
    key: str = "heated_fuel"

    @property
    def gain(self) -> float:
        """What the heat of the fuel adds to the specific impulse, s."""
        return self.impulse - self.stored

    def words(self, system: str = "si") -> str:
        """The note as a sentence. system: of the units, "si" or "us"."""
        now, cold = (_told(value, "temperature", system, 5) for value in (self.temperature, STORAGE))
        start = f"The fuel enters at {now}, stored it has {cold}, and no wall gives it that heat"
        if math.isnan(self.stored):
            return f"{start}: as stored there is no solution, {self.status}."
        share = format_number(100.0 * abs(self.gain / self.stored), 3)
        does = "adds" if self.gain > 0.0 else "takes"
        to = "to" if self.gain > 0.0 else "from"
        return f"{start}: it {does} {_told(abs(self.gain), 'time', system)} ({share} %) {to} the specific impulse."


def _told(value: float, dimension: str, system: str, digits: int = 4) -> str:
    shown, unit = show(value, dimension, system)
    return f"{format_number(shown, digits)} {unit}"


def heats_fuel(march: March, wall_heat: Array) -> bool:
    """Whether the one point of a march is a solved flight whose fuel is warmer than stored with no heat from a wall: wall_heat W (N,)."""
    warm = march.setting["fuel.temperature"][0] > STORAGE + ALLOWANCE
    return bool(warm and march.solved.size and march.chain[0] == "flight" and not wall_heat[0] > 0.0)
