"""Self-ignition by fuel, the slow ignition of hydrogen, and separation in a burner of constant area."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import cycle
from cycle.case import differences, json_schema, template
from cycle.limit_solving import solve_for_limit
from cycle.quantities import INPUT
from cycle.record import dumps, record
from tests.case_files import case_file
from tui.entries import facts
from tui.figures import assess, take
from tui.text import limit_words

CASES = Path(__file__).parents[1] / "cases"
RIG, SALTMARSH = cycle.load(CASES / "bench-three.toml"), cycle.load(case_file("plain"))
KEY = "limits.ignition_temperature"
OWN = {
    "fuel.name": None, "fuel.formula": "C7H16", "fuel.phase": "gas", "fuel.heating_value": 44.6e6, "fuel.vapour_specific_heat": 2e3,
}  # fmt: skip


def row(walk: cycle.Walk, key: str) -> Any:
    return next(r for r in walk.limits if r.key == key)


@pytest.mark.parametrize(
    ("fuel", "least"),
    [("hydrogen", 1000.0), ("methane", 1400.0), ("ethylene", 1200.0), ("propane", 1250.0), ("kerosene", 1200.0), ("jp-10", 1200.0)],
)
def test_threshold_of_self_ignition_is_that_of_the_fuel(fuel: str, least: float) -> None:
    case = RIG.replace({"fuel.name": fuel})
    assert case.numbers[KEY] == least and KEY not in case.given
    assert row(cycle.solve(case), "ignition_temperature").allowed == least
    assert case.replace({KEY: 900.0}).numbers[KEY] == 900.0
    assert case.replace({KEY: 900.0}).replace({KEY: None}).numbers[KEY] == least


def test_fuel_of_ones_own_has_the_stated_default() -> None:
    assert RIG.replace(OWN).numbers[KEY] == 1200.0
    alone = {"fuel.name": None, "fuel.heating_value": 43e6, "combustor.fuel_air_ratio": 0.02, "gas.model": "constant-gamma"}
    assert RIG.replace({**alone, "air.mole_fractions": None}).numbers[KEY] == 1200.0


def test_defaults_by_fuel_are_said_where_inputs_are_told() -> None:
    assert dict(INPUT[KEY].by_fuel)["methane"] >= 1400.0 and INPUT[KEY].source == "common practice"
    described = json_schema()["$defs"]["Limits"]["properties"]["ignition_temperature"]
    words = "hydrogen 1000, methane 1400, ethylene 1200, propane 1250, kerosene 1200, jp-10 1200, any other fuel 1200 K"
    assert words in described["description"] and "default" not in described
    assert words in " ".join(template("flight").replace("\n#  ", "").split())
    assert dict(facts(INPUT[KEY], "si"))["default"] == words


def test_another_fuel_is_not_another_threshold_too() -> None:
    other = RIG.replace({"fuel.name": "ethylene"})
    assert [key for key, _, _ in differences(RIG, other)] == ["fuel.name"]
    assert KEY in [key for key, _, _ in differences(RIG.replace({KEY: 1000.0}), other)]


def test_row_says_that_it_is_a_threshold() -> None:
    walk = cycle.solve(RIG)
    assert "a threshold, not a delay" in limit_words(row(walk, "ignition_temperature"), "si")
    ample = cycle.solve(RIG.replace({"entry.temperature": 1300.0}))
    assert row(ample, "ignition_temperature").state == "ok"
    assert "a threshold, not a delay" in limit_words(row(ample, "ignition_temperature"), "si")
    told = json.loads(dumps(record(walk)))["limits"]
    assert next(r for r in told if r["key"] == "ignition_temperature")["note"] == "a threshold, not a delay"
    shown = next(m for m in assess(take(ample)).limits if m.key == "ignition_temperature")
    assert "a threshold, not a delay" in shown.restore


def test_hydrogen_beyond_its_second_limit_is_warned_of() -> None:
    """Above 100 kPa and below 1050 K only; not of another fuel, nor of a subsonic burner."""
    grid = {"entry.pressure": np.array([80e3, 99e3, 101e3, 300e3])[:, None], "entry.temperature": np.array([1010.0, 1049.0, 1051.0])}
    found = row(cycle.solve(RIG, grid), "slow_ignition")
    assert found.state.tolist() == [["not assessed"] * 3] * 2 + [["over", "over", "near"]] * 2
    dense = RIG.replace({"entry.pressure": 300e3, "entry.temperature": 1020.0})
    words = limit_words(row(cycle.solve(dense), "slow_ignition"), "si")
    assert words.startswith("OVER: slow ignition of hydrogen") and "above 100 kPa" in words
    assert "second limit" in row(cycle.solve(RIG), "slow_ignition").restore
    assert not [r for r in cycle.solve(dense.replace({"fuel.name": "ethylene"})).limits if r.key == "slow_ignition"]
    slow = cycle.solve(dense.replace({"entry.mach": 0.3}))
    assert row(slow, "slow_ignition").state == row(slow, "ignition_temperature").state == "not assessed"


def test_constant_area_burner_separates_as_a_duct_does() -> None:
    """Against Korkegi's relation of Mach 3 written out here, over random heats and entries."""
    rng = np.random.default_rng(12)
    n = 200
    walk = cycle.solve(
        RIG, {"entry.mach": rng.uniform(1.5, 6.0, n), "combustor.equivalence_ratio": rng.uniform(0.0, 0.8, n), "combustor.wall_heat": 0.0}
    )
    found = row(walk, "burner_separation")
    solved = walk.status == "solved"
    mach = walk.station["3"].mach
    rise = walk.station["4"].pressure / walk.station["3"].pressure
    limit = np.where(mach <= 4.5, 1.0 + 0.3 * mach**2, 0.17 * mach**2.5)
    assert solved.sum() > 80 and np.allclose(found.margin[solved], 1.0 - (rise / limit)[solved], rtol=1e-12)
    assert (found.state == "over").any() and (found.state == "ok").any()
    assert (found.state[~solved] == "not assessed").all()


