"""Invariants of whole walks: conservation and second law by the audit, accounts that close, one point and its twin."""

from __future__ import annotations

import dataclasses
import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import cycle
from cycle import audit, limits
from cycle.quantities import MODES, STATUSES
from tests.case_files import case_file
from tests.random_cases import random_case, written

CASES = Path(__file__).parents[1] / "cases"
SHOWN = (
    "mach", "pressure", "temperature", "density", "velocity", "sound_speed", "enthalpy", "entropy", "area", "mass_flow", "stream_thrust",
)  # fmt: skip


def shipped(name: str) -> cycle.Walk:
    return cycle.solve(cycle.load(case_file(name)))


def closes(rows: tuple[Any, ...], total: float) -> None:
    scale = sum(abs(r.value) for r in rows)
    assert math.fsum(r.value for r in rows) == pytest.approx(total, abs=1e-11 * scale)


@settings(max_examples=50, deadline=None)
@given(st.integers(0, 100_000))
def test_random_case_ends_in_an_audited_walk_or_a_named_status(seed: int) -> None:
    """Every station that a walk shows passes mass, momentum, energy, elements and second law at 1e-9; accounts close."""
    walk = cycle.solve(cycle.loads(written(random_case(seed)), str(seed)))
    assert walk.status in STATUSES and walk.mode in MODES
    assert walk.status != "not-converged", walk.reason
    assert walk.audit.ok, walk.audit.worst
    for station in walk.station.values():
        assert all(math.isfinite(station[key]) for key in SHOWN)
    if walk.status != "solved":
        assert walk.reason and math.isnan(walk.performance.thrust)
        assert "10" not in walk.station
        return
    assert math.isfinite(walk.performance.thrust) and not walk.reason
    closes(walk.potentials[:-1], walk.potentials[-1].value)
    if walk.losses:
        closes(walk.losses[1:], walk.losses[0].value)
    if walk.exergy:
        closes(walk.exergy[1:], walk.exergy[0].value)


@settings(max_examples=12, deadline=None)
@given(st.integers(0, 100_000), st.integers(2, 40))
def test_point_equals_its_twin_in_a_batch(seed: int, others: int) -> None:
    """The contract: one point equals its twin inside a batch to 1e-10, whatever its neighbours are."""
    case = cycle.loads(written(random_case(seed)), str(seed))
    one = cycle.solve(case)
    rng = np.random.default_rng(seed)
    burnt = np.concatenate([[case.numbers["combustor.burnt_fraction"]], rng.uniform(0.5, 1.0, others)])
    area = np.concatenate([[case.numbers["engine.capture_area"]], rng.uniform(0.1, 1.0, others)])
    batch = cycle.solve(case, {"combustor.burnt_fraction": burnt, "engine.capture_area": area})
    assert batch.shape == (others + 1,) and batch.status[0] == one.status
    for name, station in one.station.items():
        for key in SHOWN:
            assert batch.station[name][key][0] == pytest.approx(station[key], rel=1e-10), (name, key)
    if one.status == "solved":
        scale = one.station["0"].stream_thrust  # thrust is a difference of stream thrusts
        assert batch.performance.thrust[0] == pytest.approx(one.performance.thrust, abs=1e-10 * scale)


def test_batch_keeps_the_broadcast_shape_and_its_failures() -> None:
    """A map of Mach number against equivalence ratio: choked points have a status and no value, the rest are whole."""
    case = cycle.load(CASES / "narrows.toml")
    mach, phi = np.array([5.0, 6.0, 8.0, 10.0])[:, None], np.linspace(0.1, 0.9, 5)[None, :]
    walk = cycle.solve(case, {"flight.mach": mach, "combustor.equivalence_ratio": phi})
    assert walk.shape == (4, 5) == walk.status.shape == walk.performance.thrust.shape
    solved = walk.status == "solved"
    assert solved.any() and (~solved).any()
    assert np.array_equal(np.isfinite(walk.performance.thrust), solved)
    assert np.isfinite(walk.station["3"].pressure).all()
    assert np.array_equal(np.isfinite(walk.station["4"].pressure), solved)
    assert walk.audit.ok
    # choking comes with more heat and goes with more speed
    assert all(np.diff(row.astype(int)).max(initial=-1) <= 0 for row in solved)


def test_largest_equivalence_ratio_is_where_choking_begins() -> None:
    walk = shipped("narrows")
    assert walk.status == "choked" and walk.mode == "none"
    most = walk.largest_heat()
    assert f"largest equivalence ratio here {most:.4g}" in walk.reason
    around = cycle.solve(walk.case, {"combustor.equivalence_ratio": np.array([most * (1 - 1e-6), most * (1 + 1e-6)])})
    assert around.status.tolist() == ["solved", "choked"]
    assert around.station["4"].mach[0] == pytest.approx(1.0, abs=5e-3)


