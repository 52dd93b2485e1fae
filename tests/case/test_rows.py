"""Arrays of tables and sub-tables in a case: read, refused, edited, batched."""

# ruff: noqa: E501 - texts of files and messages stay whole
from __future__ import annotations

import math
import pickle
import re
from dataclasses import replace

import jsonschema
import numpy as np
import pytest
import tomlkit

from cycle.case import Case, check_batch, differences, json_schema, loads, taking, template
from cycle.errors import CaseError
from cycle.quantities import INPUT, input_of
from tests.case.conftest import DUCT, GEOMETRY, INLINE
from tests.case.test_faults import edit, faults


def refused(call: object, *args: object) -> str:
    with pytest.raises(CaseError) as caught:
        call(*args)  # type: ignore[operator]
    return str(caught.value)


@pytest.fixture
def geometry() -> Case:
    return loads(GEOMETRY, "narrow")


@pytest.fixture
def duct() -> Case:
    return loads(DUCT, "opening")


def test_rows_and_cells_are_si_with_defaults(geometry: Case, duct: Case) -> None:
    # degrees to radians: one rounding
    assert geometry.rows["inlet.ramp"][0]["angle"] == pytest.approx(math.radians(8.0), rel=1e-15)
    assert [dict(row) for row in duct.rows["combustor.injector"]] == [
        {"x": 0.0, "share": 0.6, "axial_speed": 0.0},
        {"x": 0.2, "share": 0.4, "axial_speed": 0.0, "length": 0.7},
    ]
    assert duct.numbers["combustor.area.4.area_ratio"] == 2.8
    assert duct.value("combustor.area.2.x") == 0.15
    assert duct.value("combustor.area.2.perimeter") is None
    assert duct.value("combustor.area") == duct.rows["combustor.area"]
    assert duct.value("inlet.ramp") is None
    assert duct.applies("combustor.area.4.x") and not duct.applies("combustor.area.5.x") and not duct.applies("inlet.ramp.1.angle")
    assert pickle.loads(pickle.dumps(duct)) == duct


def test_geometry_stands_in_place_of_quality_and_end(geometry: Case) -> None:
    assert geometry.choices["inlet.quality"] == "geometry"
    assert geometry.choices["inlet.compression"] == "ramp"
    assert geometry.choices["inlet.lip"] == "lip"
    assert geometry.choices["inlet.terminal"] == "none"
    assert "inlet.end" not in geometry.choices
    assert geometry.numbers["isolator.hydraulic_diameter"] == 0.08
    assert geometry.choices["isolator.shape"] == "circular"
    cone = geometry.replace({"inlet.cone.half_angle": "15 deg", "inlet.terminal_shock": True})
    assert (cone.choices["inlet.compression"], cone.choices["inlet.terminal"]) == ("cone", "terminal_shock")
    assert "inlet.ramp" not in cone.given and not cone.rows
    curved = cone.replace({"inlet.isentropic_ramp.turning": 0.2, "inlet.isentropic_ramp.first_wedge": 0.1})
    assert curved.choices["inlet.compression"] == "isentropic_ramp"
    # its corners have no places, so the lip goes
    assert "inlet.lip" not in curved.choices
    back = curved.replace({"inlet.total_pressure_recovery": 0.4, "inlet.exit_mach": 3.0})
    assert back.choices["inlet.end"] == "exit_mach"
    assert not {key for key in back.given if key.startswith("inlet.")} - {"inlet.total_pressure_recovery", "inlet.exit_mach"}


def test_alternatives_and_switches_of_geometry(geometry: Case) -> None:
    assert geometry.alternatives("inlet.quality")[-1] == "geometry"
    assert geometry.alternatives("inlet.quality").count("geometry") == 1
    assert geometry.alternatives("inlet.compression") == ("ramp", "cone", "isentropic_ramp")
    assert geometry.switch("inlet.compression", "cone", "12 deg").numbers["inlet.cone.half_angle"] == pytest.approx(math.radians(12.0))
    assert geometry.switch("inlet.lip", "none").choices["inlet.lip"] == "none"
    assert geometry.switch("inlet.terminal", "terminal_shock").value("inlet.terminal_shock") is True
    assert geometry.switch("isolator.size", "none").choices["isolator.size"] == "none"
    ends = {"inlet.adiabatic_efficiency": 0.9, "inlet.exit_mach": 3.0}
    assert geometry.switch("inlet.quality", "adiabatic_efficiency", ends).choices["inlet.end"] == "exit_mach"
    assert geometry.replace(ends).switch("inlet.quality", "geometry", [{"angle": 0.1}]).rows["inlet.ramp"][0]["angle"] == 0.1


