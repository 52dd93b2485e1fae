"""New cases, and where two cases differ."""

from __future__ import annotations

import pytest

from cycle.case import INPUT_GROUPS, Case, differences, loads, taking, template
from cycle.errors import CaseError
from cycle.quantities import INPUTS, SECTIONS


@pytest.mark.parametrize("start", ["flight", "entry"])
def test_a_template_loads_and_names_every_key_once(start: str) -> None:
    text = template(start)
    assert loads(text).choices["start"] == start
    lines = [line.removeprefix("# ") for line in text.split("\n")]
    for section in SECTIONS:
        first = lines.index(f"[{section}]")
        last = next((i for i in range(first + 1, len(lines)) if lines[i].startswith("[")), len(lines))
        found = [line.split(" =")[0] for line in lines[first:last] if " = " in line and line.split(" =")[0].isidentifier()]
        assert found == [i.name for i in INPUTS if i.section == section and i.kind != "rows"]
    assert max(map(len, text.split("\n"))) <= 100
    assert "invented" in text


def test_another_start_is_refused() -> None:
    with pytest.raises(KeyError):
        template("sea")


def test_commented_defaults_may_be_taken_as_they_are() -> None:
    case = loads(template())
    for row in case.inputs():
        if not row.given and row.input.default is not None:
            assert case.replace({row.input.key: row.input.default}).value(row.input.key) == row.value


def test_differences(case: Case) -> None:
    assert differences(case, case) == []
    other = case.replace({"flight.altitude": "27 km", "fuel.name": "methane", "combustor.burnt_fraction": 1.0})
    assert differences(case, other) == [
        ("flight.place", "dynamic_pressure", "altitude"),
        ("flight.altitude", None, 27e3),
        ("flight.dynamic_pressure", 50e3, None),
        ("fuel.name", "hydrogen", "methane"),
        ("combustor.burnt_fraction", 0.92, 1.0),
    ]
    stated = case.replace({"nozzle.velocity_coefficient": 1.0})
    assert differences(case, stated) == []


def test_taking_groups_walks_from_one_case_to_the_other(case: Case) -> None:
    other = case.replace(
        {"flight.altitude": "27 km", "fuel.name": "methane", "inlet.exit_mach": 3.0, "nozzle.ideal": True, "engine.capture_area": 2.0}
    )
    assert taking(case, other, []) == case
    assert differences(taking(case, other, INPUT_GROUPS), other) == []
    some = taking(case, other, ["flight", "nozzle"])
    assert {key for key, _, _ in differences(case, some)} == {
        "flight.place", "flight.altitude", "flight.dynamic_pressure", "nozzle.exit", "nozzle.exit_area_over_capture", "nozzle.ideal",
    }  # fmt: skip
    with pytest.raises(KeyError):
        taking(case, other, ["wings"])


def test_a_mixture_that_is_no_case_says_why(case: Case) -> None:
    bare = case.replace({"gas.model": "constant-gamma", "fuel.heating_value": 120e6, "combustor.fuel_air_ratio": 0.02})
    with pytest.raises(CaseError, match="does not say what the fuel burns to"):
        taking(case, bare, ["fuel", "combustor"])
    assert differences(taking(bare, case, ["gas", "fuel", "combustor"]), case) == []
