"""Inlets by geometry as cases: the stream is axial at the burner, the lip lies where a lip can, flight beyond shock-on-lip is flagged."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import tomlkit

import cycle
from cycle.case.moves import moved
from cycle.flow import shocks

CASES = Path(__file__).parents[1] / "cases"

GAMMA_CASE: dict[str, Any] = {
    "format": 1,
    "gas": {"model": "constant-gamma"},
    "flight": {"mach": 6.0, "altitude": "26 km"},
    "inlet": {"ramp": [{"angle": "6 deg"}, {"angle": "7 deg"}]},
    "fuel": {"heating_value": "120 MJ/kg"},
    "combustor": {"process": "constant-area", "fuel_air_ratio": 0.008},
    "nozzle": {"exit_area_over_capture": 1.4},
    "engine": {"capture_area": "0.35 m^2"},
}


def case_with(**tables: Any) -> cycle.Case:
    """The case above with another inlet, or other tables changed key by key."""
    document = {name: GAMMA_CASE[name] for name in GAMMA_CASE}
    for name, table in tables.items():
        document[name] = table if name == "inlet" else {**GAMMA_CASE.get(name, {}), **table}
    return cycle.loads(tomlkit.dumps(document), "invented")


def refusal(**tables: Any) -> str:
    with pytest.raises(cycle.CaseError) as error:
        case_with(**tables)
    (fault,) = error.value.faults
    return str(fault)


# the cowl turns the stream back


def test_a_cowl_that_does_not_turn_is_no_thrust() -> None:
    """A lip along the ramp leaves the turn to the second shock, which is then the only one: the same engine as without a stated angle."""
    whole, along = cycle.solve(case_with()), cycle.solve(case_with(inlet={**GAMMA_CASE["inlet"], "cowl_angle": 0.0}))
    assert along.performance.thrust == pytest.approx(whole.performance.thrust, rel=1e-12)


def test_two_cowl_shocks_are_those_of_the_closed_law() -> None:
    case = case_with(inlet={**GAMMA_CASE["inlet"], "cowl_angle": "8 deg"})
    walk = cycle.solve(case)
    gamma = 1004.5 / (1004.5 - 287.0)
    mach, total = 6.0, 1.0
    for turn in (6.0, 7.0, 8.0, 5.0):
        shock = shocks.oblique_shock(mach, math.radians(turn), gamma)
        mach, total = float(shock.mach), total * float(shock.total_pressure_ratio)
    assert walk.station["2"].mach == pytest.approx(mach, rel=1e-9)
    assert walk.station["2"].total_pressure / walk.station["0"].total_pressure == pytest.approx(total, rel=1e-9)


@pytest.mark.parametrize("inlet", [GAMMA_CASE["inlet"], {"cone": {"half_angle": "14 deg"}}, {"isentropic_ramp": {"turning": "12 deg"}}])
def test_the_stream_is_axial_at_the_burner_whatever_the_cowl(inlet: dict[str, Any]) -> None:
    """Random search over cowl angles and Mach numbers: stream thrust at 2 is m u + p A, nothing is left to be turned for nothing."""
    document = {**GAMMA_CASE, "inlet": {**inlet, "cowl_angle": 0.1}}
    rng = np.random.default_rng(3)
    walk = cycle.solve(
        cycle.loads(tomlkit.dumps(document), "invented"),
        {"inlet.cowl_angle": rng.uniform(0.0, 0.3, 200), "flight.mach": rng.uniform(4.0, 9.0, 200)},
    )
    two = walk.station["2"]
    reached = np.isfinite(two.mach)
    axial = two.mass_flow * two.velocity + two.pressure * two.area
    assert reached.sum() > 150
    assert np.allclose(two.stream_thrust[reached], axial[reached], rtol=1e-13)
    assert (two.entropy[reached] > walk.station["1"].entropy[reached]).all()


def test_shipped_conical_inlet_still_holds_its_shock() -> None:
    walk = cycle.solve(cycle.load(CASES / "lighthouse.toml"))
    assert walk.status == "solved" and walk.mode == "ramjet-supercritical"


# where a lip can stand

THREE = {"ramp": [{"angle": "6 deg", "length": 0.9}, {"angle": "7 deg", "length": 0.9}, {"angle": "5 deg"}], "lip_x": 2.0, "lip_y": 0.6}
TWO = {"ramp": [{"angle": "6 deg", "length": 0.9}, {"angle": "7 deg"}], "lip_x": 1.8, "lip_y": 0.52}
CONE = {"cone": {"half_angle": "14 deg"}, "lip_x": 0.9, "lip_y": 0.35}
CIRCLE = math.pi * 0.35**2


def test_a_lip_under_an_earlier_ramp_is_refused() -> None:
    """Upstream of the third corner and under the second ramp, but above the line of the third: it would capture less than nothing."""
    walk = cycle.solve(case_with(inlet={**THREE, "lip_x": 1.2, "lip_y": 0.13}))
    assert walk.status == "lip-blocked"


def test_random_lips_capture_between_nothing_and_all() -> None:
    rng, n = np.random.default_rng(11), 3000
    changes = {"inlet.lip_x": rng.uniform(0.0, 4.0, n), "inlet.lip_y": rng.uniform(1e-3, 1.5, n), "flight.mach": rng.uniform(3.0, 10.0, n)}
    walk = cycle.solve(case_with(inlet=THREE), changes)
    captured, found = walk.performance.captured_mass_fraction, walk.station["1"]
    there = np.isfinite(found.mach)
    fraction = np.where(there, walk.station["0"].area / 0.35, np.nan)[there]
    assert there.sum() > 1000 and set(walk.status) == {"solved", "choked", "lip-blocked", "waves-merge"}
    assert ((fraction > 0.0) & (fraction <= 1.0 + 1e-12)).all() and (found.mass_flow[there] > 0.0).all()
    beyond = _limit(walk, "shock_on_lip").margin[there] < 0.0
    assert beyond.sum() > 100 and np.allclose(fraction[beyond], 1.0, rtol=0.0, atol=1e-12)
    assert np.isfinite(captured[walk.status == "solved"]).all()


def _limit(walk: cycle.Walk, key: str) -> Any:
    return next(row for row in walk.limits if row.key == key)


@pytest.mark.parametrize(("inlet", "area"), [(TWO, 0.35), (CONE, CIRCLE)])
def test_flight_above_shock_on_lip_is_flagged_and_spills_nothing(inlet: dict[str, Any], area: float) -> None:
    case = case_with(inlet=inlet, engine={"capture_area": area})
    row = _limit(cycle.solve(case), "shock_on_lip")
    assert row.state in ("ok", "near", "over") and row.actual == pytest.approx(6.0, rel=1e-12)
    below, above = (cycle.solve(case.replace({"flight.mach": factor * row.allowed})) for factor in (0.98, 1.02))
    assert (_limit(below, "shock_on_lip").state, _limit(above, "shock_on_lip").state) == ("near", "over")
    flows = [walk.station["0"].area / area for walk in (below, above)]
    assert flows[0] < 1.0 - 1e-3 and flows[1] == pytest.approx(1.0, abs=1e-12)
    first = next(iter(above.processes)).figures.wave_angle_1
    assert first < math.atan2(inlet["lip_y"], inlet["lip_x"])


def test_without_a_lip_shock_on_lip_is_not_assessed() -> None:
    row = _limit(cycle.solve(case_with()), "shock_on_lip")
    assert row.state == "not assessed" and row.restore == "needs the inlet's lip"


@pytest.mark.parametrize("name", ["breakwater", "lighthouse", "tidegate"])
def test_shipped_cases_fly_below_shock_on_lip(name: str) -> None:
    assert _limit(cycle.solve(cycle.load(CASES / f"{name}.toml")), "shock_on_lip").margin > 0.0


def test_capture_area_that_is_not_the_lip_of_a_cone_is_refused() -> None:
    assert refusal(inlet=CONE).startswith(
        "invented: engine.capture_area: not the circle of the cone's lip: given 0.35 m2 with inlet.lip_y = 0.35 m"
    )
    case = case_with(inlet=CONE, engine={"capture_area": CIRCLE})
    with pytest.raises(cycle.CaseError, match="at every point"):
        cycle.solve(case, {"inlet.lip_y": np.array([0.35, 0.36])})
    both = cycle.solve(case, {"inlet.lip_y": np.array([0.35, 0.36]), "engine.capture_area": math.pi * np.array([0.35, 0.36]) ** 2})
    assert both.shape == (2,)


def test_capture_area_of_a_cone_that_states_none_is_its_lip() -> None:
    document = {name: table for name, table in GAMMA_CASE.items() if name != "engine"} | {"inlet": CONE}
    case = cycle.loads(tomlkit.dumps(document), "invented")
    assert case.numbers["engine.capture_area"] == pytest.approx(CIRCLE, rel=1e-15)
    walk = cycle.solve(case, {"inlet.lip_y": np.array([0.35, 0.4])})
    areas = walk.station["0"].area / walk.performance.captured_mass_fraction
    assert areas == pytest.approx(math.pi * np.array([0.35, 0.4]) ** 2, rel=1e-12)


def test_a_cone_keeps_its_shape_when_its_capture_area_moves() -> None:
    case = case_with(inlet=CONE, engine={"capture_area": CIRCLE})
    larger = moved(case, {"engine.capture_area": 4.0 * CIRCLE})
    assert larger == pytest.approx({"engine.capture_area": 4.0 * CIRCLE, "inlet.lip_x": 1.8, "inlet.lip_y": 0.7})
    assert moved(case, {"inlet.lip_y": 0.7}) == pytest.approx({"engine.capture_area": 4.0 * CIRCLE, "inlet.lip_y": 0.7})