def test_a_duct_has_its_own_keys(duct: Case) -> None:
    assert duct.numbers["combustor.slices"] == 48.0
    assert duct.numbers["combustor.burning_theta"] == 2.0
    assert duct.choices["combustor.section"] == "circular"
    assert duct.choices["combustor.wall"] == "wall_heat"
    assert "combustor.fuel_momentum" not in duct.choices
    cooled = duct.replace({"combustor.wall_temperature": "900 K"})
    assert cooled.choices["combustor.wall"] == "wall_temperature"
    assert "combustor.wall_heat" not in cooled.numbers
    plain = cooled.replace({"combustor.process": "constant-area"})
    assert not {key for key in plain.given if key.startswith("combustor.")} - {"combustor.process", "combustor.equivalence_ratio"}
    assert plain.choices["combustor.wall"] == "wall_heat"


def test_throats_and_freezing(case: Case) -> None:
    given = case.replace({"nozzle.throat_area": "300 cm^2"})
    assert given.choices["nozzle.throat_size"] == "throat_area"
    assert "nozzle.throat" not in given.choices
    assert given.numbers["combustor.entry_area_ratio"] == 1.0
    assert given.replace({"engine.mode": "geometric-throat"}).choices["engine.mode"] == "geometric-throat"
    sized = given.replace({"nozzle.throat": "sized"})
    assert (sized.choices["nozzle.throat_size"], sized.choices["nozzle.throat"]) == ("throat", "sized")
    assert "combustor.entry_area_ratio" not in sized.numbers
    frozen = case.replace({"nozzle.chemistry": "frozen-after", "nozzle.freeze_mach": 2.0})
    assert frozen.choices["nozzle.freeze"] == "freeze_mach"
    station = frozen.replace({"nozzle.freeze_station": "4"})
    assert station.choices["nozzle.freeze_station"] == "4"
    assert "nozzle.freeze_mach" not in station.numbers
    assert "nozzle.freeze" not in station.replace({"nozzle.chemistry": "shifting"}).choices


def test_a_rig_has_an_isolator_only_ahead_of_it() -> None:
    rig = loads(template("entry"))
    words = refused(rig.replace, {"isolator.length": 0.5, "isolator.hydraulic_diameter": 0.05})
    assert "isolator.length: not used with entry.station = 3: given a value; allowed leave it out, or have entry.station = 2" in words
    ahead = rig.replace({"entry.station": "2", "isolator.length": 0.5, "isolator.hydraulic_diameter": 0.05})
    assert ahead.choices["isolator.size"] == "length"


