"""The case: values, groups, edits, batches."""

from __future__ import annotations

import pickle
import subprocess
import sys

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.case import Case, check_batch, loads, read_setting, template
from cycle.errors import CaseError
from cycle.quantities import GROUP, INPUTS


def faults(call: object, *args: object) -> str:
    with pytest.raises(CaseError) as caught:
        call(*args)  # type: ignore[operator]
    return str(caught.value)


def test_values_are_si_with_defaults_and_tags(case: Case) -> None:
    assert case.numbers["flight.dynamic_pressure"] == 50e3
    assert case.numbers["nozzle.velocity_coefficient"] == 1.0
    assert "nozzle.velocity_coefficient" not in case.given
    assert "flight.dynamic_pressure" in case.given
    assert case.choices["start"] == "flight"
    assert case.choices["flight.place"] == "dynamic_pressure"
    assert case.choices["air.moisture"] == "standard"
    assert case.choices["inlet.chemistry"] == "equilibrium"
    assert case.choices["combustor.fuel_momentum"] == "none"
    assert "combustor.exit" not in case.choices
    assert "fuel.supply_pressure" not in case.numbers
    assert case.studies["burner"]["vary"][0]["points"] == 41


def test_a_case_is_frozen_and_travels(case: Case) -> None:
    with pytest.raises(TypeError):
        case.numbers["flight.mach"] = 3.0  # type: ignore[index]
    with pytest.raises(AttributeError):
        case.title = "x"  # type: ignore[misc]
    again = pickle.loads(pickle.dumps(case))
    assert again == case
    with pytest.raises(TypeError):
        again.numbers["flight.mach"] = 3.0


def test_a_rig_has_no_nozzle_unless_it_says_so() -> None:
    rig = loads(template("entry"))
    assert rig.choices["start"] == "entry"
    assert rig.choices["nozzle.exit"] == "absent"
    assert not any(key.startswith("nozzle.") for key in (*rig.numbers, *rig.choices) if key != "nozzle.exit")
    assert not any(s.input.section in ("nozzle", "flight", "inlet") for s in rig.inputs())
    with_nozzle = rig.replace({"nozzle.exit_pressure": "20 kPa"})
    assert with_nozzle.choices["nozzle.exit"] == "exit_pressure"
    assert with_nozzle.alternatives("nozzle.exit") == ("exit_pressure", "exit_area_ratio")


def test_one_member_of_a_group_replaces_the_group(case: Case) -> None:
    higher = case.replace({"flight.altitude": "27 km"})
    assert higher.choices["flight.place"] == "altitude"
    assert higher.numbers["flight.altitude"] == 27e3
    assert "flight.dynamic_pressure" not in higher.given
    both = case.replace({"flight.pressure": 1200.0, "flight.temperature": "-50 degC"})
    assert both.choices["flight.place"] == "pressure"
    assert "flight.temperature_offset" not in both.numbers
    assert "flight.temperature: needed with pressure" in faults(case.replace, {"flight.pressure": 1200.0})
    assert "stated more than once" in faults(case.replace, {"flight.altitude": 1e4, "flight.dynamic_pressure": 1e4})


def test_fuel_by_formula_and_back(case: Case) -> None:
    own = case.replace(
        {"fuel.formula": "C10H16", "fuel.phase": "gas", "fuel.heating_value": "42.1 MJ/kg", "fuel.vapour_specific_heat": 1500.0}
    )
    assert own.choices["fuel.identity"] == "formula"
    assert own.choices["fuel.energy"] == "heating_value"
    assert own.texts == {"fuel.formula": "C10H16"}
    assert "fuel.name" not in own.choices
    other = own.replace({"fuel.formation_enthalpy": "-100 kJ/mol"})
    assert other.choices["fuel.energy"] == "formation_enthalpy"
    assert "fuel.heating_value" not in other.numbers
    back = other.replace({"fuel.name": "methane"})
    assert back.choices["fuel.name"] == "methane"
    assert not {k for k in back.given if k.startswith("fuel.")} - {"fuel.name", "fuel.temperature"}


def test_a_choice_drops_the_keys_that_lose_their_meaning(case: Case) -> None:
    with_chemistry = case.replace({"nozzle.chemistry": "frozen", "inlet.chemistry": "frozen"})
    simple = with_chemistry.replace({"gas.model": "constant-gamma"})
    assert "nozzle.chemistry" not in simple.given
    assert simple.numbers["gas.cp_expansion"] == simple.numbers["gas.cp_compression"] == 1004.5
    followed = simple.replace({"gas.cp_combustion": 1200.0})
    assert followed.numbers["gas.cp_expansion"] == 1200.0
    words = faults(simple.replace, {"nozzle.chemistry": "frozen"})
    assert "nozzle.chemistry: not used with gas.model = constant-gamma" in words


