"""Walks side by side, from their records alone."""

from __future__ import annotations

import math

import pytest

import cycle
from cycle.compare import Comparison, Side, compare, station_names
from cycle.record import record
from tests.tui.command_support import CHOKED, DUCT, HOT, QUICK


def side(text: str, name: str = "x", version: str = "1", species_data: str = "a") -> Side:
    return Side(name, record(cycle.solve(cycle.loads(text))), version, species_data)


@pytest.fixture(scope="module")
def richer() -> Comparison:
    return compare([side(HOT, "lean"), side(HOT.replace("equivalence_ratio = 0.6", "equivalence_ratio = 0.66"), "rich")])


def test_only_inputs_that_differ_are_listed(richer: Comparison) -> None:
    (only,) = richer.settings
    assert only.input.key == "combustor.equivalence_ratio"
    assert only.values == (0.6, 0.66)


def test_changes_are_relative_to_the_first(richer: Comparison) -> None:
    (flow,) = [f for f in richer.headline if f.output.key == "fuel_flow"]
    assert flow.changes() == (0.0, pytest.approx(0.1, rel=1e-9))
    (thrust,) = [f for f in richer.headline if f.output.key == "thrust"]
    assert thrust.changes()[1] > 0.0


def test_figures_with_a_conventional_zero_change_by_difference(richer: Comparison) -> None:
    (row,) = [f for f in richer.stations if (f.output.key, f.station) == ("enthalpy", "4")]
    assert not row.relative
    assert row.changes()[1] == row.values[1] - row.values[0] != 0.0


def test_stations_before_the_burner_do_not_change(richer: Comparison) -> None:
    before = [f for f in richer.stations if f.station in ("0", "2", "3")]
    assert before
    for row in before:
        # Stations before the changed input are computed by the same arithmetic, the thrust potential by the same expansion.
        assert row.changes()[1] == pytest.approx(0.0, abs=1e-12) or math.isnan(row.changes()[1])
    assert any(abs(f.changes()[1]) > 1e-3 for f in richer.stations if f.station == "4")


def test_versions_and_species_data_are_compared() -> None:
    one = side(QUICK, "old", "0.0.1", "a" * 64)
    notes = compare([one, Side("new", one.walk, "0.1.0", "b" * 64)]).notes
    assert notes == (
        "The walks were computed by different versions: old: 0.0.1; new: 0.1.0.",
        f"The walks were computed with different species data: old: {'a' * 12}; new: {'b' * 12}.",
    )


def test_different_datums_are_not_compared() -> None:
    found = compare([side(HOT, "hot"), side(QUICK, "quick")])
    assert "Enthalpy and entropy are not compared" in found.notes[0]
    assert not [f for f in found.stations if f.output.key in ("enthalpy", "total_enthalpy", "entropy")]
    assert [f for f in found.stations if f.output.key == "thrust_potential"]


def test_a_failed_walk_is_said_and_its_gaps_are_nan() -> None:
    found = compare([side(QUICK, "good"), side(CHOKED, "bad")])
    assert any(note.startswith("bad has no solution: burner: ") for note in found.notes)
    (thrust,) = [f for f in found.headline if f.output.key == "thrust"]
    assert math.isnan(thrust.values[1]) and math.isnan(thrust.changes()[1])
    assert station_names(found.sides) == ("0", "2", "3", "4", "10")


def test_rows_are_compared_cell_by_cell_and_margins_by_mode() -> None:
    two = 'x = "5 cm"\nshare = 0.5\n[[combustor.injector]]\nx = 0.1\nshare = 0.5'
    longer = DUCT.replace("area_ratio = 1.8", "area_ratio = 2.0").replace('x = "5 cm"', two)
    found = compare([side(DUCT, "short"), side(longer, "long")])
    assert {s.input.key: s.values for s in found.settings} == {
        "combustor.area.3.area_ratio": (1.8, 2.0),
        "combustor.injector.1.share": (1.0, 0.5),
        "combustor.injector.2.x": (None, 0.1),
        "combustor.injector.2.share": (None, 0.5),
        "combustor.injector.2.axial_speed": (None, 0.0),
    }
    margins = {f.output.key: f.values for f in found.margins}
    assert margins["heat.unstart"][1] != margins["heat.unstart"][0] > 0.0
    assert set(margins) >= {"process.separation_margin", "process.isolator_margin", "heat.train"}


def test_borders_of_different_heat_inputs_are_not_compared() -> None:
    other = DUCT.replace("equivalence_ratio = 0.4", "fuel_air_ratio = 0.0117")
    keys = {f.output.key for f in compare([side(DUCT), side(other)]).margins}
    assert "process.separation_margin" in keys
    assert "heat.unstart" not in keys


def test_walks_without_modes_to_match_have_no_margins() -> None:
    assert compare([side(HOT), side(QUICK)]).margins == ()


def test_one_walk_cannot_be_compared() -> None:
    with pytest.raises(ValueError, match="two walks or more"):
        compare([side(QUICK)])
