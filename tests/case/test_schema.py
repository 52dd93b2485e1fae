"""The schema and the declarations say the same; so does the JSON Schema."""

from __future__ import annotations

import re
from typing import Any

from cycle.case import json_schema, loads, template
from cycle.case.schema import SPECIES, model
from cycle.gas.species import species_data
from cycle.quantities import GROUPS, INPUT, INPUTS, SECTIONS, TABLES, Input
from cycle.units import UNITS


def test_schema_has_exactly_the_declared_keys() -> None:
    fields = model().model_fields
    assert set(fields) == {"format", "title", "notes", "study", *TABLES}
    for section in SECTIONS:
        inside = fields
        for part in section.split("."):
            inside = inside[part].annotation.model_fields  # type: ignore[union-attr]
        tables = {name.rpartition(".")[2] for name in SECTIONS if name.rpartition(".")[0] == section}
        assert set(inside) == {i.name for i in INPUTS if i.section == section} | tables


def test_json_schema_states_unit_bounds_default_and_meaning_of_every_key() -> None:
    schema = json_schema()
    assert schema["required"] == ["format"]
    for entry in INPUTS:
        table = _reached(schema, entry.section)
        assert table["additionalProperties"] is False
        check_said(schema, entry, table["properties"][entry.name])


def _reached(schema: dict[str, Any], section: str) -> dict[str, Any]:
    """The part of the schema that says what a table holds."""
    found = schema
    for part in section.split("."):
        found = schema["$defs"][found["properties"][part]["$ref"].rpartition("/")[2]]
    return found


def check_said(schema: dict[str, Any], entry: Input, said: dict[str, Any]) -> None:
    assert entry.meaning in said["description"]
    assert said.get("default") == entry.default
    if entry.kind == "number":
        number, text = said["anyOf"]
        stated = {name: number.get(name) for name in ("minimum", "exclusiveMinimum", "maximum", "exclusiveMaximum")}
        assert stated == {
            "minimum": entry.lower,
            "exclusiveMinimum": entry.over,
            "maximum": entry.upper,
            "exclusiveMaximum": entry.below,
        }
        assert number.get("multipleOf") == (1.0 if entry.whole else None)
        assert text["type"] == "string"
        assert all(unit in text["description"] for unit in UNITS[entry.unit] if unit)
    elif entry.kind == "choice":
        assert said["enum"] == list(entry.choices)
    elif entry.kind == "rows":
        assert (said["minItems"], said["maxItems"]) == (entry.fewest, entry.most)
        row = schema["$defs"][said["items"]["$ref"].rpartition("/")[2]]
        assert row["additionalProperties"] is False
        assert row.get("required", []) == [column.key for column in entry.columns if column.required]
        assert set(row["properties"]) == {column.key for column in entry.columns}
        for column in entry.columns:
            check_said(schema, column, row["properties"][column.key])


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
    for entry in INPUTS:
        assert bool(entry.columns) == (entry.kind == "rows")
        assert all(column.kind == "number" and "." not in column.key for column in entry.columns)
        assert set(entry.one_of) <= {column.key for column in entry.columns}
        assert 1 <= entry.fewest <= entry.most <= 64


def test_species_of_an_air_composition_have_data() -> None:
    assert set(SPECIES) <= set(species_data()["species"])
