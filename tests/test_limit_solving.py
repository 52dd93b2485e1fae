"""The value of an input at which a limit is just reached: the margin there, the closed searches, the ends of the solution."""

from __future__ import annotations

import math
from functools import cache
from pathlib import Path

import pytest

import cycle
from cycle.case import Case
from cycle.limit_solving import ZERO, Reached, search, solve_for_limit
from tests.case_files import case_file

CASES = Path(__file__).parents[1] / "cases"


@cache
def shipped(name: str) -> Case:
    return cycle.load(case_file(name))


def margin_at(case: Case, found: Reached) -> float:
    """Margin of the limit in a walk of its own at the value found: no batch, no search."""
    walk = cycle.solve(case.replace({found.input.key: found.value}))
    assert walk.status == "solved"
    return float(next(m.margin for m in walk.limits if m.key == found.limit))


@pytest.mark.parametrize(
    ("name", "limit", "key"),
    [
        ("plain", "corridor_low", "flight.dynamic_pressure"),
        ("plain", "ignition_temperature", "inlet.pressure_ratio"),
        ("plain", "ignition_pressure", "flight.mach"),
        ("plain", "nozzle_separation", "nozzle.exit_area_over_capture"),
        ("plain", "thermal_choking", "combustor.equivalence_ratio"),
        ("plain", "thermal_choking", "inlet.pressure_ratio"),
        ("tidegate", "isolator_length", "isolator.length"),
        ("lighthouse", "throat_capacity", "nozzle.throat_area"),
    ],
)
def test_margin_is_zero_at_the_value_found_and_not_negative(name: str, limit: str, key: str) -> None:
    found = solve_for_limit(shipped(name), limit, key)
    assert found.kind == "zero"
    # choking is found as the end of the solution: its margin is told by the largest heat of the walk there
    assert -1e-9 <= margin_at(shipped(name), found) <= (10.0 if limit == "thermal_choking" else 1.0) * ZERO


def test_the_heat_at_choking_is_that_of_the_closed_search() -> None:
    found = solve_for_limit(shipped("plain"), "thermal_choking", "combustor.equivalence_ratio")
    assert found.value == pytest.approx(cycle.solve(shipped("plain")).largest_heat(), rel=ZERO)


@pytest.mark.parametrize(("limit", "name"), [("duct_separation", "attached"), ("unstart", "unstart"), ("unstart_heat", "unstart")])
def test_the_heat_at_the_ends_of_the_modes_is_that_of_the_search_for_it(limit: str, name: str) -> None:
    # without the length of its shock train only the impulse unstarts it
    case = shipped("tidegate").replace({"isolator.momentum_thickness": None})
    found = solve_for_limit(case, limit, "combustor.equivalence_ratio")
    assert found.kind == "zero"
    assert found.value == pytest.approx(cycle.solve(case).heat_limits[name], rel=1e-5)


def test_unstart_by_the_isolator_is_found_where_the_solution_ends() -> None:
    case = shipped("tidegate")
    walk = cycle.solve(case)
    found = solve_for_limit(case, "unstart_heat", "combustor.equivalence_ratio")
    assert walk.heat_limit_causes["unstart"] == "isolator-length"
    assert found.value == pytest.approx(walk.heat_limits["unstart"], rel=1e-5)


def test_where_the_solution_ends_first_its_last_point_is_told() -> None:
    case = shipped("plain")
    found = solve_for_limit(case, "data_high", "combustor.equivalence_ratio")
    assert (found.kind, found.status) == ("edge", "choked")
    assert found.margin == pytest.approx(margin_at(case, found), rel=1e-9)
    assert cycle.solve(case.replace({found.input.key: found.value * (1.0 + 1e-5)})).status == "choked"


def test_a_limit_out_of_reach_or_not_assessed_says_why() -> None:
    case = shipped("plain")
    never = solve_for_limit(case, "nozzle_separation", "limits.ignition_pressure")
    assert never.kind == "none" and math.isnan(never.value) and "not reached within the bounds" in never.words
    unknown = solve_for_limit(case, "gas_temperature", "combustor.equivalence_ratio")
    assert unknown.kind == "none" and "not given" in unknown.words
    assert "no value" in solve_for_limit(case, "data_low", "flight.altitude").words


def test_a_walk_that_fails_is_brought_back_to_the_limit_it_is_beyond() -> None:
    choked = shipped("plain").replace({"combustor.equivalence_ratio": 1.4})
    found = solve_for_limit(choked, "thermal_choking", "combustor.equivalence_ratio")
    assert found.kind == "zero"
    assert found.value == pytest.approx(cycle.solve(choked).largest_heat(), rel=ZERO)


def test_a_search_comes_in_pieces_and_ends_with_what_it_found() -> None:
    pieces = list(search(shipped("plain"), "corridor_high", "flight.dynamic_pressure"))
    assert pieces[-1] is not None and pieces[-1].kind == "zero"
    assert len(pieces) > 2 and all(p is None for p in pieces[:-1])


def test_unknown_keys_are_refused() -> None:
    with pytest.raises(KeyError):
        solve_for_limit(shipped("plain"), "unheard of", "flight.mach")
    with pytest.raises(KeyError):
        solve_for_limit(shipped("plain"), "corridor_low", "gas.model")