BAD = {
    "row out of bounds": (DUCT, ('x = "90 cm"', 'x = "-90 cm"'), 'combustor.area row 3, x: out of bounds: given -0.9; allowed at least 0, at most 1000 m'),
    "row with a wrong unit": (DUCT, ('x = "90 cm"', 'x = "90 kPa"'), "combustor.area row 3, x: kPa is a unit of pressure, not of length"),
    "row without a place": (DUCT, ('x = "90 cm"\n', ""), "combustor.area row 3, x: place is not stated: given none; allowed at least 0, at most 1000 m"),
    "unknown column": (DUCT, ("area_ratio = 1.9", "area_ration = 1.9"), "combustor.area row 3, area_ration: unknown key (did you mean area_ratio?): given 1.9; allowed x, area, area_ratio, perimeter"),
    "no size": (DUCT, ("area_ratio = 1.9\n", ""), "combustor.area row 3: duct section has not one size: given none; allowed exactly one of area, area_ratio"),
    "two sizes": (DUCT, ("area_ratio = 1.9\n", "area_ratio = 1.9\narea = 0.1\n"), "combustor.area row 3: duct section has not one size: given area, area_ratio"),
    "places that do not rise": (DUCT, ('x = "90 cm"', 'x = "15 cm"'), "combustor.area row 3, x: the places do not rise: given 0.15 m; allowed above 0.15 m"),
    "a step at entry": (DUCT, ("area_ratio = 1.0\n[[combustor.area]]\nx = \"15", "area_ratio = 1.2\n[[combustor.area]]\nx = \"15"), "combustor.area row 1, area_ratio: burner entry has another area: given 1.2; allowed 1 at x = 0"),
    "one perimeter": (DUCT, ("area_ratio = 1.9", "area_ratio = 1.9\nperimeter = 0.4"), "combustor.area row 1, perimeter: needed with the other perimeters"),
    "shares": (DUCT, ("share = 0.4", "share = 0.5"), "combustor.injector: the shares of the fuel do not sum to 1: given a sum of 1.1; allowed 1 within 1e-6"),
    "injector behind the duct": (DUCT, ('x = "20 cm"', 'x = "120 cm"'), "combustor.injector row 2, x: the injector lies behind the duct: given 1.2 m; allowed below 1.2 m"),
    "broken slices": (DUCT, ("burning_theta = 2.0", "slices = 24.5"), "combustor.slices: not a whole number: given 24.5; allowed a whole number, at least 8, at most 400"),
    "key of another process": (DUCT, ("burning_theta = 2.0", "friction_area_ratio = 0.1"), "combustor.friction_area_ratio: not used with combustor.process = duct"),
    "duct key elsewhere": (GEOMETRY, ("equivalence_ratio = 0.5", "equivalence_ratio = 0.5\nfriction_coefficient = 0.002"), "combustor.friction_coefficient: not used with combustor.process = constant-area"),
    "wall temperature elsewhere": (GEOMETRY, ("equivalence_ratio = 0.5", "equivalence_ratio = 0.5\nwall_temperature = 900"), "combustor.wall_temperature: not used with combustor.process = constant-area"),
    "two walls": (DUCT, ("burning_theta = 2.0", "wall_heat = 1e5\nwall_temperature = 900"), "combustor: heat through the burner wall is stated more than once: given wall_heat, wall_temperature"),
    "planar without width": (DUCT, ("burning_theta = 2.0", 'section = "planar"'), "combustor.width: duct width is not stated"),
    "width of a pipe": (DUCT, ("burning_theta = 2.0", "width = 0.2"), "combustor.width: not used with combustor.section = circular"),
    "rows as a number": (GEOMETRY, ('cowl_angle = "14 deg"\nlip_x = "1.9 m"\nlip_y = "0.52 m"\ninternal_contraction = 1.4  # to the throat\n\n# the first ramp is long\n[[inlet.ramp]]\nangle = "8 deg"\nlength = "0.9 m"            # along the surface\n\n[[inlet.ramp]]\nangle = "6 deg"             # no length: the last one\n', "ramp = 3\n"), "inlet.ramp: wrong type: given 3; allowed 1 to 16 tables [[inlet.ramp]], each with angle, length"),
    "a row as a number": (INLINE, ('{ angle = "7 deg" }', "7"), "inlet.ramp row 2: wrong type: given 7; allowed a table"),
    "no rows": (INLINE, ('[{ angle = "8 deg" }, { angle = "7 deg" }]', "[]"), "inlet.ramp: wrong number of rows: given 0; allowed 1 to 16 tables"),
    "many rows": (INLINE, ('[{ angle = "8 deg" }, { angle = "7 deg" }]', f"[{'{ angle = 0.01 }, ' * 17}]"), "inlet.ramp: wrong number of rows: given 17; allowed 1 to 16 tables"),
    "one section": (DUCT, (DUCT[DUCT.index('[[combustor.area]]\nx = "15'):DUCT.index("[[combustor.injector]]\nx = 0.0")], ""), "combustor.area: wrong number of rows: given 1; allowed 2 to 64 tables"),
    "ramps and a cone": (GEOMETRY, ("[isolator]", "[inlet.cone]\nhalf_angle = 0.2\n[isolator]"), "inlet: inlet quality is stated more than once: given ramp, cone.half_angle; allowed exactly one of"),
    "ramps and a quality": (GEOMETRY, ("internal_contraction", "adiabatic_efficiency = 0.9\ninternal_contraction"), "inlet: inlet quality is stated more than once: given adiabatic_efficiency, ramp"),
    "ramps and an end": (GEOMETRY, ("internal_contraction", "exit_mach = 3.0\ninternal_contraction"), "inlet.exit_mach: not used with inlet.ramp"),
    "geometry key elsewhere": (DUCT, ("exit_mach = 3.0", "exit_mach = 3.0\ncowl_angle = 0.1"), "inlet.cowl_angle: not used with inlet.kinetic_energy_efficiency: given a value; allowed leave it out, or have inlet.ramp or inlet.cone.half_angle or inlet.isentropic_ramp.turning"),
    "wedge alone": (DUCT, ("[fuel]", "[inlet.isentropic_ramp]\nfirst_wedge = 0.1\n[fuel]"), "inlet.isentropic_ramp.first_wedge: not used without inlet.compression"),
    "half a lip": (GEOMETRY, ('lip_y = "0.52 m"\n', ""), "inlet.lip_y: needed with lip_x: given none; allowed lip height"),
    "a ramp without its length": (GEOMETRY, ('length = "0.9 m"            # along the surface\n', ""), "inlet.ramp row 1, length: needed with inlet.lip_x and inlet.lip_y: given none"),
    "sub-table as a value": (DUCT, ("exit_mach = 3.0", "exit_mach = 3.0\ncone = 3"), "inlet.cone: wrong type: given 3; allowed a table"),
    "unknown key of a sub-table": (GEOMETRY, ("[isolator]", "[inlet.cone]\nhalf_angel = 0.2\n[isolator]"), "inlet.cone.half_angel: unknown key (did you mean half_angle?): given 0.2; allowed half_angle"),
    "half an isolator": (GEOMETRY, ('hydraulic_diameter = "8 cm"\n', 'shape = "rectangular"\n'), "isolator.shape: a rectangle has one side stated: given none; allowed isolator.width or isolator.height"),
    "thickness alone": (GEOMETRY, ('length = 0.5\nhydraulic_diameter = "8 cm"\n', "momentum_thickness = 1e-3\n"), "isolator.momentum_thickness: not used with isolator.size = none"),
    "thermal throat without a duct": (GEOMETRY, ("[nozzle]", '[engine]\nmode = "thermal-throat"\n[nozzle]'), "engine.mode: a thermal throat needs a duct: given combustor.process = constant-area"),
    "geometric throat without a throat": (GEOMETRY, ("[nozzle]", '[engine]\nmode = "geometric-throat"\n[nozzle]'), 'engine.mode: there is no throat: given nozzle.throat = none; allowed nozzle.throat = "sized" or nozzle.throat_area'),
    "frozen after nothing": (GEOMETRY, ("ideal = true", 'ideal = true\nchemistry = "frozen-after"'), "nozzle: place where the composition freezes is not stated: given none; allowed exactly one of freeze_station, freeze_mach, freeze_area_ratio"),
    "frozen after no throat": (GEOMETRY, ("ideal = true", 'ideal = true\nchemistry = "frozen-after"\nfreeze_station = "5"'), "nozzle.freeze_station: there is no throat"),
    "two throats": (GEOMETRY, ("ideal = true", 'ideal = true\nthroat = "sized"\nthroat_area = 0.1'), "nozzle: nozzle throat is stated more than once: given throat, throat_area"),
}  # fmt: skip


