"""Shares of a difference: the laws that single them out, and what they say of cases."""

from __future__ import annotations

import math
from itertools import permutations
from random import Random

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import cycle
from cycle.case import taking
from cycle.record import case_of, case_record
from cycle.shares import Shares, shapley, shares, shares_in_steps
from tests.case_files import case_file
from tests.tui.command_support import CHOKED, DUCT, HOT, QUICK, RIG, ROOT

EPSILON = 2.0**-52


@st.composite
def games(draw: st.DrawFn, most: int = 5) -> tuple[int, dict[frozenset[int], float]]:
    """A number of players and a value for every set of them."""
    count = draw(st.integers(1, most))
    values = draw(st.lists(st.floats(-1e6, 1e6), min_size=2**count, max_size=2**count))
    return count, {frozenset(i for i in range(count) if mask >> i & 1): value for mask, value in enumerate(values)}


@given(games())
def test_shares_add_up_to_the_difference(game: tuple[int, dict[frozenset[int], float]]) -> None:
    count, value = game
    found = shapley(count, value.__getitem__)
    whole = value[frozenset(range(count))] - value[frozenset()]
    assert abs(math.fsum(found) - whole) <= 2.0 * count * EPSILON * max(map(abs, value.values()))


@given(games())
def test_a_player_that_changes_nothing_has_no_share(game: tuple[int, dict[frozenset[int], float]]) -> None:
    count, value = game
    idle = {s: value[s - {count - 1}] for s in value}
    assert shapley(count, idle.__getitem__)[-1] == 0.0


@given(games())
def test_players_that_do_the_same_have_the_same_share(game: tuple[int, dict[frozenset[int], float]]) -> None:
    count, value = game
    swap = {0: count - 1, count - 1: 0}

    def even(taken: frozenset[int]) -> float:
        return value[taken] + value[frozenset(swap.get(i, i) for i in taken)]

    found = shapley(count, even)
    assert found[0] == found[-1]


@given(games(4), st.floats(-10.0, 10.0))
def test_shares_of_a_sum_are_sums_of_shares(game: tuple[int, dict[frozenset[int], float]], factor: float) -> None:
    count, value = game
    extra = {s: factor * len(s) for s in value}
    joined = shapley(count, lambda s: value[s] + extra[s])
    size = max(map(abs, value.values())) + abs(factor) * count
    for both, one in zip(joined, shapley(count, value.__getitem__), strict=True):
        assert both == pytest.approx(one + factor, abs=8.0 * count * EPSILON * size)


def held(found: Shares) -> None:
    """The shares close, and every group that differs is in one part."""
    assert found.why_not == ""
    for output in found.outputs:
        whole = found.second[output] - found.first[output]
        assert math.fsum(part.shares[output] for part in found.parts) == pytest.approx(
            whole, rel=0.0, abs=16.0 * EPSILON * max(abs(found.first[output]), abs(found.second[output]))
        )


def test_two_groups_have_the_mean_of_both_orders() -> None:
    a = cycle.loads(HOT)
    b = a.replace({"flight.mach": 8.5, "combustor.equivalence_ratio": 0.7})
    found = shares(a, b)
    held(found)
    thrust = {key: cycle.solve(case).performance.thrust for key, case in
              {"a": a, "b": b, "f": taking(a, b, ["flight"]), "c": taking(a, b, ["combustor"])}.items()}  # fmt: skip
    flight, combustor = found.parts
    assert (flight.groups, flight.keys) == (("flight",), ("flight.mach",))
    assert flight.shares["thrust"] == pytest.approx(0.5 * (thrust["f"] - thrust["a"] + thrust["b"] - thrust["c"]), rel=1e-7)
    assert combustor.shares["thrust"] == pytest.approx(0.5 * (thrust["c"] - thrust["a"] + thrust["b"] - thrust["f"]), rel=1e-7)


def test_one_group_has_the_whole_difference_and_idle_ones_have_none() -> None:
    a = cycle.loads(HOT)
    b = a.replace({"nozzle.velocity_coefficient": 0.97, "limits.ignition_pressure": 4e4, "fuel.supply_pressure": 6e6})
    found = shares(a, b)
    held(found)
    by_group = {part.groups: part.shares for part in found.parts}
    # all points stand in one batch, where a point and its twin differ by rounding
    assert by_group["engine",]["thrust"] == pytest.approx(0.0, abs=1e-9 * found.first["thrust"])
    assert by_group["fuel",]["thrust"] == pytest.approx(0.0, abs=1e-9 * found.first["thrust"])
    assert by_group["nozzle",]["thrust"] == pytest.approx(found.second["thrust"] - found.first["thrust"], rel=1e-6)


