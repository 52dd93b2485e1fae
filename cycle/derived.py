"""What a march says when asked: figures of its stations, of its processes and of the performance, and what they share.

Nothing here knows the solution that shows it. Each figure is a function and its arguments, so that a solution is freed as soon as nobody
holds it, and can be pickled.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property, partial
from typing import Any

import numpy as np

from cycle import account, emit, heat, noise
from cycle.account import spread, usable
from cycle.arrays import Array, Codes
from cycle.flowpath import choking, combustor
from cycle.gas.state import State
from cycle.quantities import OUTPUTS
from cycle.resting import rest
from cycle.walk import RELEASED, March, Record

PERFORMANCE = tuple(o.key for o in OUTPUTS if o.where == "performance")
_STATION = tuple(o.key for o in OUTPUTS if o.where == "station")

Sources = dict[str, Callable[[], Array]]
"""Key of a figure -> what computes it, (N,)."""


class Derived:
    """A march, and what takes more solving or searching, each computed once, when first asked for.

    Pickled go the march and the ends of a search for heat; the rest is computed again where it is asked for.
    """

    def __init__(self, walked: March) -> None:
        self.march = walked

    def __getstate__(self) -> dict[str, Any]:
        return {name: value for name, value in vars(self).items() if name in ("march", "heat_ends", "largest_heat")}

    @cached_property
    def records(self) -> dict[str, Record]:
        """Station -> the record that first reached it."""
        return self.march.stations()

    @cached_property
    def totals(self) -> dict[str, State]:
        """Station -> stagnation state of the points that reached it."""
        return account.totals(self.march, tuple(self.records)) if self.records else {}

    @cached_property
    def critical(self) -> dict[str, State]:
        """Station -> sonic state of the points that reached it."""
        return account.criticals(self.march, tuple(self.records)) if self.records else {}

    @cached_property
    def potentials(self) -> list[Array]:
        """Thrust potential behind each record, N, each (N,)."""
        return account.potentials(self.march)

    @cached_property
    def thrust_scale(self) -> Array:
        """The largest stream thrust of each point (N,), N: potentials are differences of these."""
        thrusts = [spread(self.march, r.index, r.stream.stream_thrust) for r in self.march.records]
        return np.asarray(noise.largest(thrusts))

    @cached_property
    def performance(self) -> dict[str, Array]:
        """The headline figures that take no further state."""
        return account.performance(self.march)

    @property
    def has_duct(self) -> bool:
        """Whether the burner is a duct."""
        return self.march.setting.choices["combustor.process"] == "duct"

    @cached_property
    def largest_heat(self) -> float:
        """Largest heat input before a simple burner chokes, SI, of one point; NaN where nothing chokes."""
        return np.nan if "3" not in self.records or self.has_duct else heat.largest_before_choking(self.march)

    @cached_property
    def heat_ends(self) -> dict[str, tuple[Array, Codes]]:
        """Heat at which the modes of a duct end, SI, and what sets each end; {} where the burner is no duct."""
        return heat.ends_of_modes(self.march) if self.has_duct else {}

    @property
    def known_ends(self) -> dict[str, tuple[Array, Codes]]:
        """`heat_ends` where they have been asked for, else {}."""
        found: dict[str, tuple[Array, Codes]] = vars(self).get("heat_ends", {})
        return found

    def total_of(self, position: int, station: str, points: Codes) -> State:
        """Stagnation state of `points` at a station; of the record itself where the station's own figures lie before or behind it."""
        record = self.march.records[position]
        if record.process.name in (RELEASED, "internal compression", "gas change"):
            return rest(record.taken(points).stream)
        return self.totals[station].take(np.searchsorted(self.records[station].index, points))


def performance_sources(of: Derived) -> Sources:
    """The headline figures, NaN where one has no value."""
    return {key: partial(_performance, of, key) for key in PERFORMANCE}


def _performance(of: Derived, key: str) -> Array:
    if key == "total_temperature_rise_efficiency":
        return account.temperature_rise_efficiency(of.march, of.totals)
    if key == "nozzle_thrust_coefficient":
        return account.nozzle_thrust_coefficient(of.march, of.potentials)
    found = of.performance.get(key)
    return np.full(of.march.setting.size, np.nan) if found is None else found