@pytest.mark.parametrize("what", BAD)
def test_one_fault_one_line(what: str) -> None:
    text, pair, words = BAD[what]
    lines = faults(edit(text, pair))
    assert any(words in line for line in lines), lines
    alone = {"one perimeter": 3, "rows as a number": 1, "unknown key of a sub-table": 1}
    assert len(lines) == alone.get(what, 1), lines


def test_perimeters_stand_in_place_of_the_section() -> None:
    walled = re.sub(r"(area_ratio = .*)", r"\1\nperimeter = 0.5", DUCT)
    assert loads(walled).rows["combustor.area"][3]["perimeter"] == 0.5
    words = faults(walled.replace("burning_theta = 2.0", 'section = "circular"'))
    assert "combustor.section: the perimeter is stated more than once: given perimeters in combustor.area" in words[0]


def test_faults_of_several_rows_come_at_once() -> None:
    lines = "\n".join(
        faults(DUCT.replace('"90 cm"', "-1").replace("area_ratio = 2.8", "area_ratio = 0").replace("share = 0.4", "share = 4"))
    )
    for words in ("combustor.area row 3, x", "combustor.area row 4, area_ratio", "combustor.injector row 2, share"):
        assert words in lines


def test_cells_are_edited_one_by_one(duct: Case) -> None:
    new = duct.replace({"combustor.area.2.x": 0.2, "combustor.area.3.area": "500 cm^2", "combustor.injector.2.length": None})
    assert new.numbers["combustor.area.2.x"] == 0.2
    # written in centimetres as before
    assert new.spelled["combustor.area"][1]["x"] == "20 cm"  # type: ignore[index]
    assert "combustor.area.3.area_ratio" not in new.numbers
    assert "combustor.injector.2.length" not in new.numbers
    assert new.rows["combustor.area"][0] == duct.rows["combustor.area"][0]
    words = refused(duct.replace, {"combustor.area.5.x": 3.0, "inlet.ramp.1.angle": 0.1, "combustor.area.1.width": 3.0})
    assert "combustor.area row 5, x: there is no such row: given 3.0; allowed row 1 to 4" in words
    assert "inlet.ramp row 1, angle: there is no such row: given 0.1; allowed [[inlet.ramp]] first" in words
    assert "combustor.area row 2, x: place is not stated" in refused(duct.replace, {"combustor.area.2.x": None})
    assert "unknown key" in refused(duct.replace, {"combustor.area.1.width": 3.0})
    assert "inlet.cone: unknown key" in refused(duct.replace, {"inlet.cone": {"half_angle": 0.1}})


