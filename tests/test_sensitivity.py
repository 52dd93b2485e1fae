"""Sensitivities of every input in one batch are the differences that one takes by hand, point by point."""

from __future__ import annotations

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import cycle
from cycle.case import thawed
from cycle.errors import CaseError
from cycle.quantities import HEADLINE, input_of
from cycle.sensitivity import Sensitivities, left_out, plain, sensitivities
from tests.random_cases import random_case, written
from tests.tui.command_support import CHOKED, DUCT, DUCT_RIG, HOT, QUICK, RIG, ROOT
from tui.rows import cell_changes

TWIN = 1e-9
"""Relative difference of a figure in a batch from that of its point alone: the contract has 1e-10 of the stream thrust, of which thrust
is a difference."""


def shipped(name: str) -> cycle.Case:
    return cycle.load(ROOT / "cases" / f"{name}.toml")


def alone(case: cycle.Case, key: str, value: float) -> cycle.Walk:
    """The point of an edit as the screen makes it, solved alone."""
    return cycle.solve(case.replace(cell_changes(case, key, value)))


def by_hand(case: cycle.Case, key: str, step: float, side: str) -> dict[str, float]:
    value = case.numbers[key]
    places = {"central": (value - step, value + step), "above": (value, value + step), "below": (value, value + step)}[side]
    assert (step < 0.0) == (side == "below")
    below, above = (alone(case, key, place).performance for place in places)
    share = 0.5 if side == "central" else 1.0
    return {output: share * (above[output] - below[output]) for output in HEADLINE[case.choices["start"]]}


def held(case: cycle.Case, found: Sensitivities, key: str) -> None:
    row = found.row(key)
    assert row is not None, key
    for output, change in by_hand(case, key, row.step, row.side).items():
        scale = abs(found.base[output])
        if math.isnan(change):
            assert math.isnan(row.changes[output])
        else:
            assert row.changes[output] == pytest.approx(change, rel=0.0, abs=2.0 * TWIN * scale), (key, output)


def held_all(case: cycle.Case, found: Sensitivities) -> None:
    for row in found.rows:
        if row.side != "none":
            held(case, found, row.input.key)


@pytest.mark.parametrize("name", ["saltmarsh", "sandbar", "bench-three"])
def test_every_row_of_a_case_is_the_difference_by_hand(name: str) -> None:
    case = shipped(name)
    found = sensitivities(case)
    assert {row.input.key for row in found.rows} | set(found.left_out) == set(case.numbers)
    assert all(found.base[key] == pytest.approx(cycle.solve(case).performance[key], rel=TWIN, nan_ok=True) for key in found.outputs)
    held_all(case, found)


@pytest.mark.parametrize(
    ("name", "keys"),
    [
        ("tidegate", ("flight.mach", "inlet.ramp.1.angle", "combustor.equivalence_ratio", "combustor.area.1.x", "combustor.area.2.x",
                      "combustor.area.3.area_ratio", "combustor.injector.1.x", "nozzle.velocity_coefficient")),
        ("lighthouse", ("inlet.cone.half_angle", "inlet.internal_contraction", "nozzle.throat_area")),
        ("breakwater", ("combustor.injector.1.share", "combustor.injector.2.axial_speed", "combustor.wall_temperature")),
    ],
)  # fmt: skip
def test_flowpaths_with_geometry_are_the_differences_by_hand(name: str, keys: tuple[str, ...]) -> None:
    case = shipped(name)
    found = sensitivities(case, cycle.solve(case))
    for key in keys:
        held(case, found, key)


@settings(max_examples=6)
@given(st.integers(0, 10**6))
def test_any_case_has_the_differences_by_hand(seed: int) -> None:
    case = cycle.loads(written(random_case(seed)))
    held_all(case, sensitivities(case))


def test_a_step_beyond_a_bound_is_taken_to_the_other_side_and_marked() -> None:
    found = sensitivities(cycle.loads(HOT))
    highest, lowest = found.row("nozzle.divergence_factor"), found.row("combustor.wall_heat")
    assert highest is not None and lowest is not None
    assert (highest.side, highest.above, highest.reason) == ("below", "bound", "above: out of bounds")
    assert (lowest.side, lowest.below, lowest.reason) == ("above", "bound", "below: out of bounds")
    assert highest.step < 0.0 < lowest.step
    assert highest.changes["thrust"] < 0.0 and lowest.changes["thrust"] < 0.0


