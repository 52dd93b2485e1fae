"""Inlet losses beside the shocks: the correlation of kinetic-energy efficiency, and friction at the throat of an inlet by geometry."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

import cycle
from cycle.flow import limits
from tests.case_files import case_file
from tests.random_flowpath import one_point

CASES = Path(__file__).parents[1] / "cases"
MERIT = cycle.load(case_file("plain")).replace({"inlet.viscous_correlation": True})
RAMPS = cycle.load(CASES / "breakwater.toml")
POINTS = 200
ENDS = {"pressure_ratio": (5.0, 60.0), "contraction_ratio": (2.0, 8.0), "exit_mach": (2.5, 4.0), "temperature_ratio": (1.5, 5.0)}


def row(walk: cycle.Walk, key: str) -> Any:
    return next(limit for limit in walk.limits if limit.key == key)


def process(walk: cycle.Walk, name: str) -> Any:
    return next(p for p in walk.processes if p.name == name).figures


# the correlation


@pytest.mark.parametrize("model", ["equilibrium", "constant-gamma"])
@pytest.mark.parametrize("end", ENDS)
def test_efficiency_and_end_of_the_compression_agree(end: str, model: str) -> None:
    """Random search: kinetic energy at p0 of the emitted station 2 against the correlation at its own Mach number."""
    case = MERIT.replace({"gas.model": model, "nozzle.chemistry": None} if model != "equilibrium" else {"nozzle.chemistry": "shifting"})
    rng, (low, high) = np.random.default_rng(5), ENDS[end]
    case = case.replace({f"inlet.{end}": low})
    walk = cycle.solve(case, {f"inlet.{end}": rng.uniform(low, high, POINTS), "flight.mach": rng.uniform(5.0, 10.0, POINTS)})
    two, flight = walk.march.stations()["2"], walk.march.records[0].taken(walk.march.stations()["2"].index).stream
    back = two.stream.gas.at("sp", two.stream.state.entropy, flight.state.pressure)
    kept = (two.stream.total_enthalpy - back.enthalpy) / (0.5 * flight.velocity**2)
    assert two.index.size > POINTS / 4
    assert kept == pytest.approx(1.0 - 0.4 * (1.0 - two.stream.mach / flight.mach) ** 4, abs=1e-11)
    assert walk.audit.ok and "not-converged" not in set(walk.status)


def test_correlation_beyond_its_range_is_flagged() -> None:
    case = MERIT.replace({"inlet.exit_mach": 4.0})
    walk = cycle.solve(case, {"inlet.exit_mach": np.array([2.0, 4.0, 6.0])})
    found = row(walk, "viscous_data")
    assert found.actual == pytest.approx(np.array([2.0, 4.0, 6.0]) / 8.0, rel=1e-9)
    assert list(found.state) == ["over", "ok", "over"]
    assert list(found.allowed) == [limits.MACH_LOSS_DATA.low, limits.MACH_LOSS_DATA.high, limits.MACH_LOSS_DATA.high]
    assert not any(limit.key == "viscous_data" for limit in cycle.solve(RAMPS).limits)


def test_a_compression_that_the_correlation_does_not_reach_is_named() -> None:
    """The slower, the worse, the hotter: at Mach 8 no efficiency of the correlation belongs to a pressure ratio of 75."""
    walk = cycle.solve(MERIT)
    assert MERIT.numbers["inlet.pressure_ratio"] == 75.0
    assert walk.status == "over-compressed"


# friction at the throat


@pytest.mark.parametrize("value", [0.4, 0.7, 1.0])
def test_viscous_recovery_is_the_ratio_of_total_pressures(value: float) -> None:
    plain, walk = cycle.solve(RAMPS), cycle.solve(RAMPS.replace({"inlet.viscous_recovery": value}))
    assert walk.station["2"].total_pressure / plain.station["2"].total_pressure == pytest.approx(value, rel=1e-9)
    assert process(walk, "viscous loss").total_pressure_ratio == pytest.approx(value, rel=1e-9)
    shocks = process(plain, "internal compression").total_pressure_ratio
    assert process(walk, "internal compression").total_pressure_ratio == pytest.approx(shocks, rel=1e-9)


def test_viscous_efficiency_is_a_share_of_the_kinetic_energy() -> None:
    plain, walk = cycle.solve(RAMPS), cycle.solve(RAMPS.replace({"inlet.viscous_efficiency": 0.985}))
    energy = []
    for one in (plain, walk):
        stream = one.march.stations()["2"].stream
        back = stream.gas.at("sp", stream.state.entropy, one.march.ambient_pressure(np.array([0])))
        energy.append(stream.total_enthalpy[0] - back.enthalpy[0])
    assert energy[1] / energy[0] == pytest.approx(0.985, rel=1e-10)


@pytest.mark.parametrize("changes", [{"inlet.viscous_recovery": 0.6}, {"inlet.viscous_efficiency": 0.985}], ids=str)
def test_loss_keeps_mass_energy_and_area_and_is_booked_on_its_own(changes: dict[str, float]) -> None:
    plain, walk = cycle.solve(RAMPS), cycle.solve(RAMPS.replace(changes))
    for key in ("mass_flow", "area", "total_enthalpy"):
        assert walk.station["2"][key] == pytest.approx(plain.station["2"][key], rel=1e-10), key
    told = process(walk, "viscous loss")
    assert told.entropy_rise > 0.0
    assert told.viscous_force == pytest.approx(plain.station["2"].stream_thrust - walk.station["2"].stream_thrust, rel=1e-9)
    losses, before = ({r.key: r.value for r in one.losses} for one in (walk, plain))
    assert losses["inlet"] == pytest.approx(before["inlet"], rel=1e-9) and losses["viscous_loss"] > 100.0
    assert "viscous_loss" not in before
    assert {r.key: r.value for r in walk.potentials}["viscous_loss"] < -100.0
    assert one_point(walk) == []


def test_more_friction_never_gives_thrust() -> None:
    walk = cycle.solve(RAMPS.replace({"inlet.viscous_recovery": 0.9}), {"inlet.viscous_recovery": np.linspace(0.3, 1.0, 15)})
    solved = walk.status == "solved"
    assert solved.sum() > 8 and (np.diff(walk.performance.thrust[solved]) > 0.0).all()


def test_friction_that_the_throat_does_not_pass_is_named() -> None:
    walk = cycle.solve(RAMPS.replace({"inlet.viscous_recovery": 0.01}))
    assert walk.status == "over-contracted" and walk.failed_process == "viscous loss"


def test_friction_is_stated_once_and_not_behind_a_terminal_shock() -> None:
    with pytest.raises(cycle.CaseError, match="friction of the inlet is stated more than once"):
        cycle.loads(RAMPS.text.replace("lip_x", "viscous_recovery = 0.9\nviscous_efficiency = 0.98\nlip_x"))
    with pytest.raises(cycle.CaseError, match=r"inlet.viscous_recovery: not used with"):
        cycle.loads(RAMPS.text.replace("lip_x", "viscous_recovery = 0.9\nterminal_shock = true\nlip_x"))
