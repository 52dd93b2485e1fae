"""What the user states is met, refused, or the difference is printed; states that physics excludes have a name of their own."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

import numpy as np
import pytest

import cycle
from cycle.gas.fuels import FUELS, entropy_of_burning, user_fuel
from tests.case_files import case_file
from tests.random_cases import written

PLAIN = cycle.load(case_file("plain"))
TEXTBOOK = {
    "flight": {"mach": 3.0, "pressure": 5529.0, "temperature": 216.65},
    "gas": {"model": "constant-gamma", "cp_compression": 1004.5, "gas_constant": 287.0},
    "inlet": {"total_pressure_recovery": 0.7, "exit_mach": 0.3},
    "fuel": {"name": "kerosene"},
    "combustor": {"process": "pressure-loss", "pressure_ratio": 0.9, "equivalence_ratio": 0.5, "exit_mach": 0.4},
    "nozzle": {"throat": "sized", "ideal": True},
    "engine": {"capture_area": 1.0},
}


def case(tables: Mapping[str, Mapping[str, Any]], **changes: Any) -> cycle.Case:
    """The case of these tables with some keys of it changed, `flight__mach` for flight.mach."""
    found = {table: dict(keys) for table, keys in tables.items()}
    for name, value in changes.items():
        table, key = name.split("__")
        found.setdefault(table, {})[key] = value
    return cycle.loads(written(found), "stated")


def done(walk: cycle.Walk, process: str) -> Mapping[str, Any]:
    return next(p for p in walk.processes if p.name == process).figures


@pytest.mark.parametrize(
    "pairs",
    [{}, {"gas__cp_combustion": 1250.0}, {"gas__cp_combustion": 1250.0, "gas__cp_expansion": 1180.0}, {"gas__cp_combustion": 900.0}],
)
def test_the_burner_has_the_total_pressure_ratio_that_is_stated(pairs: Mapping[str, float]) -> None:
    """A change of the constant-gamma pair is a process of its own: it came out as part of the burner's ratio, 1.45 for a stated 0.9."""
    walk = cycle.solve(case(TEXTBOOK, **pairs))
    assert walk.status == "solved"
    assert done(walk, "burner")["total_pressure_ratio"] == pytest.approx(0.9, rel=1e-9)
    whole = walk.station["10"].total_pressure / walk.station["0"].total_pressure
    assert math.prod(p.figures["total_pressure_ratio"] for p in walk.processes) == pytest.approx(whole, rel=1e-9)
    changes = [p.figures["total_pressure_ratio"] for p in walk.processes if p.name == "gas change"]
    assert len(changes) == len({1004.5, *pairs.values()}) - 1 and 1.0 not in changes


@pytest.mark.parametrize("model", ["frozen", "equilibrium"])
def test_the_burner_has_it_where_a_held_composition_is_released(model: str) -> None:
    tables = {name: dict(keys) for name, keys in TEXTBOOK.items()} | {"gas": {"model": model}}
    tables["flight"]["mach"] = 7.0
    if model == "equilibrium":
        tables["inlet"]["chemistry"] = "frozen"
    walk = cycle.solve(case(tables, combustor__equivalence_ratio=0.2))
    assert walk.status == "solved", walk.reason
    assert done(walk, "burner")["total_pressure_ratio"] == pytest.approx(0.9, rel=1e-9)


@pytest.mark.parametrize("exit", [{"exit_pressure": 50e3}, {"ideal": True}])
def test_an_exit_pressure_that_the_internal_nozzle_passes_by_is_told(exit: Mapping[str, Any]) -> None:
    free = PLAIN.replace({f"nozzle.{key}": value for key, value in exit.items()})
    walk = cycle.solve(free.replace({"nozzle.internal_area_ratio": 40.0 if "ideal" not in exit else 400.0}))
    asked = exit.get("exit_pressure", walk.station["0"].pressure)
    assert walk.status == "solved" and walk.station["10"].pressure < 0.99 * asked
    (note,) = [n for n in walk.notes if n.key == "over_expanded"]
    assert note.value == walk.station["9"].pressure and note.against == pytest.approx(asked, rel=1e-12)
    assert "nothing expands outside" in note.words() and "psi" in note.words("us")
    assert not [n for n in cycle.solve(free).notes if n.key == "over_expanded"]