@settings(max_examples=12)
@given(st.integers(0, 10**6), st.floats(0.0, 1.0))
def test_a_step_that_is_offered_is_one_that_the_input_can_take(seed: int, place: float) -> None:
    """A number near one of its bounds, by less than its step: the value a step away is a case, whichever side is offered."""
    case = cycle.loads(written(random_case(seed)))
    keys = [key for key in case.numbers if not left_out(key) and (entry := input_of(key)) and entry.upper is not None]
    for key in keys:
        entry = input_of(key)
        assert entry is not None and entry.upper is not None
        try:
            edge = case.replace({key: entry.upper - place * entry.step})
        except cycle.CaseError:
            continue
        for row in sensitivities(edge).rows:
            if row.side != "none":
                alone(edge, row.input.key, row.value + row.step)
        break


def test_a_step_as_large_as_the_value_is_taken_upwards_only() -> None:
    lean = HOT.replace("equivalence_ratio = 0.6", "equivalence_ratio = 0.01")
    row = sensitivities(cycle.loads(lean)).row("combustor.equivalence_ratio")
    assert row is not None
    assert (row.side, row.below, row.reason) == ("above", "bound", "below: the step is as large as the value")


def test_a_point_without_a_solution_names_its_status() -> None:
    # half a step below what the narrow burner passes: a step up chokes
    narrow = shipped("narrows")
    largest = cycle.solve(narrow).largest_heat()
    assert largest is not None
    case = narrow.replace({"combustor.equivalence_ratio": largest - 0.005})
    row = sensitivities(case).row("combustor.equivalence_ratio")
    assert row is not None
    assert (row.side, row.below, row.above, row.reason) == ("below", "solved", "choked", "above: no solution, choked")
    held(case, sensitivities(case), "combustor.equivalence_ratio")


def test_a_case_without_a_solution_says_so() -> None:
    case = cycle.loads(CHOKED)
    for found in (sensitivities(case), sensitivities(case, cycle.solve(case))):
        assert (found.rows, found.why_not) == ((), "no solution: choked")
        assert plain(found) is None


def test_a_figure_without_a_value_has_none_and_the_others_have() -> None:
    case = cycle.loads(QUICK.replace("fuel_air_ratio = 0.010", "fuel_air_ratio = 0.0"))
    row = sensitivities(case).row("flight.mach")
    assert row is not None and row.side == "central"
    assert math.isnan(row.changes["specific_impulse"]) and math.isfinite(row.changes["thrust"])
    (first, *_) = plain(sensitivities(case)) or []
    assert first["changes"]["specific_impulse"] is None


def test_the_fuel_of_a_lost_point_may_leave_no_impulse() -> None:
    case = cycle.loads(QUICK.replace("fuel_air_ratio = 0.010", "fuel_air_ratio = 0.001"))
    row = sensitivities(case).row("combustor.fuel_air_ratio")
    assert row is not None
    assert row.side == "above" and math.isfinite(row.changes["specific_impulse"])


def test_a_change_over_a_border_of_the_modes_is_marked() -> None:
    # this duct is attached up to an equivalence ratio of 1.23, see its text
    edge = cycle.loads(DUCT.replace("equivalence_ratio = 0.4", "equivalence_ratio = 1.23"))
    row = sensitivities(edge).row("combustor.equivalence_ratio")
    assert row is not None
    assert {row.modes[0], row.modes[-1]} == {"scramjet", "scramjet-shock-train"}
    calm = sensitivities(cycle.loads(DUCT)).row("combustor.equivalence_ratio")
    assert calm is not None and calm.modes == ()


def test_the_duct_of_a_rig_has_modes_too() -> None:
    case = cycle.loads(DUCT_RIG)
    found = sensitivities(case)
    assert found.outputs == HEADLINE["entry"]
    held(case, found, "combustor.area.3.area_ratio")
    assert all(mode != "rig" for row in found.rows for mode in row.modes)


