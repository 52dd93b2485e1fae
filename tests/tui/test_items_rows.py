"""The screen's items of a case with arrays of tables."""

from __future__ import annotations

from cycle.case import loads
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
