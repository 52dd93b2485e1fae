"""Arrays of tables and sub-tables in the text of a case: saved with all else kept."""

from __future__ import annotations

import math
import tempfile
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.case import load, loads, save
from tests.case.conftest import DUCT, GEOMETRY, INLINE
from tests.case.test_faults import edit


def saved(text: str, changes: dict[str, object]) -> str:
    """Text of a file after an edit and a save, read back as the same case."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "case.toml"
        path.write_text(text)
        case = load(path)
        new = case.replace(changes)
        save(new, path, case.stamp)
        assert load(path) == new
        return path.read_text()


def test_saving_changes_only_the_cells() -> None:
    assert saved(DUCT, {"combustor.area.2.x": 0.2, "combustor.injector.2.length": 0.8}) == DUCT.replace('"15 cm"', '"20 cm"').replace(
        "length = 0.7 ", "length = 0.8 "
    )
    assert saved(DUCT, {"combustor.area.3.area": 0.05}) == DUCT.replace("area_ratio = 1.9", "area = 0.05")
    assert saved(INLINE, {"combustor.area.2.area_ratio": 1.8, "inlet.ramp.2.angle": "6 deg"}) == INLINE.replace("1.9", "1.8").replace(
        "7 deg", "6 deg"
    )
    removed = 'length = "0.9 m"            # along the surface\n'
    bare = edit(GEOMETRY, ('lip_x = "1.9 m"\n', ""), ('lip_y = "0.52 m"\n', ""))
    assert saved(bare, {"inlet.ramp.1.length": None}) == bare.replace(removed, "")


def test_a_row_taken_out_leaves_the_others_and_their_comments() -> None:
    rows = [{"x": 0.0, "area_ratio": 1.0}, {"x": "90 cm", "area_ratio": 1.9}, {"x": "1.2 m", "area_ratio": 2.8}]
    gone = '[[combustor.area]]\nx = "15 cm"      # corner\narea_ratio = 1.0\n'
    assert saved(DUCT, {"combustor.area": rows}) == edit(DUCT, (gone, ""))
    assert saved(DUCT, {"combustor.area": rows[:2]}) == edit(
        DUCT, (gone, ""), ('[[combustor.area]]\nx = "1.2 m"\narea_ratio = 2.8\n\n', "")
    )
    inline = saved(INLINE, {"combustor.area": [rows[0], rows[2]]})
    assert "# entry" in inline and "90 cm" not in inline


def test_a_row_put_in_stands_where_it_belongs() -> None:
    rows = [
        {"x": 0.0, "area_ratio": 1.0},
        {"x": "15 cm", "area_ratio": 1.0},
        {"x": 0.5, "area_ratio": 1.2},
        {"x": "90 cm", "area_ratio": 1.9},
    ]
    last = {"x": "1.2 m", "area_ratio": 2.8}
    new = '[[combustor.area]]\nx = "50 cm"\narea_ratio = 1.2\n'
    at = '[[combustor.area]]\nx = "90 cm"'
    assert saved(DUCT, {"combustor.area": [*rows, last]}) == DUCT.replace(at, new + at)
    end = "[[combustor.area]]\nx = 2.0\narea_ratio = 3.0\n\n"
    kept = [row for row in rows if row["x"] != 0.5]
    at = "[[combustor.injector]]\nx = 0.0"
    assert saved(DUCT, {"combustor.area": [*kept, last, {"x": 2.0, "area_ratio": 3.0}]}) == DUCT.replace(at, end + at)


def test_tables_that_a_file_does_not_have_are_added(text: str) -> None:
    ramps = [{"angle": "8 deg"}, {"angle": "7 deg"}]
    with_ramps = saved(text, {"inlet.ramp": ramps})
    assert with_ramps.endswith('\n[[inlet.ramp]]\nangle = "8 deg"\n\n[[inlet.ramp]]\nangle = "7 deg"\n')
    assert "# a comment between keys" in with_ramps
    assert saved(text, {"inlet.cone.half_angle": "12 deg"}).endswith('\n[inlet.cone]\nhalf_angle = "12 deg"\n')
    assert "inlet = { cowl_angle" in saved(INLINE, {"inlet.cone.half_angle": "12 deg"}).replace("inlet = {  ", "inlet = { ")
    back = {"inlet.kinetic_energy_efficiency": 0.97, "inlet.exit_mach": 3.0}
    assert "ramp" not in saved(INLINE, back)
    assert loads(saved(saved(INLINE, back), {"inlet.ramp": ramps})).rows["inlet.ramp"][1]["angle"] == pytest.approx(math.radians(7.0))


PLACES = st.lists(st.integers(1, 200), min_size=1, max_size=8, unique=True).map(sorted)


@st.composite
def sections(draw: st.DrawFn) -> list[dict[str, object]]:
    """Rows of a sound duct that ends behind the injectors of the shared files."""
    places = [0.0, *(n / 100.0 for n in draw(PLACES)), 2.5]
    sizes = st.sampled_from(["area_ratio", "area"])
    rows: list[dict[str, object]] = []
    for x in places:
        written = draw(st.sampled_from([x, f"{x} m", f"{x * 100:.0f} cm"]))
        rows.append({"x": written, draw(sizes): draw(st.floats(0.5, 5.0)) if x else 1.0})
    return rows


@pytest.mark.parametrize("text", [DUCT, INLINE], ids=["headers", "inline"])
@settings(deadline=None, max_examples=50)
@given(first=sections(), second=sections())
def test_any_rows_are_saved_and_read_back(text: str, first: list[dict[str, object]], second: list[dict[str, object]]) -> None:
    once = saved(text, {"combustor.area": first})
    twice = saved(once, {"combustor.area": second})
    assert loads(twice).rows == loads(text).replace({"combustor.area": second}).rows
    if text is DUCT:
        comments = [line for line in DUCT.split("\n") if line.startswith("#")]
        kept = [line for line in twice.split("\n") if line.startswith("#")]
        assert kept == comments
