"""A composition that the inlet held is released ahead of the burner: a process of its own, with what it gives and takes."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

import cycle
from cycle.gas.referee import deviation
from cycle.walk import RELEASED
from tests.random_flowpath import one_point

CASES = Path(__file__).parents[1] / "cases"


def shipped(name: str, changes: dict[str, Any] | None = None) -> cycle.Walk:
    return cycle.solve(cycle.load(CASES / f"{name}.toml").replace(changes or {}))


def process(walk: cycle.Walk, name: str) -> Any:
    return next(p for p in walk.processes if p.name == name)


HELD = {
    "attached duct": ("tidegate", {"flight.mach": 5.5}, "2"),
    "thermal throat": ("tidegate", {}, "2"),
    "constant pressure": ("heron", {}, "3"),
    "constant area": ("saltmarsh", {"inlet.chemistry": "frozen"}, "3"),
}


@pytest.mark.parametrize(("name", "changes", "station"), HELD.values(), ids=HELD)
def test_release_is_a_process_of_its_own_that_balances(name: str, changes: dict[str, Any], station: str) -> None:
    walk = shipped(name, changes)
    found = process(walk, RELEASED)
    assert (found.start, found.end) == (station, station)
    assert found.figures.entropy_rise >= 0.0 and found.figures.total_pressure_ratio > 1.0 + 1e-6
    after = next(r for r in walk.march.records if r.process.name == RELEASED)
    before = walk.march.records[walk.march.records.index(after) - 1].stream
    for key in ("mass_flow", "area", "stream_thrust", "total_enthalpy"):
        assert getattr(after.stream, key) == pytest.approx(getattr(before, key), rel=1e-10), key
    assert one_point(walk) == []


@pytest.mark.parametrize(("name", "changes", "station"), HELD.values(), ids=HELD)
def test_released_stream_is_in_the_equilibrium_of_cantera(name: str, changes: dict[str, Any], station: str) -> None:
    record = next(r for r in shipped(name, changes).march.records if r.process.name == RELEASED)
    found = deviation(record.stream.gas, record.stream.state, "hp")
    assert found.compared == 1
    assert found.temperature < 1e-6 and found.mole_fraction < 1e-6


@pytest.mark.parametrize("mach", [5.0, 6.0, 7.0])
def test_an_isolator_that_does_nothing_shows_nothing(mach: float) -> None:
    """Attached flow without friction: it gained up to the release's total pressure before."""
    walk = shipped("tidegate", {"flight.mach": mach, "combustor.equivalence_ratio": 0.3})
    assert walk.mode == "scramjet"
    assert process(walk, "isolator").figures.total_pressure_ratio == pytest.approx(1.0, abs=1e-10)
    losses = {row.key: row.value for row in walk.losses}
    assert losses["isolator"] == pytest.approx(0.0, abs=1e-6 * losses["ideal"])
    assert losses["composition_released"] < 0.0


def test_total_pressures_of_the_processes_lead_from_flight_to_burner_exit() -> None:
    walk = shipped("tidegate")
    ratios = [float(p.figures.total_pressure_ratio) for p in walk.processes]
    ends = walk.station["10"].total_pressure / walk.station["0"].total_pressure
    assert np.prod(ratios) == pytest.approx(ends, rel=1e-12)


NOTHING_HELD = {
    "equilibrium inlet": ("tidegate", {"inlet.chemistry": "equilibrium"}),
    "frozen gas": ("saltmarsh", {"gas.model": "frozen"}),
    "constant gamma": ("saltmarsh", {"gas.model": "constant-gamma", "combustor.equivalence_ratio": None, "combustor.fuel_air_ratio": 0.01}),
    "rig": ("bench-three", {}),
}


@pytest.mark.parametrize(("name", "changes"), NOTHING_HELD.values(), ids=NOTHING_HELD)
def test_without_a_held_composition_there_is_no_such_process(name: str, changes: dict[str, Any]) -> None:
    case = cycle.load(CASES / f"{name}.toml")
    if case.choices["start"] == "flight" and changes.get("gas.model"):
        changes = {**changes, "nozzle.chemistry": None}
    walk = cycle.solve(case.replace(changes))
    assert RELEASED not in walk.march.chain and RELEASED not in [p.name for p in walk.processes]
    assert "composition_released" not in [row.key for row in (*walk.losses, *walk.potentials)]
