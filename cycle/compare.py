"""Walks side by side: headline figures, stations and inputs, and how each differs from the first."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from cycle.glossary import ENTRY, HEAT, MARGINS
from cycle.quantities import GROUP, INPUTS, OUTPUTS, Input, Output, cell
from cycle.record import Json, case_value

Value = float | str | bool | None

DATUM = ("enthalpy", "total_enthalpy", "entropy", "thrust_potential")
"""Figures whose zero is a convention or whose value at the first station is zero: compared by difference, not by ratio."""

_GAS_DATUM = DATUM[:3]
_FLOW = ("0", "1", "2", "3", "4", "5", "9", "10")  # stations in the order of the flow


@dataclass(frozen=True, slots=True)
class Side:
    """One walk to compare. name: of its case or file; walk: its record; version and species_data: what computed it."""

    name: str
    walk: Json
    version: str
    species_data: str


@dataclass(frozen=True, slots=True)
class Figure:
    """An output on every side; values in SI, nan where a side has none. station: "" for a figure of the engine."""

    output: Output
    station: str
    values: tuple[float, ...]

    @property
    def relative(self) -> bool:
        """Whether a ratio of two values means anything."""
        return self.output.key not in DATUM

    def changes(self) -> tuple[float, ...]:
        """Difference of every side from the first: over the first where `relative`, else in SI; nan where there is none."""
        first = self.values[0]
        if not self.relative:
            return tuple(v - first for v in self.values)
        return tuple((v - first) / abs(first) if first else math.nan for v in self.values)


@dataclass(frozen=True, slots=True)
class Setting:
    """An input that is not the same on every side; None where a side does not use it."""

    input: Input
    values: tuple[Value | Mapping[str, float], ...]


@dataclass(frozen=True, slots=True)
class Comparison:
    """What `compare` found. headline, margins of the modes and stations hold every figure that any side has
    (but for enthalpy and entropy where the gas models have different datums); settings only those that differ;
    notes: sentences on what limits the comparison."""

    sides: tuple[Side, ...]
    headline: tuple[Figure, ...]
    margins: tuple[Figure, ...]
    stations: tuple[Figure, ...]
    settings: tuple[Setting, ...]
    notes: tuple[str, ...]


def compare(sides: Sequence[Side]) -> Comparison:
    """Set two or more walks side by side; the first is the one the others are measured against.

    sides: walks of one point, solved here or read back. Raises ValueError for fewer than two.
    """
    if len(sides) < 2:
        raise ValueError("a comparison needs two walks or more")
    outputs = [o for o in OUTPUTS if o.where == "performance"]
    headline = _figures(outputs, "", [side.walk["performance"] for side in sides])
    stations: list[Figure] = []
    figures = [o for o in OUTPUTS if o.where == "station" and not (o.key in _GAS_DATUM and _datums(sides) > 1)]
    for name in station_names(sides):
        stations += _figures(figures, name, [side.walk["stations"].get(name, {}) for side in sides])
    return Comparison(tuple(sides), tuple(headline), tuple(_margins(sides)), tuple(stations), _settings(sides), tuple(_notes(sides)))


def _datums(sides: Iterable[Side]) -> int:
    """How many enthalpy and entropy datums there are: constant gamma has its own."""
    return len({side.walk["case"].get("gas", {}).get("model") == "constant-gamma" for side in sides})


def station_names(sides: Iterable[Side]) -> tuple[str, ...]:
    """Stations that any side has, in the order of the flow."""
    names = {name for side in sides for name in side.walk["stations"]}
    return tuple(sorted(names, key=lambda n: (_FLOW.index(n) if n in _FLOW else len(_FLOW), n)))


def _figures(outputs: Iterable[Output], station: str, tables: Sequence[Json]) -> list[Figure]:
    rows = (Figure(o, station, tuple(_figure(table.get(o.key)) for table in tables)) for o in outputs)
    return [row for row in rows if not all(math.isnan(v) for v in row.values)]


def _margins(sides: Sequence[Side]) -> list[Figure]:
    """Margins of the modes, and the heat at which each mode ends where every side's heat is the same input."""
    isolators: list[Json] = [next((p["figures"] for p in s.walk["processes"] if p.get("name") == "isolator"), {}) for s in sides]
    found = _figures([ENTRY[f"process.{key}"] for key in MARGINS], "", [{f"process.{k}": v for k, v in f.items()} for f in isolators])
    heats = {frozenset(s.walk["case"].get("combustor", {})) & _HEATS for s in sides}
    if len(heats) == 1:
        found += _figures(HEAT, "", [{f"heat.{k}": v for k, v in s.walk.get("heat_limits", {}).items()} for s in sides])
    return found


_HEATS = frozenset(key.rpartition(".")[2] for member in GROUP["combustor.heat"].members for key in member.keys)


def _figure(value: Any) -> float:
    return math.nan if value is None else float(value)


def _settings(sides: Sequence[Side]) -> tuple[Setting, ...]:
    cases = [side.walk["case"] for side in sides]
    rows = (row for entry in INPUTS for row in _setting(entry, [case_value(case, entry) for case in cases]))
    return tuple(row for row in rows if any(v != row.values[0] for v in row.values))


def _setting(entry: Input, values: Sequence[Any]) -> Iterable[Setting]:
    """An input with its values, or its cells where it has rows."""
    if entry.kind != "rows":
        yield Setting(entry, tuple(values))
        return
    tables = [value or [] for value in values]
    for i in range(max(map(len, tables))):
        for column in entry.columns:
            cells = tuple(table[i].get(column.key) if i < len(table) else None for table in tables)
            yield Setting(cell(entry.key, i + 1, column.key), cells)


def _notes(sides: Sequence[Side]) -> Iterable[str]:
    if len({s.version for s in sides}) > 1:
        yield "The walks were computed by different versions: " + _each(sides, lambda s: s.version) + "."
    if len({s.species_data for s in sides}) > 1:
        yield "The walks were computed with different species data: " + _each(sides, lambda s: s.species_data[:12]) + "."
    if _datums(sides) > 1:
        yield "Enthalpy and entropy are not compared: constant gamma has a datum of its own."
    for side in sides:
        if side.walk["status"] != "solved":
            yield f"{side.name} has no solution: {side.walk.get('reason') or side.walk['status']}"


def _each(sides: Sequence[Side], say: Callable[[Side], str]) -> str:
    return "; ".join(f"{side.name}: {say(side)}" for side in sides)