def test_flight_and_rig_replace_each_other(case: Case) -> None:
    entry = {"entry.mach": 2.5, "entry.pressure": 1e5, "entry.temperature": 1000.0, "entry.area": 0.01, "nozzle.exit_area_ratio": 2.0}
    rig = case.replace(entry)
    assert rig.choices["start"] == "entry"
    assert not any(k.startswith(("flight.", "inlet.", "engine.")) for k in rig.given)
    flight = {
        "flight.mach": 7.0, "flight.altitude": 26e3, "inlet.total_pressure_recovery": 0.4, "inlet.exit_mach": 3.0,
    }  # fmt: skip
    assert rig.replace(flight).choices["start"] == "flight"


def test_replace_takes_numpy_scalars_and_keeps_the_unit_written(case: Case) -> None:
    new = case.replace({"flight.dynamic_pressure": np.float64(61e3), "flight.mach": np.float32(7.5)})
    assert new.spelled["flight.dynamic_pressure"] == "61 kPa"
    assert type(new.spelled["flight.mach"]) is float
    assert new.numbers["flight.dynamic_pressure"] == 61e3


def test_replace_title_notes_and_removal(case: Case) -> None:
    new = case.replace({"title": "another", "notes": "line 1\nline 2", "combustor.burnt_fraction": None})
    assert (new.title, new.notes) == ("another", "line 1\nline 2")
    assert new.numbers["combustor.burnt_fraction"] == 1.0
    assert case.replace({}) is case
    assert "title: wrong type: given 3; allowed text" in faults(case.replace, {"title": 3})


def test_replace_refuses_what_is_no_input(case: Case) -> None:
    assert "saltmarsh: mach: unknown key (did you mean flight.mach?): given 7.0; allowed table.key" in faults(case.replace, {"mach": 7.0})
    assert "study.burner: unknown key" in faults(case.replace, {"study.burner": {}})
    assert "flight: unknown key" in faults(case.replace, {"flight": {"mach": 7.0}})
    assert "flight.match: unknown key (did you mean mach?)" in faults(case.replace, {"flight.match": 7.0})
    assert "title: wrong type" in faults(case.replace, {"title": "\ud800"})
    assert "flight.mach: not a number" in faults(case.replace, {"flight.mach": np.array([1.0, 2.0])})
    assert "flight.mach: not a finite number" in faults(case.replace, {"flight.mach": np.float64("nan")})
    assert "flight.mach: out of bounds" in faults(case.replace, {"flight.mach": "31"})


def test_inputs_values_and_switches(case: Case) -> None:
    rows = {s.input.key: s for s in case.inputs()}
    assert rows["flight.dynamic_pressure"].spelled == "50 kPa"
    assert rows["flight.dynamic_pressure"].group == "flight.place"
    assert "flight.altitude" not in rows
    assert rows["combustor.wall_heat"].given is False
    assert rows["limits.gas_temperature"].value is None
    assert "nozzle.exit_pressure" not in rows
    assert case.value("fuel.name") == "hydrogen"
    assert case.value("fuel.identity") == "name"
    assert case.value("flight.altitude") is None
    ideal = case.switch("nozzle.exit", "ideal")
    assert ideal.value("nozzle.ideal") is True
    assert ideal.switch("nozzle.exit", "exit_pressure", "2 kPa").numbers["nozzle.exit_pressure"] == 2e3
    speed = case.switch("combustor.fuel_momentum", "fuel_axial_speed", 500.0)
    assert speed.switch("combustor.fuel_momentum", "none") == case
    place = case.switch("flight.place", "pressure", {"flight.pressure": 1e3, "flight.temperature": 220.0})
    assert place.choices["flight.place"] == "pressure"
    assert "no value for altitude" in faults(case.switch, "flight.place", "altitude")
    assert "unknown choice" in faults(case.switch, "flight.place", "depth", 3.0)
    assert case.alternatives("flight.place") == ("altitude", "dynamic_pressure", "pressure")
    assert case.alternatives("combustor.fuel_momentum")[0] == "none"
    assert case.alternatives("fuel.identity") == ("name", "formula", "heating_value")
    vitiated = case.switch("air.moisture", "mole_fractions", {"N2": 0.6, "O2": 0.2, "H2O": 0.2})
    assert vitiated.fractions["H2O"] == 0.2
    assert vitiated.switch("air.moisture", "standard") == case


def test_mole_fractions_are_normalised(case: Case) -> None:
    near = case.replace({"air.mole_fractions": {"N2": 0.7900004, "O2": 0.21}})
    # one division and one sum
    assert sum(near.fractions.values()) == pytest.approx(1.0, abs=1e-15)


def test_a_number_edit_takes_what_was_given_and_nothing_else(case: Case) -> None:
    for row in case.inputs():
        if row.input.kind == "number" and isinstance(row.value, float) and row.value:
            value = row.value * (0.999 if row.value > 0 else 1.001)
            new = case.replace({row.input.key: value})
            assert new.numbers[row.input.key] == value, row.input.key
            others = {k: v for k, v in new.numbers.items() if k != row.input.key}
            assert others == {k: v for k, v in case.numbers.items() if k != row.input.key}


