"""Parts of the screen that show a whole flowpath: stations 1 and 9, rows of tables, words of the duct, the second pass."""

from __future__ import annotations

import threading
from dataclasses import replace

import pytest

import cycle
from cycle.case import Case, loads
from cycle.errors import CaseError
from tui import figures, items, rows, session
from tui.engine import Engine, Result
from tui.figures import PERFORMANCE_KEYS, Figures, Margin, Passage
from tui.items import completed
from tui.screens import ducting
from tui.session import Session
from tui.views import headline, table

DUCT = """
format = 1
title = "three ramps, invented for the tests of the screen"
[flight]
mach = 8.0
dynamic_pressure = "50 kPa"
[gas]
model = "constant-gamma"
[inlet]
lip_x = "2.3 m"
lip_y = "0.5 m"
[[inlet.ramp]]
angle = "4 deg"
length = "1.2 m"
[[inlet.ramp]]
angle = "5 deg"
length = "0.6 m"
[[inlet.ramp]]
angle = "6 deg"
[isolator]
length = "0.5 m"
hydraulic_diameter = "0.08 m"
momentum_thickness = "0.6 mm"
[fuel]
heating_value = "120 MJ/kg"
[combustor]
process = "duct"
fuel_air_ratio = 0.01
[[combustor.area]]
x = 0.0
area_ratio = 1.0
[[combustor.area]]
x = "30 cm"
area_ratio = 1.0
[[combustor.area]]
x = "1.2 m"
area_ratio = 1.8
[[combustor.injector]]
x = "5 cm"
[nozzle]
exit_area_over_capture = 1.5
"""

THROAT = """
format = 1
title = "two ramps and a choked throat, invented for the tests of the screen"
[flight]
mach = 4.0
dynamic_pressure = "50 kPa"
[gas]
model = "constant-gamma"
[inlet]
terminal_shock = true
[[inlet.ramp]]
angle = "8 deg"
[[inlet.ramp]]
angle = "10 deg"
[fuel]
heating_value = "120 MJ/kg"
[combustor]
process = "constant-pressure"
fuel_air_ratio = 0.01
[nozzle]
throat = "sized"
exit_area_over_capture = 1.5
"""


@pytest.fixture(scope="module")
def duct() -> Case:
    return loads(DUCT, "duct")


@pytest.fixture(scope="module")
def throat() -> Case:
    return loads(THROAT, "throat")


def opening(case: Case, station: str = "0") -> Session:
    return replace(session.loaded(Session("flowpath.toml"), case, None), station=station)


def keys_at(case: Case, station: str) -> set[str]:
    return {i.key for i in items.items(opening(case, station))}


# stations and their inputs


def test_stations_are_those_the_case_has(duct: Case, throat: Case) -> None:
    assert session.columns_of(duct) == ("0", "1", "2", "3", "4", "10")
    assert session.columns_of(throat) == ("0", "1", "2", "3", "4", "5", "10")
    internal = throat.replace({"nozzle.internal_area_ratio": 1.5, "nozzle.throat_area": 0.1})
    assert session.columns_of(internal) == ("0", "1", "2", "3", "4", "5", "9", "10")
    plain = duct.replace({"inlet.adiabatic_efficiency": 0.9, "inlet.temperature_ratio": 4.0})
    assert session.columns_of(plain) == ("0", "2", "3", "4", "10")


def test_predicted_stations_are_those_of_the_walk(duct: Case, throat: Case) -> None:
    internal = throat.replace({"nozzle.internal_area_ratio": 1.2})
    for case in (duct, throat, internal):
        walk = cycle.solve(case)
        assert walk.status == "solved"
        assert tuple(walk.station) == session.columns_of(case)
    assert "9" in session.columns_of(internal)


@pytest.mark.parametrize("key", ["inlet.throat_area", "inlet.internal_contraction"])
def test_the_walk_stays_where_an_inlet_throat_takes_its_value(duct: Case, key: str) -> None:
    walk = cycle.solve(duct)
    said = duct.replace({key: figures.PRESENT[key](figures.take(walk))})
    # the same area said in another way: round-off
    assert cycle.solve(said).performance.thrust == pytest.approx(walk.performance.thrust, rel=1e-9)


