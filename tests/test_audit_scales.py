"""The audit of streams whose enthalpy or entropy is next to nothing: no alarm without a fault, and a millionth is still seen."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest

import cycle
from cycle import audit
from cycle.arrays import Array

RIG = """format = 1
title = "slow rig, invented"
[entry]
mach = 0.001
pressure = "100 kPa"
temperature = "298.15 K"
area = 0.01
[gas]
model = "{model}"
[fuel]
name = "hydrogen"
[combustor]
process = "{process}"
fuel_air_ratio = 0.0
"""
MODELS = ("constant-gamma", "frozen", "equilibrium")
FIGURES = (
    "temperature", "pressure", "velocity", "area", "mass_flow", "density", "enthalpy", "entropy", "total_enthalpy", "mach",
    "sound_speed", "stream_thrust", "dynamic_pressure", "molar_mass",
)  # fmt: skip


def rig(model: str, process: str) -> cycle.Case:
    return cycle.loads(RIG.format(model=model, process=process))


@pytest.mark.parametrize("model", MODELS)
@pytest.mark.parametrize("process", ["constant-area", "constant-pressure"])
@pytest.mark.parametrize("standard", [True, False])
def test_random_slow_rigs_pass_the_audit(model: str, process: str, standard: bool) -> None:
    """Mach 1e-4 to 5; at 298.15 K, where the enthalpy of air vanishes, or at any temperature; no fuel, traces, or some."""
    rng, n = np.random.default_rng(3), 300
    walk = cycle.solve(
        rig(model, process),
        {
            "entry.mach": 10.0 ** rng.uniform(-4.0, 0.7, n),
            "entry.temperature": np.full(n, 298.15) if standard else rng.uniform(150.0, 1500.0, n),
            "entry.pressure": 10.0 ** rng.uniform(3.0, 6.0, n),
            "combustor.fuel_air_ratio": np.where(rng.uniform(size=n) < 0.4, 0.0, 10.0 ** rng.uniform(-9.0, -2.0, n)),
        },
    )
    assert (walk.status == "solved").sum() > 0.9 * n and set(walk.status.tolist()) <= {"solved", "choked"}
    assert walk.audit.ok, walk.audit.worst
    assert float(walk.audit.worst.value) < 1e-11


def natural(figure: str, station: dict[str, Array]) -> Array:
    """Size of a change that must be seen: of the figure, or where that counts from a datum of what does not vanish."""
    size = np.abs(station[figure])
    gas_constant = station["pressure"] / (station["density"] * station["temperature"])
    beside = {"enthalpy": gas_constant * station["temperature"], "total_enthalpy": gas_constant * station["temperature"]}
    return np.maximum(size, beside.get(figure, gas_constant if figure == "entropy" else 0.0))


@pytest.mark.parametrize("model", MODELS)
@pytest.mark.parametrize("mach", [1e-3, 0.4, 3.0])
@pytest.mark.parametrize("temperature", [298.15, 900.0])
def test_a_millionth_of_any_audited_figure_fails(model: str, mach: float, temperature: float) -> None:
    """Mutants: each figure of each station, up and down; and with fuel that burns."""
    case = rig(model, "constant-pressure").replace({"entry.mach": mach, "entry.temperature": temperature})
    for ratio in (0.0, 0.004):
        walk = cycle.solve(case.replace({"combustor.fuel_air_ratio": ratio}))
        honest = walk.emitted()
        assert walk.status == "solved" and walk.judge(honest).ok
        for name, station in honest.stations.items():
            for figure in FIGURES:
                for step in (1e-6, -1e-6):
                    changed = {**station, figure: station[figure] + step * natural(figure, dict(station))}
                    forged = dataclasses.replace(honest, stations={**honest.stations, name: changed})
                    found = walk.judge(forged)
                    assert not found.ok, (name, figure, step, found.worst)


def test_energy_that_is_missing_is_seen_in_a_cold_slow_rig() -> None:
    """A millionth of the flow work, kept from the burner's exit by a colder stream that agrees with itself."""
    walk = cycle.solve(rig("frozen", "constant-pressure"))
    honest = walk.emitted()
    crossing = honest.processes[-1]
    lost = 1e-6 * honest.stations["4"]["mass_flow"] * honest.stations["4"]["pressure"] / honest.stations["4"]["density"]
    forged = dataclasses.replace(honest, processes=[*honest.processes[:-1], dataclasses.replace(crossing, energy_added=lost)])
    assert [r.law for r in walk.judge(forged).rows if r.value > audit.LIMIT] == ["energy"]
