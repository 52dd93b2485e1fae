"""The schema and the declarations say the same; so does the JSON Schema."""

from __future__ import annotations

import re

from cycle.case import json_schema, loads, template
from cycle.case.schema import SPECIES, model
from cycle.gas.species import species_data
from cycle.quantities import GROUPS, INPUT, INPUTS, LATER, SECTIONS
from cycle.units import UNITS


def test_schema_has_exactly_the_declared_keys() -> None:
    fields = model().model_fields
    assert set(fields) == {"format", "title", "notes", "study", *SECTIONS}
    for section in SECTIONS:
        table = fields[section].annotation
        assert table is not None
        assert set(table.model_fields) == {i.name for i in INPUTS if i.section == section}  # type: ignore[attr-defined]


def test_json_schema_states_unit_bounds_default_and_meaning_of_every_key() -> None:
    schema = json_schema()
    assert schema["required"] == ["format"]
    for entry in INPUTS:
        table = schema["$defs"][entry.section.capitalize()]
        assert table["additionalProperties"] is False
        said = table["properties"][entry.name]
        assert entry.meaning in said["description"]
        assert said.get("default") == entry.default
        if entry.kind == "number":
            number, text = said["anyOf"]
            stated = {name: number.get(name) for name in ("minimum", "exclusiveMinimum", "maximum", "exclusiveMaximum")}
            assert stated == {
                "minimum": entry.lower,
                "exclusiveMinimum": entry.above,
                "maximum": entry.upper,
                "exclusiveMaximum": entry.below,
            }
            assert text["type"] == "string"
            assert all(unit in text["description"] for unit in UNITS[entry.unit] if unit)
        elif entry.kind == "choice":
            assert said["enum"] == list(entry.choices)


def test_json_schema_pattern_takes_what_the_template_writes() -> None:
    pattern = re.compile(json_schema()["$defs"]["Flight"]["properties"]["altitude"]["anyOf"][1]["pattern"])
    case = loads(template())
    texts = [v for k, v in case.spelled.items() if isinstance(v, str) and INPUT[k].kind == "number"]
    assert texts
    assert all(pattern.search(t) for t in texts)
    assert not pattern.search("fast")


def test_declarations_hold_together() -> None:
    names = {i.key for i in INPUTS} | {g.name for g in GROUPS} | {"start"}
    for declared in (*INPUTS, *GROUPS):
        assert all(name in names for name, _ in declared.when)
    for entry in INPUTS:
        assert not entry.follows or entry.follows in INPUT
        assert entry.kind != "choice" or entry.choices
        if entry.default is not None:
            assert not entry.required
        if entry.kind == "number" and isinstance(entry.default, float):
            assert entry.lower is None or entry.default >= entry.lower
            assert entry.above is None or entry.default > entry.above
            assert entry.upper is None or entry.default <= entry.upper
    for group in GROUPS:
        assert group.required == (group.default is None)
        assert all(key in INPUT for member in group.members for key in (*member.keys, *member.also))
    assert all(key.partition("=")[0] not in INPUT or "=" in key for key in LATER)


def test_species_of_an_air_composition_have_data() -> None:
    assert set(SPECIES) <= set(species_data()["species"])