def test_every_input_of_a_flowpath_stands_at_its_component(duct: Case, throat: Case) -> None:
    assert {"inlet.ramp.1.angle", "inlet.ramp.2.length", "inlet.lip_x"} <= keys_at(duct, "1")
    assert keys_at(duct, "2") == {"inlet.cowl_angle", "inlet.throat", "inlet.terminal", "inlet.viscous"}
    assert "isolator.length" in keys_at(duct, "3")
    assert {"combustor.area.3.area_ratio", "combustor.injector.1.x", "fuel.heating_value"} <= keys_at(duct, "4")
    assert keys_at(throat, "5") == {"nozzle.throat"}
    for case in (duct, throat):
        everywhere = set().union(*(keys_at(case, s) for s in session.columns_of(case)))
        assert {s.input.key for s in case.inputs() if not rows.hidden(case, s.input.key)} <= everywhere


def test_a_row_shows_the_one_size_it_is_given_by(duct: Case) -> None:
    here = keys_at(duct, "4")
    assert "combustor.area.1.area" not in here
    assert {"combustor.area.1.area_ratio", "combustor.area.1.perimeter"} <= here
    assert "combustor.area.2.perimeter" not in here
    assert rows.others("combustor.area.2.area_ratio") == ("combustor.area.2.area",)


@pytest.mark.parametrize("columns", [40, 60, 80, 112, 200])
def test_the_station_in_hand_is_always_in_sight(throat: Case, columns: int) -> None:
    case = throat.replace({"nozzle.internal_area_ratio": 1.5})
    for station in session.columns_of(case):
        painted = table.lines(opening(case, station), columns, 11)
        heads = "".join(text for text, _ in painted[1])
        assert f"[ {station} ]" in heads
        assert len(heads) <= columns


def test_a_station_that_goes_hands_on_to_the_next_one(duct: Case) -> None:
    now = opening(duct, "1")
    plain = duct.replace({"inlet.adiabatic_efficiency": 0.9, "inlet.temperature_ratio": 4.0})
    assert session.edited(now, plain, "inlet").station == "2"


# rows of tables


def areas(case: Case) -> list[tuple[float, float]]:
    return [(row["x"], row["area_ratio"]) for row in case.rows["combustor.area"]]


def test_one_section_more_leaves_the_duct_as_it_is(duct: Case) -> None:
    changes, key = rows.more(duct, "combustor.area.2.area_ratio")
    new = duct.replace(changes)
    assert key == "combustor.area.3.area_ratio"
    assert areas(new) == [(0.0, 1.0), (0.3, 1.0), (0.75, 1.4), (1.2, 1.8)]
    assert new.spelled["combustor.area"][1]["x"] == "30 cm"
    # the march is the same law of area: a corner of its own is all that differs
    assert cycle.solve(new).performance.thrust == pytest.approx(cycle.solve(duct).performance.thrust, rel=1e-6)
    gone, back = rows.less(new, key)
    assert new.replace(gone) == duct
    assert back == key


def test_one_section_more_behind_the_last_makes_the_duct_longer(duct: Case) -> None:
    new = duct.replace(rows.more(duct, "combustor.area.3.x")[0])
    assert areas(new)[-1] == (pytest.approx(2.1, rel=1e-12), 1.8)


def test_injectors_share_the_fuel(duct: Case) -> None:
    two = duct.replace(rows.more(duct, "combustor.injector.1.share")[0])
    assert [row["share"] for row in two.rows["combustor.injector"]] == [0.5, 0.5]
    three = two.replace(rows.more(two, "combustor.injector.2.share")[0])
    assert [row["share"] for row in three.rows["combustor.injector"]] == [0.5, 0.25, 0.25]
    change = completed({"set": {"combustor.injector.1.share": "20 %"}}, three, {})
    new = session.apply(three, change)
    # the others keep their proportion; round-off of one division
    assert [row["share"] for row in new.rows["combustor.injector"]] == pytest.approx([0.2, 0.4, 0.4], rel=1e-12)
    left = new.replace(rows.less(new, "combustor.injector.1.x")[0])
    assert [row["share"] for row in left.rows["combustor.injector"]] == pytest.approx([0.5, 0.5], rel=1e-12)


def test_a_share_that_is_none_is_refused_by_the_case(duct: Case) -> None:
    two = duct.replace(rows.more(duct, "combustor.injector.1.share")[0])
    with pytest.raises(CaseError, match="share"):
        session.apply(two, completed({"set": {"combustor.injector.1.share": "much"}}, two, {}))


def test_perimeters_stand_in_all_rows_or_in_none(duct: Case) -> None:
    given = session.apply(duct, completed({"set": {"combustor.area.1.perimeter": 0.9}}, duct, {}))
    assert [row["perimeter"] for row in given.rows["combustor.area"]] == [0.9] * 3
    one = session.apply(given, completed({"set": {"combustor.area.2.perimeter": 1.1}}, given, {}))
    assert [row["perimeter"] for row in one.rows["combustor.area"]] == [0.9, 1.1, 0.9]
    assert session.apply(one, completed({"set": {"combustor.area.3.perimeter": None}}, one, {})) == duct