def test_a_rig_at_station_2_keeps_the_entry_that_is_stated() -> None:
    """A throat that is too small drove the shock out of the rig, and station 2 then showed the stream behind it."""
    rig = {
        "entry": {"station": "2", "mach": 2.0, "pressure": 50e3, "temperature": 350.0, "area": 0.01},
        "gas": {"model": "constant-gamma"},
        "fuel": {"name": "hydrogen"},
        "combustor": {"equivalence_ratio": 0.1, "entry_area_ratio": 1.3},
        "nozzle": {"throat_area": 0.0115, "exit_area_ratio": 2.0},
    }
    statuses = set()
    for area in np.linspace(0.006, 0.0132, 25):
        walk = cycle.solve(case(rig, nozzle__throat_area=float(area)))
        statuses.add(walk.status)
        assert walk.station["2"].mach == pytest.approx(2.0, rel=1e-12), area
        assert walk.station["2"].pressure == pytest.approx(50e3, rel=1e-12)
        if walk.status == "unstarted":
            assert "3" not in walk.station and walk.reason
    assert {"solved", "unstarted"} <= statuses


@pytest.mark.parametrize("process", ["constant-area", "constant-pressure", "pressure-loss", "duct"])
@pytest.mark.parametrize("model", ["constant-gamma", "frozen", "equilibrium"])
def test_walls_that_take_more_than_the_stream_has_are_named(model: str, process: str) -> None:
    tables = {name: dict(keys) for name, keys in TEXTBOOK.items()} | {"gas": {"model": model}}
    tables["inlet"] = {"kinetic_energy_efficiency": 0.97, "exit_mach": 3.0}
    tables["flight"] |= {"mach": 8.0}
    tables["nozzle"] = {"ideal": True}
    tables["combustor"] = {"process": process, "equivalence_ratio": 0.2, "wall_heat": 5e9}
    if process == "pressure-loss":
        tables["combustor"]["pressure_ratio"] = 0.9
    text = written(tables)
    if process == "duct":
        text += "[[combustor.area]]\nx = 0.0\narea_ratio = 1.0\n[[combustor.area]]\nx = 1.0\narea_ratio = 2.0\n"
        text += "[[combustor.injector]]\nx = 0.1\n"
    walk = cycle.solve(cycle.loads(text, "overcooled"))
    assert walk.status == "overcooled" and "less wall heat" in walk.reason
    assert math.isnan(walk.performance.thrust)


@pytest.mark.parametrize(
    ("changes", "key", "words"),
    [
        ({"gas__cp_compression": 287.0}, "gas.cp_compression", "no gas has this ratio of specific heats"),
        ({"gas__cp_compression": 200.0}, "gas.cp_compression", "gamma from 1.05 to 1.667"),
        ({"gas__cp_combustion": 300.0}, "gas.cp_combustion", "cp = 300 with R = 287"),
        ({"gas__gas_constant": 40.0}, "gas.cp_compression", "cp from 2.5 R to 21 R"),
    ],
)
def test_a_pair_that_is_no_gas_is_refused(changes: Mapping[str, float], key: str, words: str) -> None:
    with pytest.raises(cycle.CaseError) as caught:
        case(TEXTBOOK, **changes)
    assert [f.key for f in caught.value.faults] == [key] and words in str(caught.value)


def test_a_pair_that_is_no_gas_is_refused_in_a_batch() -> None:
    textbook = case(TEXTBOOK)
    with pytest.raises(cycle.CaseError, match="some points"):
        cycle.solve(textbook, {"gas.cp_compression": np.array([1004.5, 300.0])})
    with pytest.raises(cycle.CaseError, match=r"gas\.cp_combustion"):
        cycle.solve(textbook.replace({"gas.cp_combustion": 900.0}), {"gas.gas_constant": np.array([287.0, 380.0])})
    edge = 287.0 * np.array([2.5, 21.0])
    assert set(cycle.solve(textbook, {"gas.cp_compression": edge}).status) <= {"solved", "over-compressed", "choked"}


@pytest.mark.parametrize("name", ["hydrogen", "methane", "ethylene", "propane", "kerosene"])
def test_listed_fuels_keep_the_second_law_with_room(name: str) -> None:
    """Entropies of NASA TM-4513 (1993); the largest that is let through lies far above each."""
    fuel = FUELS[name]
    most = fuel.lower_heating_value() * fuel.molar_mass / 3000.0 + entropy_of_burning(fuel.atoms)
    assert fuel.standard_entropy is not None and fuel.standard_entropy < 0.8 * most


