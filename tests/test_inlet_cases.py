"""Inlets by geometry as cases: the stream is axial at the burner, the lip lies where a lip can, flight beyond shock-on-lip is flagged."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import tomlkit

import cycle
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
    """The case above with tables changed key by key."""
    document = {name: GAMMA_CASE[name] for name in GAMMA_CASE}
    for name, table in tables.items():
        document[name] = {**GAMMA_CASE.get(name, {}), **table}
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
