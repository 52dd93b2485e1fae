"""The screen's items of a case with arrays of tables, and of one with an air of its own."""

from __future__ import annotations

from pathlib import Path

import pytest

import cases
from cycle.case import load, loads
from tests.case.conftest import DUCT
from tui.items import change_of, describe, entry_for, items
from tui.session import Session


def test_cells_are_items_of_the_screen() -> None:
    case = loads(DUCT)
    session = Session("opening.toml", case=case, station="4")
    found = {item.key: item for item in items(session)}
    item = found["combustor.area.2.x"]
    assert item.written == "15 cm"
    entry = entry_for(item, session)
    change = change_of(entry)
    assert change == {"set": {"combustor.area.2.x": "15 cm"}}
    new = case.replace({"combustor.area.2.x": "20 cm"})
    assert describe(case, new, {"set": {"combustor.area.2.x": "20 cm"}}, "si") == "duct section 2, place 15 cm -> 20 cm"


def test_vitiated_air_is_not_called_standard_and_its_field_holds_it() -> None:
    case = load(Path(cases.__file__).with_name("bench-three.toml"))
    session = Session("bench-three.toml", case=case, station="3")
    item = next(item for item in items(session) if item.key == "air.mole_fractions")
    assert item.written == "given, 4 species"
    entry = entry_for(item, session)
    assert entry.text == "N2 0.6, O2 0.21, H2O 0.183, Ar 0.007"
    assert case.replace(change_of(entry)["set"]).fractions == pytest.approx(dict(case.fractions), rel=1e-12)
    without = Session("bench-three.toml", case=case.replace({"air.mole_fractions": None}), station="3")
    assert [item.written for item in items(without) if item.key.startswith("air")] == ["standard"]