def test_cells_that_cannot_move_say_what_holds_them() -> None:
    found = sensitivities(cycle.loads(DUCT))
    ratio, share = found.row("combustor.area.1.area_ratio"), found.row("combustor.injector.1.share")
    assert ratio is not None and share is not None
    assert (ratio.side, ratio.below, ratio.above) == ("none", "refused", "refused")
    assert ratio.reason == "burner entry has another area" and ratio.changes == {}
    assert (share.below, share.above) == ("refused", "bound")


def test_what_follows_an_input_goes_along() -> None:
    case = cycle.loads(QUICK.replace('fuel_energy = "neglected"', 'fuel_energy = "neglected"\ncp_compression = 1004.5'))
    found = sensitivities(case)
    for key in ("gas.cp_compression", "gas.cp_combustion", "gas.cp_expansion"):
        held(case, found, key)
    whole, part = (found.row(key) for key in ("gas.cp_compression", "gas.cp_combustion"))
    assert whole is not None and part is not None
    assert whole.changes["thrust"] != pytest.approx(part.changes["thrust"])


def test_numbers_of_a_fuel_of_ones_own_are_solved_apart_where_asked() -> None:
    case = cycle.loads(RIG + "burnt_fraction = 0.8")
    row = sensitivities(case).row("fuel.formation_enthalpy")
    assert row is not None
    assert (row.side, row.below, row.changes) == ("none", "apart", {})
    assert row.reason == "what a fuel of your own is cannot vary within a batch"
    apart = sensitivities(case, apart=True)
    held(case, apart, "fuel.formation_enthalpy")
    moved = apart.row("fuel.formation_enthalpy")
    assert moved is not None and moved.side == "central" and moved.changes["total_temperature_rise_efficiency"] != 0.0


@pytest.mark.parametrize("text", [HOT, DUCT])
def test_what_is_left_out_moves_nothing(text: str) -> None:
    case = cycle.loads(text)
    base = cycle.solve(case).performance
    keys = [key for key in case.numbers if left_out(key) and key != "combustor.slices"]
    assert keys
    for key in keys:
        other = alone(case, key, case.numbers[key] * 1.01).performance
        assert [other[output] for output in HEADLINE["flight"]] == [base[output] for output in HEADLINE["flight"]]


def test_rows_are_ranked_by_the_output_asked_for() -> None:
    found = sensitivities(cycle.loads(DUCT))
    for output in ("thrust", "specific_impulse"):
        sizes = [abs(row.changes[output]) for row in found.ranked(output) if row.side != "none"]
        assert sizes == sorted(sizes, reverse=True)
    assert [row.side for row in found.ranked()][-2:] == ["none", "none"]
    assert sorted(row.input.key for row in found.ranked()) == sorted(row.input.key for row in found.rows)


def test_a_table_that_begins_at_the_entry_and_one_that_begins_behind_it_share_a_batch() -> None:
    case = cycle.loads(DUCT)
    batch = cycle.solve(case, {"combustor.area.1.x": [0.0, 0.1]})
    for i, x in enumerate((0.0, 0.1)):
        one = cycle.solve(case.replace({"combustor.area.1.x": x}))
        assert batch.status[i] == one.status == "solved"
        assert batch.performance.thrust[i] == pytest.approx(one.performance.thrust, rel=TWIN)


def test_shares_that_sum_to_one_in_the_digits_that_were_typed_are_solved() -> None:
    rows = [{"x": 0.05 * (i + 1), "share": 0.3333333} for i in range(3)]
    case = cycle.loads(DUCT).replace({"combustor.injector": rows})
    assert thawed(case.rows["combustor.injector"])[0]["share"] == 0.3333333
    third = cycle.loads(DUCT).replace({"combustor.injector": [{**row, "share": 1.0 / 3.0} for row in rows]})
    assert cycle.solve(case).performance.thrust == pytest.approx(cycle.solve(third).performance.thrust, rel=1e-12)
    with pytest.raises(CaseError, match="do not sum to 1"):
        case.replace({"combustor.injector": [{**row, "share": 0.33333} for row in rows]})