@settings(max_examples=10)
@given(
    st.fixed_dictionaries(
        {
            "flight.mach": st.floats(7.0, 10.0),
            "inlet.temperature_ratio": st.floats(3.0, 5.0),
            "combustor.fuel_air_ratio": st.floats(0.0, 0.015),
            "gas.cp_compression": st.floats(950.0, 1100.0),
            "gas.cp_combustion": st.floats(1000.0, 1300.0),
            "engine.capture_area": st.floats(0.1, 2.0),
        }
    )
)
def test_shares_of_any_change_close(changes: dict[str, float]) -> None:
    a = cycle.loads(QUICK)
    found = shares(a, a.replace(changes))
    assert not found.why_not or "no solution" in found.why_not or "swapped" in found.why_not
    if not found.why_not:
        held(found)


def test_choices_may_differ_too() -> None:
    a, b = cycle.loads(HOT), cycle.load(case_file("plain"))
    held(shares(a, b))
    assert a.choices["combustor.process"] != b.choices["combustor.process"]


def test_groups_that_only_make_sense_together_are_taken_together() -> None:
    # constant gamma without a formula cannot burn by equivalence ratio: gas, fuel and combustor hang together
    found = shares(cycle.loads(QUICK), cycle.loads(HOT))
    held(found)
    (joint,) = [part.groups for part in found.parts if len(part.groups) > 1]
    assert {"gas", "fuel", "combustor"} <= set(joint)
    assert len(found.notes) == 1 and "are taken together: with" in found.notes[0] and "no case" in found.notes[0]


def restricted(count: int, value: dict[frozenset[int], float], lost: set[frozenset[int]]) -> list[float] | None:
    """Means over the orders without a lost set, order by order; None where there is none."""
    orders = [o for o in permutations(range(count)) if not any(frozenset(o[:k]) in lost for k in range(count + 1))]
    gains = [{o[k]: value[frozenset(o[: k + 1])] - value[frozenset(o[:k])] for k in range(count)} for o in orders]
    return [math.fsum(g[i] for g in gains) / len(gains) for i in range(count)] if gains else None


@given(games(4), st.randoms(use_true_random=False))
def test_orders_that_pass_a_lost_set_are_left_out_of_the_mean(game: tuple[int, dict[frozenset[int], float]], chance: Random) -> None:
    count, value = game
    lost = {s for s in value if 0 < len(s) < count and chance.random() < 0.3}
    kept = {s: v for s, v in value.items() if s not in lost}  # a lost set has no value to be asked for
    found = shapley(count, kept.__getitem__, lambda s: s not in lost)
    expected = restricted(count, value, lost)
    if expected is None:
        assert all(map(math.isnan, found))
        return
    size = max(map(abs, value.values()))
    assert found == pytest.approx(expected, rel=0.0, abs=64.0 * EPSILON * size)
    assert abs(math.fsum(found) - value[frozenset(range(count))] + value[frozenset()]) <= 64.0 * EPSILON * size


def test_a_combination_without_a_solution_is_named_and_the_orders_that_avoid_it_are_averaged() -> None:
    plain, lantern = (cycle.load(case_file(name)) for name in ("plain", "lantern"))
    assert cycle.solve(taking(plain, lantern, ["inlet"])).status == "choked"
    found = shares(plain, lantern, ("A", "B"))
    held(found)
    assert [part.groups for part in found.parts] == [(g,) for g in ("flight", "inlet", "fuel", "combustor", "nozzle", "engine")]
    *told, count = found.notes
    assert told[0].startswith("with inlet (inlet.") and " of B and all else of A there is no solution, choked (burner)" in told[0]
    assert count.endswith("of 720 orders without such a step")


