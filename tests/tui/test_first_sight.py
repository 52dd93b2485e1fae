"""What a newcomer sees first: keys that matter at 80 columns, whole words and numbers, and reasons where there is no solution."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from cycle import load
from tests.case_files import case_file
from tests.tui.screen_support import opened
from tui import figures
from tui.actions import ACTIONS
from tui.journal import standing
from tui.plots.csv_of import csv_text
from tui.screens.roster import Roster
from tui.session import Pin, Session, loaded, with_figures
from tui.views import beside, headline, inputs, margins, pictures, table, went


def session_of(name: str) -> Session:
    """A session that holds the walk of a shipped case, assessed."""
    start = loaded(Session(name), load(case_file(name)), None)
    assert start.case is not None
    found = figures.solve(start.case)
    return with_figures(with_figures(start, start.generation, found), start.generation, figures.assess(found))


@pytest.fixture(scope="module")
def plain() -> Session:
    return session_of("plain")


@pytest.fixture(scope="module")
def narrows() -> Session:
    return session_of("narrows")


@pytest.fixture(scope="module")
def tidegate() -> Session:
    return session_of("tidegate")


def words(rows: list[table.Line]) -> list[str]:
    return ["".join(text for text, _ in row) for row in rows]


def pinned(session: Session, other: Session) -> Session:
    assert other.case is not None and other.figures is not None
    return replace(session, pin=Pin("another", other.case, other.figures))


@pytest.mark.parametrize("wide", [80, 120])
def test_keys_to_change_an_input_to_the_limits_to_compare_and_to_leave_are_on_the_line(plain: Session, wide: int) -> None:
    shown = {a.name: f"{a.shown} {a.label}" for a in ACTIONS}
    always = ("focus", "edit", "why", "compare", "help", "leave")
    for focus, more in (("table", ()), ("inputs", ("more", "undo"))):
        told = words(inputs.keys(replace(plain, focus=focus), wide, 1))[0]
        assert [name for name in (*always, *more) if shown[name] not in told] == []


@pytest.mark.parametrize("wide", [20, 80, 120, 200])
def test_which_rows_of_the_table_are_shown_is_told_whole(tidegate: Session, wide: int) -> None:
    assert any(f"/{len(table.ROWS)} " in row for row in words(table.lines(tidegate, wide, 8)))


def test_figures_are_never_headed_as_changes(plain: Session, narrows: Session) -> None:
    for session in (narrows, pinned(plain, narrows), replace(plain, pin=None)):
        shown = words(table.lines(replace(session, view=1), 80, 8))
        assert not any("change" in row for row in shown)
        assert shown == words(table.lines(session, 80, 8))


def test_the_only_line_says_that_a_limit_is_over(plain: Session) -> None:
    assert words(headline.lines(plain, 20, 1)) == ["OVER 1 F 7.377 kN  "]


def test_a_row_of_an_account_cuts_no_number_short(plain: Session) -> None:
    assert [went._number(v, signed=True) for v in (-0.000851234, 1.23456789e-9)] == [" -0.000851", " +1.235e-9"]
    session = pinned(plain, plain)
    shown = words(went.lines(session, went.ACCOUNTS[0], 80, "unicode"))
    assert any(row.startswith("heat at speed, mixing") for row in shown)


def test_stations_stand_evenly_apart_under_their_own_names(plain: Session) -> None:
    chart = pictures.by_station(plain, "mach", False)
    assert chart.x_axis.names == ("0", "2", "3", "4", "10")
    assert chart.series[0].x == (0.0, 1.0, 2.0, 3.0, 4.0)
    assert [row.split(",")[1] for row in csv_text(chart).splitlines()[1:6]] == list(chart.x_axis.names)


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    for name in ("plain", "narrows"):
        (tmp_path / f"{name}.toml").write_text(case_file(name).read_text())
    return tmp_path


async def test_pictures_of_a_walk_without_a_solution_say_why_and_a_log_axis_that_cannot_be_leaves_the_picture(folder: Path) -> None:
    async with opened(folder / "narrows.toml") as driver:
        await driver.settled()
        await driver.press("l")
        assert "no solution: burner: the heat asked for exceeds" in driver.screen()
        await driver.press("3", "l")
        assert "no log axis: enthalpy has" in driver.screen() and "kinetic energy" in driver.screen()


async def test_a_change_that_cannot_be_shown_is_told(folder: Path) -> None:
    async with opened(folder / "narrows.toml") as driver:
        await driver.settled()
        await driver.press("v")
        assert "figures until then: this walk has no solution" in driver.screen()


async def test_accounts_name_figures_by_their_labels(folder: Path) -> None:
    async with opened(folder / "plain.toml") as driver:
        await driver.settled()
        await driver.press("w")
        await driver.press("a")
        assert "installed thrust: additive and spill drag need" in driver.screen()


async def test_a_search_left_says_nothing_of_itself(folder: Path) -> None:
    async with opened(folder / "plain.toml") as driver:
        await driver.settled()
        await driver.press("w")
        assert "Esc back" in driver.screen()
        await driver.press("s")
        await driver.until(lambda: "gives margin 0" in driver.screen())
        await driver.press("l")
        await driver.until(lambda: "Limits by margin" in driver.screen())
        assert "its input: pressure ratio" in driver.screen() and "solving" not in driver.screen()


async def test_a_comparison_begins_with_what_it_is_about(folder: Path) -> None:
    async with opened(folder / "plain.toml") as driver:
        await driver.settled()
        await driver.press("plus")
        await driver.settled()
        await driver.press("c")
        await driver.until(lambda: "together" in driver.screen())
        assert "inputs that differ" in driver.screen() and "fuel flow" not in driver.screen().split("where B - A")[0]


def test_faults_of_a_file_stand_whole_and_the_rest_is_counted() -> None:
    faults = tuple(f"x.toml: flight.key{n}: a fault of some words that takes more than one line of the screen: given {n}" for n in range(7))
    session = Session("x.toml", faults=faults)
    shown = words(table.lines(session, 60, 7))
    assert shown[0].startswith("flight.key0") and "given 2" in shown[-2]
    assert shown[-1] == "and 4 more: ductwalk check x.toml tells all"
    assert len(words(table.lines(session, 60, 14))) == 14


async def test_without_a_case_only_keys_that_do_something_are_shown(folder: Path) -> None:
    (folder / "broken.toml").write_text("format = 1\n[flight\n")
    async with opened(folder / "broken.toml") as driver:
        await driver.until(lambda: "not TOML" in driver.screen())
        line = driver.screen().splitlines()[-1]
        assert line.split() == ["b", "cases", "?", "keys", "q", "leave"]


async def test_the_file_that_was_made_or_renamed_is_in_hand(folder: Path) -> None:
    def in_hand(name: str) -> bool:
        return driver.app.screen.name_in_hand == name  # type: ignore[attr-defined]

    async with opened(folder / "plain.toml") as driver:
        await driver.settled()
        await driver.press("b")
        await driver.until(lambda: in_hand("plain.toml"))
        for verb, name in (("c", "another.toml"), ("r", "zebra.toml")):
            await driver.press(verb, "ctrl+u")
            await driver.type(name)
            await driver.press("enter")
            await driver.until(lambda name=name: isinstance(driver.app.screen, Roster) and in_hand(name))
        assert sorted(p.name for p in folder.glob("*.toml")) == ["narrows.toml", "plain.toml", "zebra.toml"]


def test_edits_taken_back_are_not_counted_as_work() -> None:
    edit, undo, redo = {"edit": {}}, {"undo": 1}, {"redo": 1}
    assert [standing(r) for r in ([edit, edit], [edit, undo], [edit, undo, undo, redo, redo], [edit, undo, edit, redo], [])] == [
        2,
        0,
        1,
        1,
        0,
    ]


def test_the_corridor_is_told_in_the_unit_of_its_input_and_once(tidegate: Session) -> None:
    corridor, ignition = (margins.limit(tidegate, key) for key in ("corridor_high", "ignition_temperature"))
    assert corridor is not None and ignition is not None
    assert margins.against(corridor, "us") == "1044 of at most 2005 psf"
    assert margins.against(ignition, "us") == "1363 of at least 1260 degR"


def test_the_verdict_of_the_referee_is_never_its_name_alone() -> None:
    said = ("", "Cantera check: no solved point", "Cantera check agrees: T within 1 K")
    assert [headline.verdict(s) for s in said] == ["Cantera check: not run", "Cantera check: none", "Cantera check agrees"]


def test_an_account_on_a_narrow_screen_shows_its_numbers(plain: Session) -> None:
    assert "7.377" in words(went.lines(plain, went.ACCOUNTS[0], 20, "unicode"))[-1][:20]


def test_a_title_that_finds_no_room_beside_its_columns_stands_above_them() -> None:
    rows = [beside._Row("Mach number", "", tuple("1234567"))]
    assert words(beside._grid("stations: B - A, %", list("0123456"), rows, 80))[1].strip() == "stations: B - A, %"
    assert words(beside._grid("stations: B - A, %", list("01"), rows, 80))[1].split() == ["stations:", "B", "-", "A,", "%", "0", "1"]


def test_a_value_of_the_previous_inputs_keeps_its_exponent_and_its_parentheses(tidegate: Session) -> None:
    assert tidegate.case is not None and tidegate.figures is not None
    fat = tidegate.case.replace({"combustor.equivalence_ratio": 1.2})
    failing = replace(tidegate, case=fat, figures=figures.solve(fat), good=tidegate.figures)
    assert failing.failed
    cells = [c for row in words(table.lines(failing, 80, 30))[2:] for c in row.split() if c[0] == "("]
    assert len(cells) > 5 and [c for c in cells if not c.endswith(")")] == []


def test_a_potential_of_nothing_is_nothing_where_no_other_station_is_reached() -> None:
    lost = replace(figures.solve(load(case_file("plain"))), stations={"0": {"thrust_potential": 7e-12, "stream_thrust": 4e4}})
    assert table.settled(lost, "0", "thrust_potential") == 0.0


async def test_a_name_that_another_file_has_is_told_as_such(folder: Path) -> None:
    before = (folder / "narrows.toml").read_bytes()
    async with opened(folder / "plain.toml") as driver:
        await driver.settled()
        await driver.press("S", "ctrl+u")
        await driver.type(str(folder / "narrows.toml"))
        await driver.press("enter")
        await driver.until(lambda: "There is a file of that name" in driver.screen())
        assert "changed on disk" not in driver.screen()
    assert (folder / "narrows.toml").read_bytes() == before