def station_sources(of: Derived, name: str) -> Sources:
    """Figures of a station over all points of the march, NaN where a point did not reach it."""
    sources: Sources = {
        **emit.station_sources(of.march, of.records[name]),
        "total_pressure": partial(_rest, of, name, "pressure"),
        "total_temperature": partial(_rest, of, name, "temperature"),
        "critical_pressure": partial(_sonic, of, name, "pressure"),
        "critical_temperature": partial(_sonic, of, name, "temperature"),
        "critical_area_ratio": partial(_over_sonic, of, name),
        "thrust_potential": partial(_potential, of, name),
    }
    return {key: sources[key] for key in _STATION if key in sources}


def _rest(of: Derived, name: str, field: str) -> Array:
    total = of.totals[name]
    return spread(of.march, of.records[name].index, usable(total, getattr(total, field)))


def _sonic(of: Derived, name: str, field: str) -> Array:
    sonic = of.critical[name]
    return spread(of.march, of.records[name].index, usable(sonic, getattr(sonic, field)))


def _over_sonic(of: Derived, name: str) -> Array:
    sonic, record = of.critical[name], of.records[name]
    return spread(of.march, record.index, usable(sonic, sonic.density * sonic.sound_speed / record.stream.flux))


def _potential(of: Derived, name: str) -> Array:
    if not of.potentials:
        return np.full(of.march.setting.size, np.nan)
    at = next(i for i, r in enumerate(of.march.records) if r is of.records[name])
    return np.asarray(noise.settled(of.potentials[at], of.thrust_scale))


def process_sources(of: Derived, position: int) -> Sources:
    """What the process of a record did, over all points of the march, NaN where a point did not come through it."""
    march, record = of.march, of.march.records[position]
    sources: Sources = {
        "total_pressure_ratio": partial(_total_ratio, of, position),
        "pressure_ratio": partial(_ratio, march, position, "pressure"),
        "temperature_ratio": partial(_ratio, march, position, "temperature"),
        "entropy_rise": partial(_entropy_rise, march, position),
    }
    if march.chain[0] == "flight":
        sources["thrust_potential_change"] = partial(_potential_change, of, position)
    process = record.process
    sources |= {k: partial(march.figure_of, record, k) for k in process.figures}
    heated = "fuel_air_ratio" in process.figures and process.solves_momentum
    if heated and march.setting.choices["combustor.process"] == "constant-area":
        sources["choking_margin"] = partial(_choking_margin, march, position)
    if process.booking is not None:
        sources |= {k: partial(spread, march, record.index, getattr(process.booking, k)) for k in process.booking.__slots__}
    return sources


def _ends(march: March, position: int) -> tuple[Codes, State, State]:
    """Points that came through a process, and their states before and behind it."""
    record = march.records[position]
    return record.index, march.records[position - 1].taken(record.index).stream.state, record.stream.state


def _ratio(march: March, position: int, field: str) -> Array:
    index, before, after = _ends(march, position)
    return spread(march, index, getattr(after, field) / getattr(before, field))


def _entropy_rise(march: March, position: int) -> Array:
    index, before, after = _ends(march, position)
    return spread(march, index, noise.change(after.entropy, before.entropy))


def _total_ratio(of: Derived, position: int) -> Array:
    record = of.march.records[position]
    first = of.total_of(position - 1, record.process.start, record.index)
    last = of.total_of(position, record.process.end, record.index)
    return spread(of.march, record.index, usable(first, usable(last, last.pressure / first.pressure)))


def _potential_change(of: Derived, position: int) -> Array:
    return np.asarray(noise.settled(of.potentials[position] - of.potentials[position - 1], of.thrust_scale))


def _choking_margin(march: March, position: int) -> Array:
    """Room left before the burner chokes; the sonic point behind it is dear, so the march itself does without."""
    record = march.records[position]
    setting = march.setting.take(record.index)
    entering = march.records[position - 1].taken(record.index).stream
    margin = choking.choking_margin(combustor.burner_gas(entering, setting), setting, record.process.figures["fuel_air_ratio"])
    return spread(march, record.index, margin)


def fractions(of: Derived, name: str) -> dict[str, Array]:
    """Species -> mole fraction at a station over all points of the march."""
    record = of.records[name]
    x = emit.fractions(record.stream)
    return {species: spread(of.march, record.index, x[j]) for j, species in enumerate(record.stream.gas.species)}
