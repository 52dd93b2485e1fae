"""What is to be known of a solution beside its figures, as sentences: what was asked for and is not met, what the model leaves out, fuel
that is heated for nothing."""

from __future__ import annotations

import math
from dataclasses import dataclass

from cycle.arrays import Array
from cycle.constants import REFERENCE_TEMPERATURE
from cycle.gas.fuels import oxygen_need
from cycle.gas.species import atoms_of
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
    unit: str = "time"

    @property
    def gain(self) -> float:
        """What the heat of the fuel adds to the specific impulse, s."""
        return self.impulse - self.stored

    @property
    def value(self) -> float:
        """What is stored of the note: the gain."""
        return self.gain

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


@dataclass(frozen=True, slots=True)
class Remark:
    """What a solution does that its inputs do not show.

    key: of `REMARKS`; value: what came of it; against: what it is held against, NaN where nothing is; unit: dimension of both.
    """

    key: str
    value: float
    against: float = math.nan
    unit: str = "ratio"

    def words(self, system: str = "si") -> str:
        """The note as a sentence. system: of the units, "si" or "us"."""
        value, against = (_told(x, self.unit, system) for x in (self.value, self.against))
        return REMARKS[self.key].format(value=value, against=against)


REMARKS = {
    "over_expanded": "The internal nozzle ends at {value}, below the exit pressure of {against} asked for: nothing expands outside it.",
    "inert_air": "The gas is frozen: the combustibles of the entering stream, {value} of its moles, do not burn.",
    "several_places": "The core would fill the duct and fit the thermal throat at {value} places; the first, from the entry, is taken.",
    "beyond_fuel": "Thrust power is {value} of the fuel's heating value: more than the fuel brings, so the inputs cannot all be true.",
}
"""Key of a remark -> its sentence."""


def remarks(march: March, efficiency: float) -> tuple[Remark, ...]:
    """What is to be remarked of a solution of one point; efficiency: its overall efficiency, NaN where it has none."""
    if not march.solved.size:
        return ()
    found = []
    over = march.figure("nozzle", "over_expanded")
    if over[0] == 1.0:
        nine = march.stations()["9"].stream.state.pressure[0]
        ideal = march.setting.choices["nozzle.exit"] == "ideal"
        asked = march.ambient_pressure(march.solved) if ideal else march.setting["nozzle.exit_pressure"]
        found.append(Remark("over_expanded", float(nine), float(asked[0]), "pressure"))
    own = sum(x for name, x in march.setting.air.items() if oxygen_need(atoms_of(name)) > 0.0)
    if march.setting.choices["gas.model"] == "frozen" and own > 0.0:
        found.append(Remark("inert_air", own))
    places = march.figure("burner", "reattachments")[0]
    if places > 1.0:
        found.append(Remark("several_places", float(places)))
    if efficiency > 1.0:
        found.append(Remark("beyond_fuel", efficiency))
    return tuple(found)


def _told(value: float, dimension: str, system: str, digits: int = 4) -> str:
    shown, unit = show(value, dimension, system)
    return f"{format_number(shown, digits)} {unit}".rstrip()


def heats_fuel(march: March, wall_heat: Array) -> bool:
    """Whether the one point of a march is a solved flight whose fuel is warmer than stored with no heat from a wall: wall_heat W (N,)."""
    warm = march.setting["fuel.temperature"][0] > STORAGE + ALLOWANCE
    return bool(warm and march.solved.size and march.chain[0] == "flight" and not wall_heat[0] > 0.0)