def test_shipped_hydrogen_case_at_more_heat_is_over_its_separation() -> None:
    hot = cycle.solve(SALTMARSH.replace({"combustor.equivalence_ratio": 0.8}))
    found = row(hot, "burner_separation")
    assert found.state == "over" and found.input == "combustor.equivalence_ratio" and "less heat" in found.restore
    assert (found.actual, found.allowed) == (pytest.approx(4.575, abs=2e-3), pytest.approx(4.408, abs=2e-3))
    own = cycle.solve(SALTMARSH.replace({"combustor.equivalence_ratio": 0.8, "combustor.separation_limit": 5.0}))
    assert row(own, "burner_separation").allowed == 5.0 and row(own, "burner_separation").state == "near"
    border = solve_for_limit(SALTMARSH, "burner_separation", "combustor.equivalence_ratio")
    at = cycle.solve(SALTMARSH.replace({"combustor.equivalence_ratio": border.value}))
    assert border.kind == "zero" and row(at, "burner_separation").margin == pytest.approx(0.0, abs=1e-6)


@pytest.mark.parametrize(
    ("name", "changes", "why"),
    [
        ("tidegate", {}, "a duct has its own limit"),
        ("heron", {}, "no pressure rise"),
        ("sandbar", {}, "subsonic"),
        (
            "bench-three",
            {"combustor.process": "pressure-loss", "combustor.pressure_ratio": 0.9, "combustor.friction_area_ratio": None},
            "loss",
        ),
    ],
)
def test_burner_without_that_separation_says_why(name: str, changes: dict[str, object], why: str) -> None:
    found = row(cycle.solve(cycle.load(case_file(name)).replace(changes)), "burner_separation")
    assert found.state == "not assessed" and why in found.restore


def test_separation_limit_belongs_to_burners_that_can_separate() -> None:
    with pytest.raises(cycle.CaseError, match=r"separation_limit: not used with combustor.process = constant-pressure"):
        SALTMARSH.replace({"combustor.process": "constant-pressure", "combustor.separation_limit": 4.0})
