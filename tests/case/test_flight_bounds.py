"""Bounds that are closer in flight than on a rig, whose fuel may come from a heater. Every place that says a bound says this one."""

from __future__ import annotations

from pathlib import Path

import jsonschema
import numpy as np
import pytest

import cycle
from cycle.case import json_schema
from cycle.case.moves import Refusal, moved
from cycle.case.rules import bounds
from cycle.case.studies import faults_of
from cycle.limit_solving import solve_for_limit
from cycle.quantities import INPUT
from cycle.sweep import curve
from tui.entries import facts
from tui.items import bounds as shown_bounds

CASES = Path(__file__).parents[2] / "cases"
KEY = "fuel.temperature"
RIG, FLIGHT = cycle.load(CASES / "bench-three.toml"), cycle.load(CASES / "saltmarsh.toml")


def test_rig_takes_fuel_as_hot_as_a_heater_gives() -> None:
    hot = cycle.solve(RIG.replace({KEY: "3500 K", "combustor.process": "constant-pressure"}))
    cold = cycle.solve(RIG.replace({"combustor.process": "constant-pressure"}))
    assert hot.status == "solved" and hot.audit.ok
    assert hot.station["4"].temperature > cold.station["4"].temperature + 200.0
    with pytest.raises(cycle.CaseError, match=r"fuel.temperature: out of bounds: given 3600.0; allowed at least 15, at most 3500 K"):
        RIG.replace({KEY: 3600.0})
    batch = cycle.solve(RIG, {KEY: np.array([300.0, 3500.0])})
    assert batch.shape == (2,)


def test_flight_keeps_its_bound_and_says_it() -> None:
    allowed = "allowed at least 15, at most 1500 K$"
    assert FLIGHT.replace({KEY: 1500.0}).numbers[KEY] == 1500.0
    with pytest.raises(cycle.CaseError, match=f"fuel.temperature: out of bounds in flight: given 1501 K; {allowed}"):
        FLIGHT.replace({KEY: 1501.0})
    with pytest.raises(cycle.CaseError, match=f"fuel.temperature: out of bounds at index 1: given 1600; {allowed}"):
        cycle.solve(FLIGHT, {KEY: np.array([300.0, 1600.0])})
    # a rig that takes off must mind it
    with pytest.raises(cycle.CaseError, match="out of bounds in flight"):
        cycle.loads(FLIGHT.text.replace('temperature = "300 K"', 'temperature = "2000 K"'))


@pytest.mark.parametrize(("case", "most"), [(RIG, 3500.0), (FLIGHT, 1500.0)])
def test_form_moves_studies_and_sweeps_know_the_bound_of_the_case(case: cycle.Case, most: float) -> None:
    form = next(s.input for s in case.inputs() if s.input.key == KEY)
    assert form.upper == most and f"at most {most:.0f} K" in bounds(form) and f"to {most:.0f} K" in shown_bounds(form, "si")
    assert isinstance(moved(case, {KEY: most + 1.0}), Refusal) and moved(case, {KEY: most}) == {KEY: most}
    study = {"outputs": ["fuel_flow"], "vary": [{"input": KEY, "from": 300.0, "to": most + 1.0, "points": 3}]}
    assert len(faults_of(case, "hot", study)) == 1
    line = curve(case, {KEY: [300.0, most, most + 1.0]})
    assert line.axes[0].values == (300.0, most)
    assert solve_for_limit(case, "gas_temperature", KEY).input.upper == most


def test_json_schema_and_entry_state_both_bounds() -> None:
    schema = json_schema()
    number = schema["$defs"]["Fuel"]["properties"]["temperature"]["anyOf"][0]
    assert number["maximum"] == INPUT[KEY].upper == 3500.0
    flight = next(part for part in schema["allOf"] if part["if"] == {"not": {"required": ["entry"]}})
    assert flight["then"]["properties"]["fuel"]["properties"]["temperature"] == {"maximum": 1500.0}
    good = {"format": 1, "fuel": {"temperature": 1500.0}}
    jsonschema.validate(good, schema)
    jsonschema.validate({"format": 1, "entry": {}, "fuel": {"temperature": 3500.0}}, schema)
    for wrong in ({**good, "fuel": {"temperature": 1600.0}}, {"format": 1, "entry": {}, "fuel": {"temperature": 3600.0}}):
        with pytest.raises(jsonschema.ValidationError):
            jsonschema.validate(wrong, schema)
    assert bounds(INPUT[KEY]) == "at least 15, at most 3500 K, at most 1500 K in flight"
    assert "to 1500 K in flight" in dict(facts(INPUT[KEY], "si"))["allowed"]