def test_frozen_and_shifting_expansion_part_where_the_gas_dissociates() -> None:
    """The Mach 12 case: recombination pays; the difference is the frozen-chemistry row."""
    frozen = shipped("lantern")
    shifting = cycle.solve(frozen.case.replace({"nozzle.chemistry": "shifting"}))
    lost = next(r.value for r in frozen.potentials if r.key == "frozen_chemistry")
    assert lost < -500.0
    assert shifting.performance.thrust - frozen.performance.thrust > 500.0


def test_potential_starts_at_nothing_and_falls_but_in_the_burner() -> None:
    walk = shipped("plain")
    assert walk.station["0"].thrust_potential == pytest.approx(0.0, abs=1e-9 * walk.station["0"].stream_thrust)
    rows = {r.key: r.value for r in walk.potentials}
    assert rows["inlet"] < 0.0 < rows["burner"] and rows["nozzle"] < 0.0 and rows["pressure_mismatch"] < 0.0
    assert walk.performance.specific_impulse == pytest.approx(walk.performance.thrust / (9.80665 * walk.performance.fuel_flow), rel=1e-14)


def test_rig_has_burner_figures_and_no_thrust() -> None:
    walk = shipped("bench-three")
    assert walk.mode == "rig" and "0" not in walk.station and "10" not in walk.station
    assert math.isnan(walk.performance.thrust) and walk.why_not("thrust") == "a rig has no flight thrust"
    drag = 0.5 * walk.station["3"].mass_flow * walk.station["3"].velocity * 0.03
    assert walk.performance.stream_thrust_gain == pytest.approx(-drag, rel=1e-9)


def test_throat_is_sonic_and_passes_the_flow() -> None:
    walk = shipped("sandbar")
    five = walk.station["5"]
    assert walk.mode == "ramjet-critical" and five.mach == pytest.approx(1.0, rel=1e-9)
    assert five.area * five.density * five.sound_speed == pytest.approx(five.mass_flow, rel=1e-9)
    assert walk.station["10"].mach > 1.5


def test_friction_and_wall_heat_take_from_impulse_and_energy() -> None:
    """Constant area: the stream thrust falls by friction alone; the total enthalpy flow by the wall heat alone."""
    case = cycle.load(case_file("plain"))
    plain = cycle.solve(case)
    lossy = cycle.solve(case.replace({"combustor.friction_area_ratio": 0.05, "combustor.wall_heat": "2 MW"}))
    s = plain.station["3"]
    drop = plain.station["4"].stream_thrust - lossy.station["4"].stream_thrust
    assert drop == pytest.approx(0.5 * 0.05 * s.mass_flow * s.velocity, rel=1e-9)
    a, b = plain.station["4"], lossy.station["4"]
    assert a.mass_flow * a.total_enthalpy - b.mass_flow * b.total_enthalpy == pytest.approx(2e6, rel=1e-9)


STATION_FIGURES = (
    "temperature", "pressure", "velocity", "area", "mass_flow", "density", "enthalpy", "entropy", "total_enthalpy", "mach",
    "sound_speed", "stream_thrust", "dynamic_pressure",
)  # fmt: skip


@pytest.mark.parametrize("station", ["0", "3", "4", "10"])
@pytest.mark.parametrize("figure", STATION_FIGURES)
def test_audit_fails_when_one_emitted_figure_is_off_by_a_millionth(station: str, figure: str) -> None:
    walk = shipped("plain")
    honest = walk.emitted()
    assert walk.judge(honest).ok
    changed = {**honest.stations[station], figure: honest.stations[station][figure] * (1.0 + 1e-6)}
    forged = dataclasses.replace(honest, stations={**honest.stations, station: changed})
    assert not walk.judge(forged).ok


@pytest.mark.parametrize("figure", ["thrust", "specific_thrust", "specific_impulse"])
def test_audit_fails_when_the_headline_is_off_by_a_millionth(figure: str) -> None:
    walk = shipped("plain")
    honest = walk.emitted()
    forged = dataclasses.replace(honest, performance={**honest.performance, figure: honest.performance[figure] * (1.0 + 1e-6)})
    assert not walk.judge(forged).ok


def test_audit_fails_when_the_composition_is_off_by_a_millionth() -> None:
    walk = shipped("plain")
    honest = walk.emitted()
    for row in np.flatnonzero(honest.fractions["4"][:, 0] > 1e-3):
        x = honest.fractions["4"].copy()
        x[row] *= 1.0 + 1e-6
        assert not walk.judge(dataclasses.replace(honest, fractions={**honest.fractions, "4": x})).ok
    assert audit.LIMIT == 1e-9