OWN = {
    "formula": "CH4", "phase": "gas", "formation_enthalpy": -74.6e3, "vapour_specific_heat": 2230.0, "standard_entropy": 186.4,
    "supply_pressure": 5e6,
}  # fmt: skip


@pytest.mark.parametrize(
    ("data", "key", "words"),
    [
        ({"standard_entropy": 900.0}, "fuel.standard_entropy", "breaks the second law"),
        ({"formation_enthalpy": -900e3}, "fuel.formation_enthalpy", "takes 2.284e+04 J/mol to burn"),
    ],
)
def test_a_fuel_that_breaks_the_second_law_is_refused(data: Mapping[str, float], key: str, words: str) -> None:
    tables = {**TEXTBOOK, "fuel": {**OWN, **data}}
    with pytest.raises(cycle.CaseError) as caught:
        case(tables)
    assert [f.key for f in caught.value.faults] == [key] and words in str(caught.value)
    assert case({**TEXTBOOK, "fuel": OWN}).texts["fuel.formula"] == "CH4"


def test_the_largest_entropy_passes_the_audit_of_a_burner() -> None:
    """At the bound itself no burner of the family destroys entropy beyond what the audit lets through."""
    fuel = user_fuel("CH4", "gas", formation_enthalpy=-74.6e3, vapour_specific_heat=2230.0)
    most = fuel.lower_heating_value() * fuel.molar_mass / 3000.0 + entropy_of_burning(fuel.atoms)
    tables = {**TEXTBOOK, "gas": {"model": "equilibrium"}, "fuel": {**OWN, "standard_entropy": 0.999 * most}}
    for ratio in (0.1, 0.5, 1.0):
        walk = cycle.solve(case(tables, combustor__equivalence_ratio=ratio))
        assert walk.status == "solved" and walk.audit.ok, ratio


def test_air_whose_own_combustibles_take_the_oxygen_is_refused() -> None:
    """It ended in a division by zero, and the fuel that was asked for came to nothing."""
    for fractions in ({"N2": 0.6, "O2": 0.2, "CH4": 0.2}, {"N2": 0.4, "O2": 0.2, "H2": 0.4}):
        with pytest.raises(cycle.CaseError, match="combustibles leave no oxygen"):
            PLAIN.replace({"air.mole_fractions": fractions})
    PLAIN.replace({"air.mole_fractions": {"N2": 0.5, "O2": 0.2, "H2": 0.3}})


def test_what_a_gas_leaves_out_is_told() -> None:
    frozen = PLAIN.replace({"gas.model": "frozen", "air.mole_fractions": {"N2": 0.77, "O2": 0.21, "H2": 0.02}})
    (note,) = cycle.solve(frozen).notes
    assert note.words().startswith("The gas is frozen: the combustibles of the entering stream, 0.02 of its moles, do not burn")
    assert not cycle.solve(case(TEXTBOOK)).notes


def test_constant_gamma_beyond_dissociation_is_a_violated_limit_with_its_remedy() -> None:
    """An exit at thousands of kelvin was shown without a word: it stands first among the limits."""
    hot = cycle.solve(case(TEXTBOOK, flight__mach=6.0, combustor__equivalence_ratio=1.0))
    (limit,) = [x for x in hot.limits if x.key == "model_range"]
    assert limit.state == "over" and limit.actual == max(s.temperature for s in hot.station.values()) > limit.allowed
    assert limit.restore == "use gas.model = equilibrium"


def test_thrust_power_beyond_the_fuel_is_told() -> None:
    """A balance that leaves the fuel's enthalpy out, with a heating value next to nothing: the efficiency says that it cannot be."""
    tables = {**TEXTBOOK, "fuel": {"heating_value": 1e5, "temperature": 1500.0, "vapour_specific_heat": 15e3}}
    tables["combustor"] = {"process": "constant-pressure", "fuel_air_ratio": 0.05}
    walk = cycle.solve(case(tables, inlet__total_pressure_recovery=1.0))
    assert walk.status == "solved" and walk.performance.overall_efficiency > 1.0
    (note,) = [n for n in walk.notes if n.key == "beyond_fuel"]
    assert "more than the fuel brings" in note.words()


def test_a_duct_is_not_asked_for_a_geometric_throat() -> None:
    """It ended in a KeyError."""
    with pytest.raises(cycle.CaseError, match=r"engine\.mode: a duct finds its own throat"):
        cycle.load(case_file("tidegate")).replace({"engine.mode": "geometric-throat", "nozzle.throat": "sized"})