def test_a_last_ramp_without_a_length_stays_the_last(duct: Case) -> None:
    changes, key = rows.more(duct, "inlet.ramp.3.angle")
    new = duct.replace(changes)
    assert [row.get("length") for row in new.rows["inlet.ramp"]] == [1.2, 0.6, 0.6, None]
    assert key == "inlet.ramp.3.angle"


def test_the_journal_takes_rows_and_makes_them_again(duct: Case) -> None:
    import json

    changes = {"set": rows.more(duct, "combustor.area.2.x")[0]}
    again = session.apply(duct, json.loads(json.dumps(changes)))
    assert again == session.apply(duct, changes)
    assert items.describe(duct, again, changes, "si") == "duct section: one more, 4 in all"


# words


def margin(key: str, state: str, value: float) -> Margin:
    return Margin(key, key, state, value, 1.0 - value, 1.0, "ratio", True, "", "")


def test_margins_of_the_mode_are_said_first_and_with_their_figure(duct: Case) -> None:
    limits = (
        margin("separation", "near", 0.08),
        margin("unstart", "near", 0.034),
        margin("start", "over", -0.63),
        margin("isolator_length", "over", -1.18),
        margin("throat_capacity", "not assessed", float("nan")),
    )
    nothing = dict.fromkeys(PERFORMANCE_KEYS, float("nan"))
    found = Figures("solved", "scramjet", "", "", {}, {}, nothing, {}, (), (), 0.0, None, limits=limits, audit_ok=True, audit="ok")
    now = replace(opening(duct), figures=found)
    wide = "".join(text for text, _ in headline.lines(now, 160, 5)[3])
    assert wide == "OVER isolator -118 %, inlet start -63 % | near: unstart 3.4 %, inlet separation 8 % | not assessed: throat | audit ok"
    narrow = "".join(text for text, _ in headline.lines(now, 80, 5)[3])
    assert narrow == "OVER isolator, 1 more | near: unstart 3.4 %, 1 more | not assessed: 1 | audit ok"


def test_a_duct_says_how_it_runs() -> None:
    isolator = {"pressure_ratio": 11.9, "train_length": 1.09, "mode_scramjet": 0.0, "mode_ramjet-thermal-throat": 1.0}
    assert table.told(Passage("isolator", "isolator", "2", "3", isolator), "si") == ["thermal throat", "p3/p2 11.9", "train 1.09 m"]
    burner = {"peak_pressure_ratio": 12.1, "throat_x": 0.3}
    assert table.told(Passage("burner", "burner", "3", "4", burner), "si") == ["peak p/p2 12.1", "throat at 0.3 m"]


def test_heads_of_the_duct_page_name_their_units(duct: Case) -> None:
    now = replace(opening(duct), figures=figures.solve(duct), system="us")
    heads = ["".join(text for text, _ in row) for row in ducting.duct_head(now, 80)[-2:]]
    assert heads[0].split() == [name for _, name, _ in ducting.COLUMNS]
    assert heads[1].split() == ["ft", "psi", "degR", "ft^2", "ft^2", "psi"]


# the second pass


def test_the_second_pass_waits_for_edits_and_never_holds_one_up() -> None:
    came: list[Result] = []
    hold, begun, solved = threading.Event(), threading.Event(), threading.Event()

    def post(result: Result) -> None:
        came.append(result)
        if result.kind == "solve" and result.generation == 2:
            solved.set()

    def slow() -> None:
        begun.set()
        hold.wait(5)

    engine = Engine(post)
    engine.newest("assess", 1, slow)
    engine.newest("solve", 1, lambda: None)
    engine.start()
    assert begun.wait(5)
    assert [r.kind for r in came] == ["solve"]
    engine.newest("solve", 2, lambda: None)
    assert solved.wait(5)
    hold.set()


def test_what_restores_an_unstarted_inlet_comes_with_the_second_pass(duct: Case) -> None:
    walk = cycle.solve(duct.replace({"combustor.fuel_air_ratio": 0.4}))
    quick = figures.take(walk)
    assert quick.status == "unstarted"
    assert "the inlet does not stay started" in quick.reason
    assert "less heat" in quick.reason
    assert "heat_limits" not in vars(walk)
    assert "fuel-air ratio 0.4, at most 0." in figures.assess(quick).reason
