"""Heat of a stated power through the wall of a duct: all of it leaves, with fuel or without, evenly along the duct."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

import cycle
from cycle.flow import rayleigh
from cycle.gas.fuels import FUELS

TIDEGATE = cycle.load(Path(__file__).parents[1] / "cases" / "tidegate.toml")
PIPE = """format = 1
title = "cooled pipe, invented"
[entry]
station = "2"
mach = 2.5
pressure = "60 kPa"
temperature = "700 K"
area = 0.02
[gas]
model = "constant-gamma"
fuel_energy = "mass-only"
[fuel]
name = "hydrogen"
[combustor]
process = "duct"
fuel_air_ratio = 0.0
wall_heat = "400 kW"
[[combustor.area]]
x = 0.0
area_ratio = 1.0
[[combustor.area]]
x = 1.2
area_ratio = 1.0
[[combustor.injector]]
x = 0.0
"""


def test_cooled_pipe_without_fuel_is_the_rayleigh_line_at_every_place() -> None:
    walk = cycle.solve(cycle.loads(PIPE))
    gamma = 1004.5 / (1004.5 - 287.0)
    total = walk.station["2"].total_enthalpy
    x, mach = walk.profile["x"], walk.profile["mach"]
    left = 1.0 - 400e3 / walk.station["2"].mass_flow * x / 1.2 / total
    expected = rayleigh.mach_from_total_temperature(rayleigh.total_temperature_ratio(2.5, gamma) * left, gamma, supersonic=True)
    assert x[-1] == pytest.approx(1.2, rel=1e-15) and np.abs(mach / expected - 1.0).max() < 1e-10
    assert walk.station["4"].total_enthalpy == pytest.approx(total * left[-1], rel=1e-12)
    assert walk.audit.ok


def test_stated_power_is_continuous_as_the_fuel_goes_to_zero() -> None:
    phi = np.array([0.0, 1e-12, 1e-9, 1e-6, 1e-3])
    cooled, plain = (
        cycle.solve(TIDEGATE.replace({"combustor.wall_heat": heat}), {"combustor.equivalence_ratio": phi, "flight.mach": 6.0})
        for heat in ("800 kW", 0.0)
    )
    assert (cooled.status == "solved").all() and cooled.audit.ok
    lost = plain.station["4"].total_enthalpy * plain.station["4"].mass_flow - cooled.station["4"].total_enthalpy * (
        cooled.station["4"].mass_flow
    )
    assert np.abs(lost / 800e3 - 1.0).max() < 1e-7
    mach = cooled.station["4"].mach
    assert np.abs(np.diff(mach))[:3].max() < 1e-4 and np.all(mach > plain.station["4"].mach)


@pytest.mark.parametrize("model", ["constant-gamma", "frozen", "equilibrium"])
def test_random_ducts_lose_the_power_that_is_stated(model: str) -> None:
    """Any mode, any fuel flow, none among them: the audit's energy closes, and the exit has the enthalpy that is left."""
    rng, n = np.random.default_rng(4), 60
    start = {"gas.model": model} | ({} if model == "equilibrium" else {"nozzle.chemistry": None, "inlet.chemistry": None})
    phi = np.where(rng.uniform(size=n) < 0.3, 0.0, rng.uniform(0.0, 0.9, n))
    heat = rng.uniform(0.0, 3e6, n)
    walk = cycle.solve(
        TIDEGATE.replace(start), {"combustor.equivalence_ratio": phi, "combustor.wall_heat": heat, "flight.mach": rng.uniform(4.0, 7.0, n)}
    )
    solved = walk.status == "solved"
    assert solved.sum() > n // 2 and walk.audit.ok, walk.audit.worst
    burner = next(p for p in walk.processes if p.name == "burner")
    assert np.abs(burner.figures["wall_heat"] / heat - 1.0)[solved].max() < 1e-12
    before, after = walk.station["2"], walk.station["4"]
    if model == "constant-gamma":
        return
    brought = FUELS["ethylene"].total_enthalpy(450.0) * walk.performance.fuel_flow
    left = before.mass_flow * before.total_enthalpy + brought - heat
    scale = np.abs(before.mass_flow * before.total_enthalpy) + np.abs(brought)
    assert (np.abs(after.mass_flow * after.total_enthalpy - left) / scale)[solved].max() < 1e-9


@pytest.mark.parametrize(("model", "excess"), [("constant-gamma", ""), ("frozen", ""), ("equilibrium", "inert"), ("equilibrium", "reacts")])
def test_wall_heat_fraction_is_of_the_heat_released_above_stoichiometric_too(model: str, excess: str) -> None:
    """Of the fuel that the oxygen allows, where no other burns: heating value, burnt fraction and fuel flow make it."""
    start = {"gas.model": model, "combustor.wall_heat_fraction": 0.1, "combustor.burnt_fraction": 0.5}
    start |= {"combustor.excess_fuel": excess} if excess else {"nozzle.chemistry": None, "inlet.chemistry": None}
    phi = np.array([0.5, 1.0, 1.4, 2.0])
    walk = cycle.solve(TIDEGATE.replace(start), {"combustor.equivalence_ratio": phi, "flight.mach": 8.0})
    burner = next(p for p in walk.processes if p.name == "burner")
    burnt = 1.0 if excess == "reacts" else np.minimum(1.0, 1.0 / phi)
    expected = 0.1 * walk.performance.heating_value * 0.5 * burnt * walk.performance.fuel_flow
    assert (walk.status == "solved").all() and walk.audit.ok
    assert np.abs(burner.figures["wall_heat"] / expected - 1.0).max() < 1e-12