@settings(deadline=None, max_examples=50)
@given(st.lists(st.sampled_from([(g, m.tag) for g in GROUP for m in GROUP[g].members]), max_size=6))
def test_no_order_of_switches_leaves_two_members(switches: list[tuple[str, str]]) -> None:
    case = loads(template())
    for group, tag in switches:
        keys = next(m.keys for m in GROUP[group].members if m.tag == tag)
        values = {key: _sample(key) for key in keys}
        try:
            case = case.replace(values)
        except CaseError as error:
            assert not any("more than once" in f.text for f in error.faults)
            continue
        assert case.choices[group] == tag
        again = loads(_toml(case))
        assert again == case


def _sample(key: str) -> object:
    entry = next(i for i in INPUTS if i.key == key)
    if entry.kind == "number":
        return 0.5 * ((entry.lower if entry.lower is not None else entry.above or 0.0) + min(entry.upper or 1.0, 1e3))
    if entry.kind == "rows":
        return [{"angle": 0.1}, {"angle": 0.05}]
    return {"choice": entry.choices[:1] and entry.choices[0], "flag": True, "text": "C2H6", "fractions": {"N2": 0.8, "O2": 0.2}}[entry.kind]


def _toml(case: Case) -> str:
    import tomlkit

    from cycle.case import thawed
    from cycle.case.checking import nest

    return tomlkit.dumps({"format": 1, "title": case.title, "notes": case.notes, **nest(thawed(case.spelled))})


def test_batches_are_checked_and_followed(case: Case) -> None:
    simple = case.replace({"gas.model": "constant-gamma"})
    chosen, arrays = check_batch(
        simple, {"gas.cp_compression": np.linspace(1000, 1100, 5), "inlet.exit_mach": [[2.0], [3.0]], "flight.altitude": "27 km"}
    )
    assert chosen.choices["inlet.end"] == "exit_mach"
    assert arrays["inlet.exit_mach"].shape == (2, 1)
    assert arrays["flight.altitude"] == 27e3
    np.testing.assert_array_equal(arrays["gas.cp_expansion"], arrays["gas.cp_compression"])
    assert all(a.dtype == np.float64 for a in arrays.values())
    given = simple.replace({"gas.cp_combustion": 1200.0})
    _, arrays = check_batch(given, {"gas.cp_compression": [1000.0, 1010.0]})
    assert set(arrays) == {"gas.cp_compression"}
    _, arrays = check_batch(given, {"gas.cp_combustion": [1000.0, 1010.0]})
    assert set(arrays) == {"gas.cp_combustion", "gas.cp_expansion"}


@pytest.mark.parametrize(
    ("key", "values", "words"),
    [
        ("flight.mach", [1.0, np.nan], "flight.mach: not a finite number at index 1: given nan; allowed above 0, at most 30"),
        ("flight.mach", [1.0, np.inf], "not a finite number at index 1: given inf"),
        ("flight.mach", [1.0, 2.0, 31.0], "out of bounds at index 2: given 31; allowed above 0, at most 30"),
        ("flight.mach", 0.0, "out of bounds: given 0"),
        ("flight.mach", [], "no values"),
        ("flight.mach", ["a", "b"], "not numbers"),
        ("flight.mach", [True], "not numbers"),
        ("flight.mach", [[1.0], [1.0, 2.0]], "not an array of numbers"),
        ("flight.altitude", "27 kPa", "kPa is a unit of pressure, not of length"),
        ("gas.model", [1.0], "not an input that takes numbers"),
        ("flight.match", [1.0], "unknown key"),
        ("combustor.pressure_ratio", [0.9], "not used with combustor.process = constant-area"),
    ],
)
def test_batches_refuse(case: Case, key: str, values: object, words: str) -> None:
    assert words in faults(check_batch, case, {key: values})


def test_settings() -> None:
    assert read_setting("flight.mach=7.5") == ("flight.mach", 7.5)
    assert read_setting("flight.altitude = 27 km") == ("flight.altitude", "27 km")
    assert read_setting("nozzle.ideal=true") == ("nozzle.ideal", True)
    assert read_setting("gas.model=frozen") == ("gas.model", "frozen")
    assert read_setting("air.mole_fractions={ N2 = 0.8, O2 = 0.2 }") == ("air.mole_fractions", {"N2": 0.8, "O2": 0.2})
    for wrong in ("flight.mach", "=3", "flight.mach=", "a b=3"):
        assert "not a setting" in faults(read_setting, wrong)


def test_import_is_light() -> None:
    code = "import sys, cycle.case; print([m for m in ('pydantic', 'tomlkit', 'numpy', 'cantera', 'scipy') if m in sys.modules])"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