def test_shares_over_the_orders_that_exist_are_those_computed_by_hand() -> None:
    """Slower flight and more fuel: with the fuel first it chokes, so the flight of the only order left comes first."""
    first = cycle.load(case_file("narrows")).replace({"combustor.equivalence_ratio": 0.3})
    second = first.replace({"flight.mach": 9.0, "combustor.equivalence_ratio": 0.6})
    assert cycle.solve(taking(first, second, ["combustor"])).status == "choked"
    found = shares(first, second, ("A", "B"))
    held(found)
    thrust = [cycle.solve(case).performance.thrust for case in (first, taking(first, second, ["flight"]), second)]
    assert [part.shares["thrust"] for part in found.parts] == pytest.approx([thrust[1] - thrust[0], thrust[2] - thrust[1]], rel=1e-7)
    assert found.notes == (
        "with combustor (combustor.equivalence_ratio) of B and all else of A there is no solution, choked (burner)",
        "the shares are means over the 1 of 2 orders without such a step",
    )


def test_where_no_order_is_left_the_combinations_are_named() -> None:
    """A fast flight with a small compression, a slow one with a large one: neither flight has a solution with the other's inlet."""
    narrows = cycle.load(case_file("narrows"))
    first = narrows.replace({"flight.mach": 18.0, "inlet.exit_mach": 9.0, "combustor.equivalence_ratio": 0.1})
    second = first.replace({"flight.mach": 5.0, "inlet.exit_mach": 2.0})
    found = shares(first, second, ("A", "B"))
    assert found.why_not == (
        "no group can be swapped without the others: "
        "with flight (flight.mach) of B and all else of A there is no solution, under-compressed (inlet)"
    )
    assert found.notes == ("with inlet (inlet.exit_mach) of B and all else of A there is no solution, out-of-range (inlet)",)


def test_a_lost_side_a_rig_and_a_twin_have_no_shares() -> None:
    quick = cycle.loads(QUICK, "quick")
    choked = shares(quick, cycle.loads(CHOKED, "hot"))
    assert choked.why_not == "hot: no solution, choked (burner)"
    assert all(part.shares == {} for part in choked.parts)
    assert shares(quick, cycle.loads(RIG)).why_not == "a flight and a rig have no headline figure in common"
    assert shares(quick, quick).why_not == "the inputs do not differ"


def test_a_swap_that_changes_nothing_in_some_combinations_has_its_share_of_the_others() -> None:
    """Humid air is none of a constant-gamma case: with the gas swapped, air of either side is the same case."""
    a = cycle.load(ROOT / "cases" / "lantern.toml").replace(
        {"combustor.equivalence_ratio": None, "combustor.fuel_air_ratio": 0.02, "air.relative_humidity": 0.5, "nozzle.chemistry": None}
    )
    a = a.replace({"gas.model": "frozen"})
    b = a.replace({"gas.model": "constant-gamma", "air.relative_humidity": None})
    assert taking(a, b, ["gas"]) == b
    found = shares(a, b)
    held(found)
    dry = a.replace({"air.relative_humidity": None})
    humid, without = (cycle.solve(case).performance.thrust for case in (a, dry))
    (air,) = [part.shares["thrust"] for part in found.parts if part.groups == ("air",)]
    assert air == pytest.approx(0.5 * (without - humid), rel=1e-6)


def test_followers_keep_their_own_value_where_one_side_gives_it() -> None:
    a = cycle.loads(QUICK).replace({"gas.cp_compression": 1000.0})
    b = a.replace({"gas.cp_compression": 1050.0, "gas.cp_combustion": 1000.0, "flight.mach": 8.5})
    found = shares(a, b)
    held(found)
    assert found.second["thrust"] == pytest.approx(cycle.solve(b).performance.thrust, rel=1e-9)


@pytest.mark.parametrize("text", [QUICK, HOT, RIG, DUCT])
def test_a_record_gives_its_case_back(text: str) -> None:
    case = cycle.loads(text)
    again = case_of(case_record(case), "again")
    assert (dict(again.numbers), dict(again.choices), again.title) == (dict(case.numbers), dict(case.choices), case.title)


def test_shares_in_steps_are_those_found_at_once() -> None:
    a = cycle.loads(QUICK, "a")
    b = a.replace({"flight.mach": 6.5, "inlet.temperature_ratio": 4.2, "combustor.fuel_air_ratio": 0.006})
    steps, count = shares_in_steps(a, b, most=2), 0
    found: Shares | None = None
    while found is None:
        try:
            next(steps)
            count += 1
        except StopIteration as done:
            found = done.value
    assert count > 4
    at_once = shares(a, b)
    assert [p.groups for p in found.parts] == [p.groups for p in at_once.parts]
    for ours, theirs in zip(found.parts, at_once.parts, strict=True):
        assert ours.shares == pytest.approx(dict(theirs.shares), rel=1e-9)
