"""Total and sonic states beyond the data: a reason stands wherever their figures have no value."""

from __future__ import annotations

import json
import math
from pathlib import Path

import numpy as np
import pytest

import cycle
from cycle.explain import find, numbers
from cycle.quantities import OUTPUTS, Output
from cycle.record import dumps, record
from tests.case_files import case_file
from tui.tables import as_text
from tui.text import walk_blocks

CASES = Path(__file__).parents[1] / "cases"
ABOVE_TOTAL, ABOVE_SONIC = (f"above the data: {name} temperature over 6000 K" for name in ("total", "sonic"))


def fast(model: str, mach: float) -> cycle.Case:
    other = {} if model == "equilibrium" else {"inlet.chemistry": None, "nozzle.chemistry": None}
    return cycle.load(case_file("plain")).replace({"gas.model": model, "flight.mach": mach, **other})


@pytest.mark.parametrize("model", ["frozen", "equilibrium"])
@pytest.mark.parametrize("mach", [13.0, 15.0, 20.0, 25.0, 30.0])
def test_every_blank_of_a_station_has_its_reason(model: str, mach: float) -> None:
    """The total temperature alone, then the sonic one too, then states whose own iteration leaves the data."""
    walk = cycle.solve(fast(model, mach))
    assert walk.status == "solved"
    plain = json.loads(dumps(record(walk)))
    blanks = {f"stations.{n}.{k}" for n, s in plain["stations"].items() for k, v in s.items() if v is None}
    assert blanks == {k for k in plain["reasons"] if k.startswith("stations.")}
    for key in blanks:
        expected = ABOVE_TOTAL if ".total_" in key else ABOVE_SONIC if ".critical_" in key else plain["reasons"][key]
        assert plain["reasons"][key] == expected
    # by the enthalpy of the air alone: at Mach 15 and above its rest is far beyond the data
    assert ("stations.0.total_temperature" in blanks) or mach < 15.0
    assert walk.why_not_at("0", "temperature") == ""


def test_reason_is_in_the_text_and_in_explain() -> None:
    case = fast("equilibrium", 15.0)
    walk = cycle.solve(case)
    total = next(o for o in find("total_temperature") if isinstance(o, Output))
    said = {n.where: n.reason for n in numbers(total, walk)}
    assert said["station 0"] == ABOVE_TOTAL and said["station 4"] == ""
    sonic = next(o for o in find("critical_area_ratio") if isinstance(o, Output))
    assert {n.where: n.reason for n in numbers(sonic, walk)}["station 0"] == ABOVE_SONIC
    words = " ".join(as_text(walk_blocks(walk, "si", False)).split())
    assert f"No value for total pressure, total temperature at station 0, 2, 3: {ABOVE_TOTAL}" in words
    assert f"at station 0, 2, 3: {ABOVE_SONIC}" in words


def test_temperature_rise_beyond_the_data_is_not_blamed_on_the_heat() -> None:
    assert cycle.solve(fast("equilibrium", 15.0)).why_not("total_temperature_rise_efficiency") == ABOVE_TOTAL


def test_sonic_state_below_the_data_and_a_rig_without_potential() -> None:
    rig = cycle.load(CASES / "bench-three.toml")
    cold = cycle.solve(rig.replace({"entry.mach": 0.001, "entry.temperature": 150.0, "combustor.wall_heat": 0.0}))
    assert cold.why_not_at("3", "critical_pressure") == "below the data: sonic temperature under 150 K"
    assert cold.why_not_at("3", "thrust_potential") == "a rig has no flight thrust"
    hot = cycle.solve(rig.replace({"entry.mach": 10.0, "entry.temperature": 4000.0, "combustor.process": "constant-pressure"}))
    assert hot.why_not_at("3", "total_pressure") == ABOVE_TOTAL


def test_in_a_batch_the_first_point_without_a_value_speaks() -> None:
    walk = cycle.solve(fast("equilibrium", 8.0), {"flight.mach": np.array([8.0, 16.0, 30.0])})
    assert walk.why_not_at("0", "total_temperature") == ABOVE_TOTAL
    some = cycle.solve(cycle.load(CASES / "narrows.toml"), {"combustor.equivalence_ratio": np.array([0.1, 0.9])})
    assert some.why_not_at("4", "pressure") == "no solution reaches this station"
    assert all(math.isfinite(some.station["3"][o.key][0]) for o in OUTPUTS if o.where == "station" and o.key.startswith("total_"))