def test_audit_sees_a_second_law_violation() -> None:
    """An inlet that made entropy vanish: same enthalpy at a higher pressure, area kept by the mass flow."""
    walk = shipped("plain")
    honest = walk.emitted()
    free, two = honest.stations["0"], honest.stations["2"]
    pressure = two["pressure"] * np.exp((two["entropy"] - free["entropy"] + 5.0) / (8.314 / 0.028964))
    changed = {**two, "pressure": pressure, "area": two["area"] * two["pressure"] / pressure}
    forged = dataclasses.replace(honest, stations={**honest.stations, "2": changed})
    laws = [r.law for r in walk.judge(forged).rows if r.where == "inlet 0 to 2" and r.value > audit.LIMIT]
    assert laws == ["second law"]


def test_limits_speak_of_what_is_not_assessed() -> None:
    found = {row.key: row for row in shipped("plain").limits}
    assert found["start"].state == found["isolator_length"].state == "not assessed" and found["start"].restore
    assert found["ignition_temperature"].state == "over" and found["ignition_temperature"].margin < 0.0
    assert found["thermal_choking"].margin == pytest.approx(1.0 - 0.6 / found["thermal_choking"].allowed, rel=1e-12)
    assert limits.state_of(0.05) == "near" and limits.state_of(0.5) == "ok"
    subsonic = {row.key: row for row in shipped("sandbar").limits}
    assert subsonic["ignition_temperature"].state == "not assessed"


def test_fuel_below_the_burner_pressure_is_over_its_limit_and_has_no_exergy() -> None:
    """At 84 kPa ahead of the fuel: too low, high enough, and both in a batch; the walk itself does not depend on it."""
    case = cycle.load(case_file("plain"))
    batch = cycle.solve(case, {"fuel.supply_pressure": np.array([5e4, 2e6])})
    limit = next(row for row in batch.limits if row.key == "fuel_supply")
    assert list(limit.state) == ["over", "ok"] and limit.input == "fuel.supply_pressure"
    assert limit.actual == pytest.approx(batch.station["3"]["pressure"]) and list(limit.allowed) == [5e4, 2e6]
    assert batch.audit.ok
    exergy = {row.key: row.value for row in batch.exergy}
    assert all(np.isnan(exergy[key][0]) and exergy[key][1] > 0.0 for key in ("input", "entropy_made"))
    low = cycle.solve(case.replace({"fuel.supply_pressure": 5e4}))
    assert not low.exergy and "above the burner's" in low.why_not("exergy")
    assert low.performance.thrust == pytest.approx(batch.performance.thrust[1], rel=1e-12)
    assert next(row for row in shipped("bench-three").limits if row.key == "fuel_supply").restore == "fuel.supply_pressure is not given"


def test_fuel_far_below_the_burner_pressure_does_not_fail_the_second_law() -> None:
    """Fuel at 5 MPa for a burner at 4.5 GPa: the limit says that it cannot enter, the audit judges the burner."""
    walk = cycle.solve(cycle.loads(written(random_case(9176)), "fuel at 5 MPa"))
    limit = next(row for row in walk.limits if row.key == "fuel_supply")
    assert walk.status == "solved" and limit.actual > 4e9 and limit.allowed == 5e6 and limit.state == "over"
    assert walk.audit.ok, walk.audit.worst


def test_fuel_of_a_duct_enters_against_the_wall_pressure_at_its_injectors() -> None:
    walk = shipped("tidegate")
    limit = next(row for row in walk.limits if row.key == "fuel_supply")
    places = [row["x"] for row in walk.case.rows["combustor.injector"]]
    along = np.interp(places, walk.profile["x"], walk.profile["pressure"])
    assert limit.actual == pytest.approx(along.max(), rel=1e-12)
    assert limit.actual >= walk.station["3"]["pressure"]


@pytest.mark.parametrize("name", ["saltmarsh", "heron", "lantern", "sandbar", "bench-three"])
def test_referee_agrees_on_the_shipped_cases(name: str) -> None:
    """Cantera from our (h, p) or (s, p), same data: T 1e-4 K, mole fractions 1e-8, sound speed 1e-6 (finite difference)."""
    report = shipped(name).referee()
    assert report.agrees, report.words
    assert report.compared >= 2
    for row in report.rows:
        assert not row.temperature > 1e-4 and not row.mole_fraction > 1e-8 and not row.sound_speed > 1e-6, row


def test_a_batch_without_any_solution_says_why_it_has_no_figures() -> None:
    """Not even the burner is reached: there is no fuel flow to ask about."""
    walk = cycle.solve(cycle.load(case_file("plain")), {"inlet.pressure_ratio": [1e4, 2e4]})
    assert not walk.march.solved.size and "burner" not in {p.name for p in walk.processes}
    assert {walk.why_not(key) for key in ("thrust", "specific_impulse", "throat_area", "losses")} == {"no solution"}