def test_whole_tables_are_replaced_and_keep_their_units(duct: Case) -> None:
    rows = [dict(row) for row in duct.rows["combustor.area"]]
    new = duct.replace({"combustor.area": [*rows[:3], {"x": np.float64(1.0), "area_ratio": 2.0}]})
    assert new.spelled["combustor.area"][1]["x"] == "15 cm"  # type: ignore[index]
    assert new.spelled["combustor.area"][3]["x"] == "1 m"  # type: ignore[index]
    assert new.replace({"combustor.area": rows}) == duct


def test_the_inputs_list_cells(duct: Case, geometry: Case) -> None:
    stated = {s.input.key: s for s in duct.inputs()}
    assert stated["combustor.area.2.x"].spelled == "15 cm"
    assert stated["combustor.area.2.x"].input.label == "duct section 2, place"
    assert stated["combustor.injector.1.axial_speed"].value == 0.0 and not stated["combustor.injector.1.axial_speed"].given
    assert stated["combustor.area.2.perimeter"].value is None
    assert "combustor.area" not in stated
    ramps = {s.input.key: s for s in geometry.inputs()}
    assert ramps["inlet.ramp.2.angle"].group == "inlet.quality"
    for case, rows in ((duct, stated), (geometry, ramps)):
        for key, row in rows.items():
            assert case.declared(key) == row.input
            assert input_of(key) in (row.input, replace(row.input, upper=3500.0, flight_upper=1500.0))
    without = {s.input.key for s in loads(template()).inputs()}
    assert not any(key.startswith(("inlet.ramp", "combustor.area")) for key in without)


def test_every_cell_takes_an_edit_and_nothing_else_changes(geometry: Case) -> None:
    for row in geometry.inputs():
        if isinstance(row.value, float) and row.value:
            new = geometry.replace({row.input.key: row.value * 0.999})
            assert new.numbers[row.input.key] == row.value * 0.999
            assert {k for k in new.numbers if new.numbers[k] != geometry.numbers[k]} == {row.input.key}


def test_tables_say_the_same_case(case: Case, geometry: Case, duct: Case) -> None:
    for one in (case, geometry, duct, geometry.replace({"inlet.cone.half_angle": 0.2}), loads(template("entry"))):
        again = loads(tomlkit.dumps({"format": 1, **one.tables()}))
        assert again.numbers == one.numbers
        assert again.choices == one.choices


def test_cells_are_batched(duct: Case) -> None:
    ratios = np.linspace(1.5, 2.5, 5)
    chosen, arrays = check_batch(duct, {"combustor.area.3.area_ratio": ratios, "combustor.area.4.x": [[1.0], [1.3]]})
    np.testing.assert_array_equal(arrays["combustor.area.3.area_ratio"], ratios)
    assert arrays["combustor.area.4.x"].shape == (2, 1)
    assert chosen.numbers["combustor.area.4.x"] == 1.0
    shares = np.linspace(0.1, 0.9, 5)
    _, arrays = check_batch(duct, {"combustor.injector.1.share": shares, "combustor.injector.2.share": 1.0 - shares})
    assert set(arrays) == {"combustor.injector.1.share", "combustor.injector.2.share"}


