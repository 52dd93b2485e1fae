"""Curves and maps over inputs are the walks of their points, in one batch."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

import cycle
from cycle.errors import CaseError
from cycle.quantities import INPUT, INPUTS, input_of
from cycle.sweep import around, curve
from tests.tui.command_support import DUCT, QUICK, RIG

CASE = cycle.loads(QUICK)
NUMBERS = [entry for entry in INPUTS if entry.kind == "number" and not entry.whole]


@given(st.sampled_from(NUMBERS), st.floats(0.0, 1.0), st.sampled_from([0.5, 1.0, 3.0]))
def test_a_range_rises_through_its_value_and_stays_within_bounds(entry: object, place: float, factor: float) -> None:
    entry = INPUT[entry.key]  # type: ignore[attr-defined]
    low = entry.lower if entry.lower is not None else entry.over
    assert low is not None and entry.upper is not None
    value = low + (0.02 + 0.9 * place) * (entry.upper - low)
    found = around(entry, value, factor)
    assert value in found and list(found) == sorted(set(found))
    assert all(low <= x <= entry.upper for x in found)
    if value - 20 * factor * entry.step > low and value + 20 * factor * entry.step < entry.upper:
        assert len(found) == 41
        assert found[-1] - found[0] == pytest.approx(40 * factor * entry.step)


def test_whole_numbers_have_a_whole_range() -> None:
    assert around(INPUT["combustor.slices"], 48.0, 0.1, steps=2) == (46.0, 47.0, 48.0, 49.0, 50.0)


def test_a_curve_is_the_walks_of_its_points() -> None:
    machs = [7.5, 8.0, 9.0, 10.0]
    found = curve(CASE, {"flight.mach": machs}, ["4.temperature", "fuel_flow"])
    assert found.shape == (4,) and found.axes[0].values == tuple(machs)
    for i, mach in enumerate(machs):
        walk = cycle.solve(CASE.replace({"flight.mach": mach}))
        assert (found.status[i], found.mode[i]) == (walk.status, walk.mode) == ("solved", "scramjet")
        assert found.figures["thrust"][i] == pytest.approx(walk.performance.thrust, rel=1e-9)
        assert found.figures["fuel_flow"][i] == pytest.approx(walk.performance.fuel_flow, rel=1e-9)
        assert found.figures["4.temperature"][i] == pytest.approx(walk.station["4"].temperature, rel=1e-9)


def test_a_map_has_the_first_input_in_its_rows() -> None:
    machs, ratios = [7.0, 8.0], [0.004, 0.006, 0.008]
    found = curve(CASE, {"flight.mach": machs, "combustor.fuel_air_ratio": ratios})
    assert found.shape == (2, 3)
    walk = cycle.solve(CASE.replace({"flight.mach": 8.0, "combustor.fuel_air_ratio": 0.006}))
    assert found.figures["thrust"][1 * 3 + 1] == pytest.approx(walk.performance.thrust, rel=1e-9)


def test_points_without_a_solution_say_why_and_have_no_value() -> None:
    found = curve(CASE, {"combustor.fuel_air_ratio": [0.01, 0.06]})
    assert found.status == ("solved", "choked") and found.mode[1] == "none"
    assert math.isnan(found.figures["thrust"][1])
    assert set(found.reasons) == {"choked"} and found.reasons["choked"].startswith("burner: ")


def test_values_out_of_bounds_are_left_out_before() -> None:
    found = curve(CASE, {"flight.mach": [-1.0, 0.0, 8.0, math.nan, 31.0]})
    assert found.axes[0].values == (8.0,) and found.status == ("solved",)


def test_another_way_to_say_it_takes_the_place_of_the_one_given() -> None:
    found = curve(CASE, {"flight.altitude": [28e3, 30e3]})
    walk = cycle.solve(CASE.replace({"flight.altitude": 30e3}))
    assert found.figures["thrust"][1] == pytest.approx(walk.performance.thrust, rel=1e-9)


def test_rows_that_do_not_fit_are_refused_point_by_point() -> None:
    duct = cycle.loads(DUCT)
    found = curve(duct, {"combustor.area.2.x": [0.2, 0.3, 1.2, 1.5]})
    assert found.status == ("solved", "solved", "refused", "refused")
    assert found.reasons == {"refused": "the places do not rise"}
    assert math.isnan(found.figures["thrust"][2]) and found.mode[2] == "none"


def test_two_cells_are_held_to_their_rules_together() -> None:
    duct = cycle.loads(DUCT)
    found = curve(duct, {"combustor.area.2.x": [0.2, 1.3], "combustor.area.3.x": [1.2, 1.6]})
    assert found.status == ("solved", "solved", "refused", "solved")


def test_shares_move_the_others() -> None:
    rows = [{"x": 0.05, "share": 0.6}, {"x": 0.3, "share": 0.4}]
    duct = cycle.loads(DUCT).replace({"combustor.injector": rows})
    found = curve(duct, {"combustor.injector.1.share": [0.5, 1.0]}, ["4.temperature"])
    other = duct.replace({"combustor.injector": [{**rows[0], "share": 0.5}, {**rows[1], "share": 0.5}]})
    assert found.figures["4.temperature"][0] == pytest.approx(cycle.solve(other).station["4"].temperature, rel=1e-9)
    assert found.status == ("solved", "solved")


def test_a_station_that_no_point_reaches_has_no_value() -> None:
    found = curve(CASE, {"combustor.fuel_air_ratio": [0.06, 0.07]}, ["10.mach"])
    assert all(math.isnan(x) for x in found.figures["10.mach"])


@pytest.mark.parametrize(
    ("text", "axes", "words"),
    [
        (QUICK, {"flight.speeed": [1.0]}, "not an input that takes numbers"),
        (QUICK, {"gas.model": [1.0]}, "not an input that takes numbers"),
        (QUICK, {"flight.mach": [-2.0]}, "no value within the bounds"),
        (QUICK, {"flight.altitude": [1e4], "flight.dynamic_pressure": [5e4]}, "stated more than once"),
        (DUCT, {"combustor.slices": [16.0, 48.0]}, "cannot vary within a batch"),
        (RIG, {"fuel.formation_enthalpy": [0.0, 1e4]}, "cannot vary within a batch"),
    ],
)
def test_what_is_no_axis_is_refused(text: str, axes: dict[str, list[float]], words: str) -> None:
    with pytest.raises(CaseError, match=words):
        curve(cycle.loads(text), axes)


def test_an_unknown_figure_and_a_third_axis_are_refused() -> None:
    with pytest.raises(KeyError, match="temprature"):
        curve(CASE, {"flight.mach": [8.0]}, ["4.temprature"])
    with pytest.raises(ValueError, match="one or two axes"):
        curve(CASE, {})


def test_a_corridor_upside_down_is_refused() -> None:
    found = curve(CASE, {"limits.dynamic_pressure_low": [2e4, 9.9e4]})
    assert found.status == ("solved", "refused")
    assert input_of("limits.dynamic_pressure_low") == found.axes[0].input