@pytest.mark.parametrize(
    ("values", "words"),
    [
        ({"combustor.area.3.x": [0.5, 1.3]}, "combustor.area row 4, x: the places do not rise: given 1.2 at index 1 m; allowed above"),
        ({"combustor.area.3.x": [0.5, -1.0]}, "combustor.area.3.x: out of bounds at index 1: given -1; allowed at least 0"),
        ({"combustor.injector.2.share": [0.4, 0.5]}, "the shares of the fuel do not sum to 1: given a sum of 1.1 at index 1"),
        (
            {"combustor.injector.2.x": [[0.4], [1.2]]},
            "combustor.injector row 2, x: the injector lies behind the duct: given 1.2 at index 1",
        ),
        ({"combustor.area.7.x": [0.5]}, "combustor.area row 7, x: there is no such row"),
        ({"combustor.area": [0.5]}, "combustor.area: not an input that takes numbers"),
        ({"combustor.slices": [24.0, 24.5]}, "combustor.slices: not a whole number at index 1: given 24.5"),
    ],
)
def test_batches_of_cells_refuse(duct: Case, values: dict[str, object], words: str) -> None:
    assert words in refused(check_batch, duct, values)


def test_differences_of_rows(duct: Case, geometry: Case) -> None:
    assert differences(duct, duct.replace({"combustor.area.2.x": 0.2})) == [("combustor.area.2.x", 0.15, 0.2)]
    shorter = duct.replace({"combustor.area": [dict(row) for row in duct.rows["combustor.area"][:3]], "combustor.injector.2.x": 0.1})
    assert [key for key, _, _ in differences(duct, shorter)] == ["combustor.area", "combustor.injector.2.x"]
    mixed = taking(duct, geometry, ["inlet"])
    assert mixed.rows["inlet.ramp"] == geometry.rows["inlet.ramp"]
    assert mixed.numbers["isolator.length"] == 0.5


def test_the_template_becomes_a_geometry_and_a_duct() -> None:
    ramps = uncommented(template(), "[[inlet.ramp]]", "angle", '"10 deg"')
    case = loads(without(ramps, "kinetic_energy_efficiency", "temperature_ratio"))
    assert case.choices["inlet.compression"] == "ramp"
    areas = uncommented(uncommented(template(), "[[combustor.area]]", "x", "0.0"), "", "area_ratio", "1.0")
    areas = areas.replace("\narea_ratio = 1.0\n", "\narea_ratio = 1.0\n[[combustor.area]]\nx = 1.0\narea_ratio = 2.0\n", 1)
    both = uncommented(areas, "[[combustor.injector]]", "x", "0.0")
    duct = loads(without(both, "friction_area_ratio").replace('process = "constant-area"', 'process = "duct"'))
    assert len(duct.rows["combustor.area"]) == 2
    assert duct.rows["combustor.injector"] == ({"x": 0.0, "share": 1.0, "axial_speed": 0.0},)


def uncommented(text: str, header: str, key: str, value: str) -> str:
    """The template with a table and one of its keys in force."""
    at = text.index(f"# {header}") if header else text.index("[[combustor.area]]")
    rest = text[at:].removeprefix("# ") if header else text[at:]
    return text[:at] + rest.replace(f"# {key} = ...", f"{key} = {value}", 1)


def without(text: str, *keys: str) -> str:
    return "\n".join(line for line in text.split("\n") if not line.startswith(tuple(f"{key} =" for key in keys)))


def test_the_json_schema_takes_what_the_case_room_takes(text: str) -> None:
    check = jsonschema.Draft202012Validator(json_schema())
    for sound in (text, GEOMETRY, DUCT, INLINE, template()):
        check.validate(tomlkit.parse(sound).unwrap())
    for bad in (
        {"inlet": {"ramp": []}},
        {"inlet": {"ramp": [{"length": 1.0}]}},
        {"inlet": {"cone": {"angle": 1.0}}},
        {"combustor": {"slices": 24.5}},
    ):
        assert not check.is_valid({"format": 1, **bad}), bad
    assert INPUT["inlet.ramp"].most == 16
